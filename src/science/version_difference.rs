//! Two groups of lots compared: do they change at another rate, and do they start at another level?
//!
//! Each group has one slope and each lot its own intercept. Slopes: b₁ − b₂ with the residual variance of both
//! models together, s² = (SSE₁ + SSE₂)/(ν₁ + ν₂), and the standard error s√(1/Sxx₁ + 1/Sxx₂) (Kutner,
//! Nachtsheim, Neter & Li, Applied Linear Statistical Models, 5th ed. 2005, chapter 8). Levels: the lots are the
//! units, so the intercepts of the lots are compared by the t test for two samples with one variance.

use super::distribution::student::Student;
use super::pooling::Pooling;

/// A difference, second minus first, with its confidence limits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Difference {
    pub value: f64,
    pub lower: f64,
    pub upper: f64,
    /// Degrees of freedom of its variance.
    pub df: usize,
    /// Two-sided probability of a difference at least as large by chance.
    pub p: f64,
}

/// The difference of the slopes; `None` where a group has no slope or no degrees of freedom.
pub fn slopes(first: &Pooling, second: &Pooling, confidence: f64) -> Option<Difference> {
    let residuals = [first.common_slope_residuals, second.common_slope_residuals];
    if residuals.iter().any(|one| one.df == 0) {
        return None;
    }
    let df: usize = residuals.iter().map(|one| one.df).sum();
    let variance = residuals.iter().map(|one| one.sse).sum::<f64>() / df as f64;
    let error = (variance * (1.0 / first.within_sxx + 1.0 / second.within_sxx)).sqrt();
    difference(second.common_slope? - first.common_slope?, error, df, confidence)
}

/// The difference of the levels at an age, lots as units; `None` unless both groups have two lots. `shift` is added to
/// the second group, where the two were counted from different origins.
pub fn levels(
    first: &Pooling,
    second: &Pooling,
    age: f64,
    shift: f64,
    confidence: f64,
) -> Option<Difference> {
    let at = |group: &Pooling| -> Option<Vec<f64>> {
        let slope = group.common_slope?;
        Some(group.lots.iter().map(|lot| lot.mean_y + slope * (age - lot.mean_x)).collect())
    };
    let (one, other) = (at(first)?, at(second)?);
    if one.len() < 2 || other.len() < 2 {
        return None;
    }
    let mean = |values: &[f64]| values.iter().sum::<f64>() / values.len() as f64;
    let squares = |values: &[f64]| {
        let centre = mean(values);
        values.iter().map(|value| (value - centre).powi(2)).sum::<f64>()
    };
    let df = one.len() + other.len() - 2;
    let variance = (squares(&one) + squares(&other)) / df as f64;
    let error = (variance * (1.0 / one.len() as f64 + 1.0 / other.len() as f64)).sqrt();
    difference(mean(&other) - mean(&one) + shift, error, df, confidence)
}

fn difference(value: f64, error: f64, df: usize, confidence: f64) -> Option<Difference> {
    let student = Student::new(df as f64)?;
    let half = student.upper_quantile(0.5 * (1.0 - confidence))? * error;
    let p = match (error > 0.0, value == 0.0) {
        (true, _) => 2.0 * student.tails((value / error).abs()).upper,
        (false, true) => 1.0,
        (false, false) => 0.0,
    };
    let found = Difference { value, lower: value - half, upper: value + half, df, p: p.min(1.0) };
    (found.value.is_finite() && half.is_finite()).then_some(found)
}

#[cfg(test)]
mod tests {
    use super::super::regression::Point;
    use super::*;

    fn pooling(lots: &[&[(f64, f64)]]) -> Pooling {
        let lots: Vec<Vec<Point>> =
            lots.iter().map(|lot| lot.iter().map(|&(x, y)| Point { x, y }).collect()).collect();
        let slices: Vec<&[Point]> = lots.iter().map(Vec::as_slice).collect();
        Pooling::of(&slices, 0.25).unwrap()
    }

    /// Two samples of two values each, 1, 3 and 4, 8: difference 4, s² = (2 + 8)/2 = 5, error √5, ν = 2; the
    /// probability of |t| ≥ 1.788854 with ν = 2 is 0.2155 (closed form 1 − t/√(2 + t²)).
    #[test]
    fn levels_are_the_t_test_of_the_lots() {
        let flat = |level: f64| [(0.0, level - 0.1), (6.0, level + 0.2), (12.0, level - 0.1)];
        let (a, b, c, d) = (flat(1.0), flat(3.0), flat(4.0), flat(8.0));
        let found = levels(&pooling(&[&a, &b]), &pooling(&[&c, &d]), 6.0, 0.0, 0.95).unwrap();
        let t: f64 = 4.0 / 5.0_f64.sqrt();
        let expected = 1.0 - t / (2.0 + t * t).sqrt();
        assert!((found.value - 4.0).abs() < 1e-12 && found.df == 2, "{found:?}");
        assert!((found.p - expected).abs() < 1e-9, "{} {expected}", found.p);
    }

    /// One lot each: the difference of two simple regressions. Residuals ±0.1 about slopes 1 and 2 over 0, 1, 2, 3:
    /// Sxx = 5 each.
    #[test]
    fn slopes_share_the_residual_variance_of_both() {
        let line = |slope: f64| -> Vec<(f64, f64)> {
            let bend = [0.1, -0.1, -0.1, 0.1];
            (0..4).map(|i| (f64::from(i), slope * f64::from(i) + bend[i as usize])).collect()
        };
        let (one, two) = (line(1.0), line(2.0));
        let found = slopes(&pooling(&[&one]), &pooling(&[&two]), 0.95).unwrap();
        let error = (0.04_f64 / 2.0 * (0.2 + 0.2)).sqrt();
        assert!((found.value - 1.0).abs() < 1e-12 && found.df == 4, "{found:?}");
        // t(0.975, 4) = 2.7764451 (Student's table).
        assert!((found.upper - found.value - 2.776_445_1 * error).abs() < 1e-7, "{found:?}");
        assert!(
            levels(&pooling(&[&one]), &pooling(&[&two]), 0.0, 0.0, 0.95).is_none(),
            "one lot has no variance"
        );
    }
}
