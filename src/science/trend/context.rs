//! The published rules, each as a t test; shown beside the verdict, never the verdict.
//!
//! A: within the lot. B: by time point. C: slope chart. D: common slope, own level. E: fitted lines of the
//! history. Sources: PhRMA CMC teams, Pharm. Technol. 27(4) (2003) and 29(10) (2005); Mihalovits & Kemény,
//! Pharm. Technol. 41(11), 41(12) (2017), for prediction limits with Student's t.

use super::{Needs, SAME_AGE_MONTHS, all_finite, distinct_ages};
use crate::science::distribution::student::Student;
use crate::science::pooling::{Model, Pooling, slope_of};
use crate::science::regression::{Line, Point, Sums};

/// A rule.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Rule {
    /// Within the lot.
    A,
    /// By time point.
    B,
    /// Slope chart.
    C,
    /// Common slope, own level.
    D,
    /// Fitted lines of the history.
    E,
}

/// All rules in order.
pub const RULES: [Rule; 5] = [Rule::A, Rule::B, Rule::C, Rule::D, Rule::E];

/// The t test of a rule.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Test {
    /// The expected value (of the slope for C).
    pub expected: f64,
    /// Its standard error for one more value.
    pub standard_error: f64,
    /// Student's t.
    pub t: f64,
    /// Degrees of freedom.
    pub df: f64,
    /// Two-sided probability.
    pub p: f64,
}

/// Applies one rule to a new result, with the history and the lot's earlier pulls (replicates averaged).
pub fn test(rule: Rule, history: &[&[Point]], earlier: &[Point], new: Point) -> Result<Test, Needs> {
    let finite = all_finite(earlier) && all_finite(&[new]) && history.iter().all(|lot| all_finite(lot));
    if !finite {
        return Err(Needs::FiniteNumbers);
    }
    match rule {
        Rule::A => {
            let (expected, error, df) = within_lot_parts(earlier, new.x)?;
            compare(new.y, expected, error, df)
        }
        Rule::B => by_time_point(history, new),
        Rule::C => slope_chart(history, earlier, new),
        Rule::D => common_slope(history, earlier, new),
        Rule::E => fitted_lines(history, new),
    }
}

/// t = (y − expected)/error; an error of zero, or one that is rounding only, hides the variance.
fn compare(y: f64, expected: f64, error: f64, df: f64) -> Result<Test, Needs> {
    let rounding = 64.0 * f64::EPSILON * expected.abs().max(y.abs());
    if error.is_nan() || error <= rounding {
        return Err(Needs::Variance);
    }
    let t = (y - expected) / error;
    let student = Student::new(df).ok_or(Needs::Variance)?;
    Ok(Test { expected, standard_error: error, t, df, p: student.two_sided(t) })
}

/// Rule A: (expected, standard error, ν) from the lot's own earlier pulls, three or more.
pub(super) fn within_lot_parts(earlier: &[Point], x: f64) -> Result<(f64, f64, f64), Needs> {
    if earlier.len() < 3 {
        return Err(Needs::EarlierPulls(3 - earlier.len()));
    }
    let line = Line::fit(earlier).map_err(|_| Needs::TwoAges)?;
    let mean = line.mean_line().filter(|mean| mean.variance > 0.0).ok_or(Needs::Variance)?;
    Ok((mean.at(x), (mean.variance * (1.0 + mean.leverage(x))).sqrt(), mean.df as f64))
}

/// Mean and standard deviation of three or more values.
fn moments(values: &[f64]) -> (f64, f64) {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let squares: f64 = values.iter().map(|v| (v - mean) * (v - mean)).sum();
    (mean, (squares / (n - 1.0)).sqrt())
}

fn against_values(y: f64, values: &[f64]) -> Result<Test, Needs> {
    if values.len() < 3 {
        return Err(Needs::HistoryLots(3 - values.len()));
    }
    let n = values.len() as f64;
    let (mean, sd) = moments(values);
    compare(y, mean, sd * (1.0 + 1.0 / n).sqrt(), n - 1.0)
}

/// Rule B: each history lot's result nearest the age, if within half a month.
fn by_time_point(history: &[&[Point]], new: Point) -> Result<Test, Needs> {
    let nearest = |lot: &&[Point]| {
        let distance = |p: &Point| (p.x - new.x).abs();
        let close = lot.iter().filter(|p| distance(p) <= SAME_AGE_MONTHS);
        close.min_by(|a, b| distance(a).total_cmp(&distance(b))).map(|p| p.y)
    };
    let values: Vec<f64> = history.iter().filter_map(nearest).collect();
    against_values(new.y, &values)
}

/// Rule C: slopes up to the age, of the history lots with as many results by then as the lot itself.
fn slope_chart(history: &[&[Point]], earlier: &[Point], new: Point) -> Result<Test, Needs> {
    if earlier.len() < 2 {
        return Err(Needs::EarlierPulls(2 - earlier.len()));
    }
    let slope = |points: &[Point]| Sums::of(points).ok().and_then(|sums| slope_of(&sums));
    let up_to = |lot: &&[Point]| {
        let part: Vec<Point> = lot.iter().filter(|p| p.x <= new.x + SAME_AGE_MONTHS).copied().collect();
        if part.len() > earlier.len() { slope(&part) } else { None }
    };
    let slopes: Vec<f64> = history.iter().filter_map(up_to).collect();
    let mut all = earlier.to_vec();
    all.push(new);
    against_values(slope(&all).ok_or(Needs::TwoAges)?, &slopes)
}

/// Rule D: common slope of history and earlier pulls, level of the earlier pulls.
fn common_slope(history: &[&[Point]], earlier: &[Point], new: Point) -> Result<Test, Needs> {
    if earlier.is_empty() {
        return Err(Needs::EarlierPulls(1));
    }
    if history.is_empty() {
        return Err(Needs::HistoryLots(1));
    }
    let mut lots: Vec<&[Point]> = history.iter().copied().filter(|lot| !lot.is_empty()).collect();
    lots.push(earlier);
    let pooling = Pooling::of(&lots, 0.25).map_err(|_| Needs::FiniteNumbers)?;
    let line = pooling.mean_line(Model::CommonSlope, lots.len() - 1).ok_or(Needs::LongerHistory)?;
    let error = (line.variance * (1.0 + line.leverage(new.x))).sqrt();
    compare(new.y, line.at(new.x), error, line.df as f64)
}

/// Rule E: the history lots' own lines at the age, with Satterthwaite's degrees of freedom.
fn fitted_lines(history: &[&[Point]], new: Point) -> Result<Test, Needs> {
    let long: Vec<&[Point]> = history.iter().copied().filter(|lot| distinct_ages(lot) >= 3).collect();
    if long.len() < 3 {
        return Err(Needs::HistoryLots(3 - long.len()));
    }
    let pooling = Pooling::of(&long, 0.25).map_err(|_| Needs::FiniteNumbers)?;
    let lines: Vec<_> =
        (0..long.len()).filter_map(|lot| pooling.mean_line(Model::SeparateLines, lot)).collect();
    let within = lines.first().map_or(0.0, |line| line.variance);
    let df_within = pooling.separate_residuals.df as f64;
    let values: Vec<f64> = lines.iter().map(|line| line.at(new.x)).collect();
    if values.len() < 3 || df_within < 1.0 {
        return Err(Needs::LongerHistory);
    }
    let count = values.len() as f64;
    let leverage = lines.iter().map(|line| line.leverage(new.x)).sum::<f64>() / count;
    let (mean, sd) = moments(&values);
    let between = sd * sd * (1.0 + 1.0 / count);
    let rest = within * (1.0 - leverage).max(0.0);
    let variance = between + rest;
    let df = variance * variance / (between * between / (count - 1.0) + rest * rest / df_within);
    compare(new.y, mean, variance.sqrt(), df)
}
