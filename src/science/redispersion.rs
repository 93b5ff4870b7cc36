//! How easily a sediment goes back into suspension.

/// Ease in %: 100 − 5(N − 1), not below 0, for N ≥ 1 inversions (common practice; the definition of one
/// inversion is stored with the method).
pub fn ease_percent(inversions: u32) -> Option<f64> {
    (inversions > 0).then(|| (100.0 - 5.0 * f64::from(inversions - 1)).max(0.0))
}

/// Percent of the full content found after N inversions, or of a reference turbidity at the same dilution.
pub fn percent(after: f64, full: f64) -> Option<f64> {
    let percent = 100.0 * after / full;
    (after >= 0.0 && full > 0.0 && percent.is_finite()).then_some(percent)
}

/// A grade by inversions (common practice).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Grade {
    /// No sediment.
    NoSediment,
    /// Up to 5 inversions.
    Easy,
    /// 6 to 20.
    Moderate,
    /// 21 to 50.
    Hard,
    /// More than 50, or residue after 50.
    Caked,
}

/// The grade.
pub fn grade(inversions: u32, residue_after_fifty: bool) -> Grade {
    match inversions {
        _ if residue_after_fifty => Grade::Caked,
        0 => Grade::NoSediment,
        1..=5 => Grade::Easy,
        6..=20 => Grade::Moderate,
        21..=50 => Grade::Hard,
        _ => Grade::Caked,
    }
}

/// Residual cake in % of the solids, after 50 inversions and draining.
pub fn residual_cake_percent(residue: f64, solids: f64) -> Option<f64> {
    percent(residue, solids).filter(|percent| *percent <= 100.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn indices_and_grades() {
        assert_eq!([1, 2, 21, 60].map(ease_percent), [Some(100.0), Some(95.0), Some(0.0), Some(0.0)]);
        assert_eq!(ease_percent(0), None);
        let grades = [0, 5, 6, 20, 21, 50, 51].map(|n| grade(n, false));
        use Grade::*;
        assert_eq!(grades, [NoSediment, Easy, Moderate, Moderate, Hard, Hard, Caked]);
        assert_eq!(grade(3, true), Caked);
        assert_eq!((percent(45.0, 50.0), percent(1.0, 0.0)), (Some(90.0), None));
    }
}
