//! Rule HL: a lot's slope over all its pulls against the history.

use super::lot_model::{LIKE_HISTORY, LotModel, NODES};
use super::mixture::normalise;
use super::{Levels, Needs, Verdict, all_finite, distinct_ages, history_suffices};
use crate::science::distribution::student::Student;
use crate::science::regression::{Line, Point};

/// The judgement of a lot's trend.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LotTrend {
    /// The verdict.
    pub verdict: Verdict,
    /// Two-sided probability.
    pub p: f64,
    /// The lot's own slope.
    pub slope: f64,
    /// Degrees of freedom.
    pub df: f64,
}

/// History lots that a verdict needs.
pub const HISTORY_LOTS: usize = 3;

/// Judges the slope of a lot over all its pulls, the current one included. Needs three history lots.
pub fn judge(history: &[&[Point]], lot: &[Point], levels: Levels) -> Result<LotTrend, Needs> {
    if history.len() < HISTORY_LOTS {
        return Err(Needs::HistoryLots(HISTORY_LOTS - history.len()));
    }
    let (p, slope, df) = probability(history, lot)?;
    Ok(LotTrend { verdict: levels.verdict(p), p, slope, df })
}

/// (p, slope, ν) of rule HL; defined from two history lots on.
pub fn probability(history: &[&[Point]], lot: &[Point]) -> Result<(f64, f64, f64), Needs> {
    if !all_finite(lot) {
        return Err(Needs::FiniteNumbers);
    }
    if history.len() < 2 {
        return Err(Needs::HistoryLots(2 - history.len()));
    }
    if distinct_ages(lot) < 2 {
        return Err(Needs::TwoAges);
    }
    history_suffices(history)?;
    let line = Line::fit(lot).map_err(|_| Needs::TwoAges)?;
    let model = LotModel::new(history, &[])?;
    // The lot's slope beyond the pooled one, per unit of age.
    let beyond = (line.slope - model.pooled_slope()) * model.age_unit;
    let own = model.age_unit * model.age_unit / line.sums.sxx;
    let mut parts = Vec::with_capacity(NODES);
    model.visit(&LIKE_HISTORY, |node| {
        let variance = node.variance * (node.slope_ratio + own + node.a_inverse[2]);
        parts.push((node.ln_weight, (beyond - node.b[1]) / variance.sqrt()));
    })?;
    normalise(&mut parts, |part| &mut part.0);
    let student = Student::new(model.df).ok_or(Needs::LongerHistory)?;
    let (mut lower, mut upper) = (0.0, 0.0);
    for (weight, t) in parts {
        let tails = student.tails(t);
        lower += weight * tails.lower;
        upper += weight * tails.upper;
    }
    Ok(((2.0 * f64::min(lower, upper)).min(1.0), line.slope, model.df))
}
