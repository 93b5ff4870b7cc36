//! Rule H: one result against a forecast made before it was measured.

use super::lot_model::{LIKE_HISTORY, LotModel, NODES, TOP};
use super::mixture::{Mixture, Part};
use super::{Levels, Needs, SAME_AGE_MONTHS, Verdict, all_finite, context, history_suffices};
use crate::science::interval::Limits;
use crate::science::regression::Point;

/// Which rule gave the forecast.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Rule {
    /// The history with the lot's own earlier pulls.
    H,
    /// The lot's own earlier pulls alone, where there is no history.
    A,
}

/// A forecast of one result of a lot.
#[derive(Clone, Debug, PartialEq)]
pub struct Forecast {
    /// The rule.
    pub rule: Rule,
    /// The age it is for.
    pub age: f64,
    /// The predictive distribution.
    pub mixture: Mixture,
    /// True where the level holds, but little can be found: three history lots at the first pull, or rule A
    /// with three earlier pulls.
    pub weak: bool,
    /// Posterior weight of "lots start equal"; none for rule A.
    pub levels_equal: Option<f64>,
    /// Posterior weight of "lots age equally"; none for rule A.
    pub slopes_equal: Option<f64>,
    /// More than 5 % of the weight lies at the end of the grid: lot differences are far outside the usual.
    pub unusual_lots: bool,
}

/// The judgement of one result.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Judgement {
    /// The verdict.
    pub verdict: Verdict,
    /// The rule.
    pub rule: Rule,
    /// Two-sided probability of a result at least as far out.
    pub p: f64,
    /// Degrees of freedom.
    pub df: f64,
    /// True where little can be found (see [`Forecast::weak`]).
    pub weak: bool,
}

/// Forecasts a result of a lot at age x, from the history lots and the lot's own EARLIER pulls. Ages in
/// months; replicates of one pull averaged before. The judged result takes no part.
pub fn forecast(history: &[&[Point]], earlier: &[Point], x: f64) -> Result<Forecast, Needs> {
    if !(x.is_finite() && all_finite(earlier)) {
        return Err(Needs::FiniteNumbers);
    }
    if earlier.iter().any(|p| p.x == x) {
        return Err(Needs::AverageOfAge);
    }
    match (history.len(), earlier.len()) {
        (0 | 1, m) if m >= 3 => return within_lot(earlier, x),
        (0 | 1, _) => return Err(Needs::HistoryOrEarlierPulls),
        (2, 0) => return Err(Needs::ThirdLotOrEarlierPull),
        _ => history_suffices(history)?,
    }
    let oldest = history.iter().copied().flatten().map(|p| p.x).fold(f64::NEG_INFINITY, f64::max);
    if x > oldest + SAME_AGE_MONTHS {
        return Err(Needs::HistoryAtAge(x));
    }
    let model = LotModel::new(history, earlier)?;
    let age = x / model.age_unit;
    let mut parts = Vec::with_capacity(NODES);
    let mut places = Vec::with_capacity(NODES);
    model.visit(&LIKE_HISTORY, |node| {
        let (centre, factor) = node.predict(age);
        parts.push(Part { weight: node.ln_weight, centre, scale: (factor * node.variance).sqrt() });
        places.push((node.ln_weight, node.level_index, node.slope_index));
    })?;
    let share = shares(&places);
    Ok(Forecast {
        rule: Rule::H,
        age: x,
        mixture: Mixture::new(parts, model.origin(x), model.df).ok_or(Needs::FiniteNumbers)?,
        weak: history.len() == 3 && earlier.is_empty(),
        levels_equal: Some(share(&|level, _| level == 0)),
        slopes_equal: Some(share(&|_, slope| slope == 0)),
        unusual_lots: share(&|level, slope| level == TOP.0 || slope == TOP.1) > 0.05,
    })
}

/// Posterior weight of the nodes that a condition picks.
fn shares(places: &[(f64, usize, usize)]) -> impl Fn(&dyn Fn(usize, usize) -> bool) -> f64 + '_ {
    let largest = places.iter().map(|place| place.0).fold(f64::NEG_INFINITY, f64::max);
    let total: f64 = places.iter().map(|place| (place.0 - largest).exp()).sum();
    move |picked| {
        let chosen = places.iter().filter(|(_, level, slope)| picked(*level, *slope));
        chosen.map(|place| (place.0 - largest).exp()).sum::<f64>() / total
    }
}

/// Rule A as a forecast with a single part.
fn within_lot(earlier: &[Point], x: f64) -> Result<Forecast, Needs> {
    let (centre, scale, df) = context::within_lot_parts(earlier, x)?;
    Ok(Forecast {
        rule: Rule::A,
        age: x,
        mixture: Mixture::new(vec![Part { weight: 0.0, centre: 0.0, scale }], centre, df)
            .ok_or(Needs::FiniteNumbers)?,
        weak: earlier.len() == 3,
        levels_equal: None,
        slopes_equal: None,
        unusual_lots: false,
    })
}

impl Forecast {
    /// Judges a result: p = 2·min(P(below), P(above)), each tail its own sum.
    pub fn judge(&self, y: f64, levels: Levels) -> Result<Judgement, Needs> {
        if !y.is_finite() {
            return Err(Needs::FiniteNumbers);
        }
        let tails = self.mixture.tails(y).ok_or(Needs::FiniteNumbers)?;
        let p = (2.0 * tails.lower.min(tails.upper)).min(1.0);
        let verdict = levels.verdict(p);
        Ok(Judgement { verdict, rule: self.rule, p, df: self.mixture.df(), weak: self.weak })
    }

    /// Judges a value known only to be above or below a bound. It stands out where the bound already does;
    /// else nothing can be said.
    pub fn judge_bound(&self, bound: f64, above: bool, levels: Levels) -> Result<Judgement, Needs> {
        let judged = self.judge(bound, levels)?;
        let tails = self.mixture.tails(bound).ok_or(Needs::FiniteNumbers)?;
        let beyond = if above { tails.upper } else { tails.lower };
        // The value lies further out than its bound, so its probability is at most this.
        let verdict = levels.verdict(2.0 * beyond);
        if verdict == Verdict::InTrend {
            Err(Needs::ExactValues)
        } else {
            Ok(Judgement { verdict, ..judged })
        }
    }

    /// Median and the limits outside which a result has a two-sided probability below `level`.
    pub fn limits(&self, level: f64) -> Option<Limits> {
        Some(Limits {
            lower: self.mixture.quantile(0.5 * level)?,
            centre: self.mixture.quantile(0.5)?,
            upper: self.mixture.quantile(1.0 - 0.5 * level)?,
        })
    }
}
