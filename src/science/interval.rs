//! Confidence limits of a line and prediction limits for results still to come.

use super::distribution::student::Student;
use super::regression::{Line, MeanLine, NoLine, Point};

/// A range with its centre.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits {
    /// Lower limit.
    pub lower: f64,
    /// The expected value.
    pub centre: f64,
    /// Upper limit.
    pub upper: f64,
}

/// What the earlier results of a lot say about its next one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Forecast {
    /// Where the next result is expected.
    Expected {
        /// Two-sided prediction limits.
        limits: Limits,
        /// Degrees of freedom of the residual variance.
        df: usize,
        /// True with one degree of freedom: the limits hold, but are so wide that little can be found.
        weak: bool,
    },
    /// More results (of the lot, at other ages) are needed before anything can be said.
    NeedsMore {
        /// How many more.
        results: usize,
    },
    /// All earlier results have one age: at least one of another age is needed.
    NeedsAnotherAge,
    /// The earlier results lie exactly on a line: the method's resolution hides the variance, so only the
    /// value of the line is known.
    NoVariance {
        /// The line at the asked age.
        centre: f64,
    },
    /// A value, an age or the confidence is not usable as a number.
    NotANumber,
}

/// Two-sided prediction limits for one future result of a lot at age x, from the lot's own earlier results:
/// ŷ ± t(1−α/2, n−2)·s·√(1 + h(x)).
///
/// Source: Kutner, Nachtsheim, Neter & Li, Applied Linear Statistical Models, 5th ed. 2005, section 2.5.
/// `confidence` is a share, 0.95 for 95 %.
pub fn next_value(earlier: &[Point], x: f64, confidence: f64) -> Forecast {
    if !(x.is_finite() && confidence > 0.0 && confidence < 1.0) {
        return Forecast::NotANumber;
    }
    if earlier.len() < 3 {
        return Forecast::NeedsMore { results: 3 - earlier.len() };
    }
    let line = match Line::fit(earlier) {
        Ok(line) => line,
        Err(NoLine::OneAge) => return Forecast::NeedsAnotherAge,
        Err(_) => return Forecast::NotANumber,
    };
    if line.sse == 0.0 {
        return Forecast::NoVariance { centre: line.at(x) };
    }
    match line.mean_line().and_then(|mean| prediction(&mean, x, 1, confidence)) {
        Some(limits) => Forecast::Expected { limits, df: line.df, weak: line.df == 1 },
        None => Forecast::NotANumber,
    }
}

/// Two-sided prediction limits for the mean of `results` future results at x; `None` without degrees of
/// freedom, with no result asked for, or with a confidence outside 0–1.
pub fn prediction(line: &MeanLine, x: f64, results: u32, confidence: f64) -> Option<Limits> {
    (results > 0).then_some(())?;
    around(line, x, 1.0 / f64::from(results) + line.leverage(x), 0.5 * (1.0 - confidence))
}

/// One-sided prediction limits, each of its own confidence, for the mean of `results` future results.
pub fn prediction_one_sided(line: &MeanLine, x: f64, results: u32, confidence: f64) -> Option<Limits> {
    (results > 0).then_some(())?;
    around(line, x, 1.0 / f64::from(results) + line.leverage(x), 1.0 - confidence)
}

/// Two-sided confidence limits of the mean line at x.
pub fn confidence_of_mean(line: &MeanLine, x: f64, confidence: f64) -> Option<Limits> {
    around(line, x, line.leverage(x), 0.5 * (1.0 - confidence))
}

/// One-sided confidence limits of the mean line at x, each of its own confidence.
pub fn confidence_of_mean_one_sided(line: &MeanLine, x: f64, confidence: f64) -> Option<Limits> {
    around(line, x, line.leverage(x), 1.0 - confidence)
}

fn around(line: &MeanLine, x: f64, variance_factor: f64, tail: f64) -> Option<Limits> {
    let t = Student::new(line.df as f64)?.upper_quantile(tail)?;
    let half = t * (line.variance * variance_factor).sqrt();
    let centre = line.at(x);
    let limits = Limits { lower: centre - half, centre, upper: centre + half };
    (limits.lower.is_finite() && limits.upper.is_finite()).then_some(limits)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn points(pairs: &[(f64, f64)]) -> Vec<Point> {
        pairs.iter().map(|&(x, y)| Point { x, y }).collect()
    }

    #[test]
    fn what_is_missing_is_said() {
        let two = points(&[(0.0, 100.0), (3.0, 99.0)]);
        assert_eq!(next_value(&two, 6.0, 0.95), Forecast::NeedsMore { results: 1 });
        assert_eq!(next_value(&[], 6.0, 0.95), Forecast::NeedsMore { results: 3 });
        let same = points(&[(3.0, 100.0), (3.0, 99.0), (3.0, 98.0)]);
        assert_eq!(next_value(&same, 6.0, 0.95), Forecast::NeedsAnotherAge);
        let exact = points(&[(0.0, 100.0), (3.0, 99.0), (6.0, 98.0)]);
        assert_eq!(next_value(&exact, 9.0, 0.95), Forecast::NoVariance { centre: 97.0 });
        assert_eq!(next_value(&exact, f64::NAN, 0.95), Forecast::NotANumber);
        assert_eq!(next_value(&exact, 9.0, 1.0), Forecast::NotANumber);
    }

    #[test]
    fn three_results_are_weak_four_are_not() {
        let three = points(&[(0.0, 100.0), (3.0, 99.4), (6.0, 99.1)]);
        assert!(matches!(next_value(&three, 9.0, 0.95), Forecast::Expected { df: 1, weak: true, .. }));
        let four = points(&[(0.0, 100.0), (3.0, 99.4), (6.0, 99.1), (9.0, 98.4)]);
        assert!(matches!(next_value(&four, 12.0, 0.95), Forecast::Expected { df: 2, weak: false, .. }));
    }
}
