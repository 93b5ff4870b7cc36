//! Uniformity of dosage units and of doses poured.

/// Mean and standard deviation of two or more finite values.
fn moments(values: &[f64]) -> Option<(f64, f64)> {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let squares: f64 = values.iter().map(|v| (v - mean) * (v - mean)).sum();
    let sd = (squares / (n - 1.0)).sqrt();
    (values.len() >= 2 && sd.is_finite()).then_some((mean, sd))
}

/// The reference value M for a mean and a target T, both in % of label.
pub fn reference_value(mean: f64, target: f64) -> f64 {
    mean.clamp(98.5, target.max(101.5))
}

/// Acceptance value |M − X̄| + k·s (USP ⟨905⟩), k 2.4 for 10 and 2.0 for 30 units.
pub fn acceptance_value(mean: f64, sd: f64, k: f64, target: f64) -> f64 {
    (reference_value(mean, target) - mean).abs() + k * sd
}

/// The outcome of a stage.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DosageUnits {
    /// Mean, % of label.
    pub mean: f64,
    /// Standard deviation.
    pub sd: f64,
    /// M.
    pub reference: f64,
    /// The acceptance value.
    pub acceptance_value: f64,
    /// What follows.
    pub decision: Decision,
}

/// What follows from a test in stages.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Decision {
    /// Passes.
    Pass,
    /// Twenty more units or containers are needed.
    TestTwentyMore,
    /// Fails.
    Fail,
}

/// L1: the largest acceptance value.
pub const LARGEST_ACCEPTANCE_VALUE: f64 = 15.0;

/// USP ⟨905⟩ for 10 or 30 units, contents in % of label; target 100 unless the monograph says more. Stage 2
/// also wants every unit within (1 ± 0.25)·M. `None` for other numbers of units.
pub fn dosage_units(contents: &[f64], target: f64) -> Option<DosageUnits> {
    let k = match contents.len() {
        10 => 2.4,
        30 => 2.0,
        _ => return None,
    };
    let (mean, sd) = moments(contents)?;
    let reference = reference_value(mean, target);
    let acceptance_value = acceptance_value(mean, sd, k, target);
    let inside = contents.iter().all(|x| (0.75 * reference..=1.25 * reference).contains(x));
    let small = acceptance_value <= LARGEST_ACCEPTANCE_VALUE + 1e-9;
    let decision = match (contents.len(), small, inside) {
        (10, true, _) => Decision::Pass,
        (10, false, _) => Decision::TestTwentyMore,
        (_, true, true) => Decision::Pass,
        _ => Decision::Fail,
    };
    Some(DosageUnits { mean, sd, reference, acceptance_value, decision })
}

/// Mass of delivered doses from multi-dose containers (Ph. Eur. 2.9.27): of 20 doses at most 2 deviate by
/// more than 10 % from the mean, none by more than 20 %. `None` unless there are 20.
pub fn delivered_masses(masses: &[f64]) -> Option<bool> {
    let (mean, _) = (masses.len() == 20).then(|| moments(masses))??;
    let beyond =
        |share: f64| masses.iter().filter(|m| (*m - mean).abs() > share * mean * (1.0 + 1e-12)).count();
    (mean > 0.0).then(|| beyond(0.1) <= 2 && beyond(0.2) == 0)
}

/// Doses of oral drops (Ph. Eur.): each of 10 within 10 % of the mean. `None` unless there are 10.
pub fn drops(masses: &[f64]) -> Option<bool> {
    let (mean, _) = (masses.len() == 10).then(|| moments(masses))??;
    (mean > 0.0).then(|| masses.iter().all(|m| (m - mean).abs() <= 0.1 * mean * (1.0 + 1e-12)))
}

/// Doses taken one after the other from one bottle after the label shake, % of label.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PouredDoses {
    /// Mean, % of label.
    pub mean: f64,
    /// Relative standard deviation, %.
    pub rsd_percent: f64,
    /// Change from first to last dose by the fitted line, % of label.
    pub across_bottle: f64,
    /// Each 90–110 %, RSD ≤ 6 %, change ≤ 5 % (common practice, development).
    pub uniform: bool,
}

/// See [`PouredDoses`]. `None` with fewer than three doses.
pub fn poured_doses(doses: &[f64]) -> Option<PouredDoses> {
    use super::regression::{Line, Point};
    (doses.len() >= 3).then_some(())?;
    let (mean, sd) = moments(doses)?;
    let points: Vec<Point> = doses.iter().enumerate().map(|(i, &y)| Point { x: i as f64, y }).collect();
    let across_bottle = Line::fit(&points).ok()?.slope * (doses.len() - 1) as f64;
    (mean > 0.0).then_some(())?;
    let rsd_percent = 100.0 * sd / mean;
    let each = doses.iter().all(|dose| (90.0..=110.0).contains(dose));
    Some(PouredDoses {
        mean,
        rsd_percent,
        across_bottle,
        uniform: each && rsd_percent <= 6.0 && across_bottle.abs() <= 5.0,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn stage_two() {
        let mut contents = vec![100.0; 29];
        contents.push(124.0);
        let found = dosage_units(&contents, 100.0).unwrap();
        assert_eq!(found.decision, Decision::Pass);
        contents[29] = 130.0;
        assert_eq!(dosage_units(&contents, 100.0).unwrap().decision, Decision::Fail);
        assert_eq!(dosage_units(&contents[..12], 100.0), None);
    }

    #[test]
    fn a_higher_target_widens_the_range() {
        assert_eq!(reference_value(103.0, 104.0), 103.0);
        assert_eq!((reference_value(105.0, 104.0), reference_value(97.0, 104.0)), (104.0, 98.5));
    }

    #[test]
    fn poured() {
        let mut masses = vec![5.0; 18];
        masses.extend([5.6, 4.4]);
        assert_eq!(delivered_masses(&masses), Some(true));
        masses[0] = 5.6;
        assert_eq!(delivered_masses(&masses), Some(false));
        masses[0] = 6.2;
        assert_eq!(delivered_masses(&masses), Some(false));
        assert_eq!(delivered_masses(&masses[..5]), None);
        assert_eq!(drops(&[1.0, 1.05, 0.95, 1.0, 1.0, 1.0, 1.0, 1.0, 1.0, 1.0]), Some(true));
        assert!(poured_doses(&[101.0, 100.0, 99.0]).unwrap().uniform);
        assert!(!poured_doses(&[106.0, 100.0, 94.0]).unwrap().uniform);
    }
}
