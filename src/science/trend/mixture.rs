//! A weighted mixture of shifted and scaled Student distributions: what the grid predicts.

use crate::science::distribution::Tails;
use crate::science::distribution::student::Student;

/// One part: weight, centre and scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Part {
    pub weight: f64,
    pub centre: f64,
    pub scale: f64,
}

/// A predictive distribution.
#[derive(Clone, Debug, PartialEq)]
pub struct Mixture {
    pub(super) parts: Vec<Part>,
    /// Centres are counted from here.
    pub(super) origin: f64,
    /// Degrees of freedom of every part.
    pub(super) df: f64,
}

/// Weights below this share are dropped.
const NEGLIGIBLE: f64 = 1e-14;

impl Mixture {
    /// Turns (ln weight, centre, scale) into a mixture with weights that sum to one. `None` where a number is
    /// not finite or a scale not above zero.
    pub(super) fn new(mut parts: Vec<Part>, origin: f64, df: f64) -> Option<Self> {
        let usable = |part: &Part| {
            part.weight.is_finite() && part.centre.is_finite() && part.scale > 0.0 && part.scale.is_finite()
        };
        (origin.is_finite() && df > 0.0 && parts.iter().all(usable)).then_some(())?;
        normalise(&mut parts, |part| &mut part.weight);
        Some(Self { parts, origin, df })
    }

    /// Degrees of freedom ν.
    pub fn df(&self) -> f64 {
        self.df
    }

    /// Both tails at y, each its own sum. `None` without degrees of freedom.
    pub fn tails(&self, y: f64) -> Option<Tails> {
        let student = Student::new(self.df)?;
        let r = y - self.origin;
        let mut sum = Tails { lower: 0.0, upper: 0.0 };
        for part in &self.parts {
            let tails = student.tails((r - part.centre) / part.scale);
            sum.lower += part.weight * tails.lower;
            sum.upper += part.weight * tails.upper;
        }
        Some(sum)
    }

    /// The point below which the probability p lies; `None` unless 0 < p < 1.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        let student = Student::new(self.df)?;
        let t = student.quantile(p)?;
        // Every part's own quantile; the mixture's lies between the smallest and the largest.
        let own = |part: &Part| part.centre + t * part.scale;
        let mut low = self.parts.iter().map(own).fold(f64::INFINITY, f64::min);
        let mut high = self.parts.iter().map(own).fold(f64::NEG_INFINITY, f64::max);
        let mut at = self.parts.iter().map(|part| part.weight * own(part)).sum::<f64>();
        let scale = self.parts.iter().map(|part| part.weight * part.scale).sum::<f64>();
        for _ in 0..100 {
            let (mut excess, mut density) = (0.0, 0.0);
            for part in &self.parts {
                let z = (at - part.centre) / part.scale;
                let tails = student.tails(z);
                excess += part.weight * if p < 0.5 { tails.lower - p } else { (1.0 - p) - tails.upper };
                density += part.weight * student.density(z) / part.scale;
            }
            if excess > 0.0 {
                high = at
            } else {
                low = at
            }
            let newton = at - excess / density;
            let next = if newton > low && newton < high { newton } else { 0.5 * (low + high) };
            let (step, newton_taken) = ((next - at).abs(), next == newton);
            at = next;
            // Newton doubles the digits: after a step this small the next would be below rounding.
            if (newton_taken && step <= 1e-8 * scale) || step <= 1e-15 * scale {
                break;
            }
        }
        let y = self.origin + at;
        y.is_finite().then_some(y)
    }
}

/// exp(ln weight − largest), negligible ones dropped, sum one.
pub(super) fn normalise<T>(parts: &mut Vec<T>, weight: impl Fn(&mut T) -> &mut f64) {
    let largest = parts.iter_mut().map(|part| *weight(part)).fold(f64::NEG_INFINITY, f64::max);
    let mut sum = 0.0;
    for part in parts.iter_mut() {
        let value = (*weight(part) - largest).exp();
        *weight(part) = value;
        sum += value;
    }
    for part in parts.iter_mut() {
        *weight(part) /= sum;
    }
    let mut kept = 0.0;
    parts.retain_mut(|part| {
        let value = *weight(part);
        let keep = value >= NEGLIGIBLE;
        if keep {
            kept += value;
        }
        keep
    });
    for part in parts.iter_mut() {
        *weight(part) /= kept;
    }
}
