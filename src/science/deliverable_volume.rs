//! Deliverable volume of oral liquids (USP ⟨698⟩, both schemes as in USP 31).

use super::uniformity::Decision;

/// The kind of container.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Container {
    /// Multiple doses: not below 95 %.
    MultipleDose,
    /// One dose: 95–110 %.
    SingleUnit,
}

/// Judges the volumes of 10 or 30 containers, in % of label. Stage 1 passes with a mean of 100 % or more and
/// none outside; goes on where the mean is below 100 % and none is outside, or the mean is 100 % or more and
/// one is outside, though not by more than 5 %. `None` for other numbers.
pub fn judge(container: Container, percents: &[f64]) -> Option<Decision> {
    let (inner, outer) = match container {
        Container::MultipleDose => ((95.0, f64::INFINITY), (90.0, f64::INFINITY)),
        Container::SingleUnit => ((95.0, 110.0), (90.0, 115.0)),
    };
    let finite = percents.iter().all(|p| p.is_finite());
    let mean = percents.iter().sum::<f64>() / percents.len() as f64;
    let outside = |(low, high): (f64, f64)| percents.iter().filter(|p| **p < low || **p > high).count();
    let (beyond, far) = (outside(inner), outside(outer));
    // A mean of exactly 100 % may miss it by rounding of the sum.
    let enough = mean >= 100.0 - 1e-9;
    match (finite, percents.len()) {
        (true, 10) if enough && beyond == 0 => Some(Decision::Pass),
        (true, 10) if !enough && beyond == 0 => Some(Decision::TestTwentyMore),
        (true, 10) if enough && beyond == 1 && far == 0 => Some(Decision::TestTwentyMore),
        (true, 10) => Some(Decision::Fail),
        (true, 30) if enough && beyond <= 1 && far == 0 => Some(Decision::Pass),
        (true, 30) => Some(Decision::Fail),
        _ => None,
    }
}

/// Volume delivered, from mass and density. `None` unless both are positive.
pub fn volume(mass: f64, density: f64) -> Option<f64> {
    let volume = mass / density;
    (mass > 0.0 && density > 0.0 && volume.is_finite()).then_some(volume)
}
