//! Rule HS: will the lot's true mean leave its limits before expiry?

use super::lot_model::{LIKE_HISTORY, LotModel, NODES, Node, Stray};
use super::mixture::normalise;
use super::{Needs, all_finite, history_suffices};
use crate::science::distribution::student::Student;
use crate::science::regression::Point;

/// What to say.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum State {
    /// Nothing.
    None,
    /// More likely than not out before expiry.
    Likely,
    /// Out before expiry with a probability above 0.9.
    VeryLikely,
}

/// Probabilities of lying outside a limit at an age.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Outside {
    /// The lot's true mean.
    pub mean: f64,
    /// One result.
    pub result: f64,
}

/// What is known of a lot's future.
#[derive(Clone, Debug)]
pub struct Outlook {
    nodes: Vec<Node>,
    student: Student,
    age_unit: f64,
    pooled: (f64, f64),
    last_age: f64,
    expiry: f64,
    /// Posterior probability that the lot strays from its history.
    pub stray: f64,
}

/// The early warning of a lot.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Warning {
    /// What to say.
    pub state: State,
    /// Probability that the lot's mean is outside at expiry.
    pub probability: f64,
    /// The first whole month after the last pull at which the mean is more likely outside than inside; none
    /// where that is not before expiry.
    pub month: Option<u64>,
}

/// No month beyond a century is looked at.
const LAST_MONTH: f64 = 1200.0;

/// Prior share of lots that stray, and by how many residual standard deviations at expiry.
const STRAY_SHARE: f64 = 0.05;
const STRAY_SIZES: [f64; 4] = [2.0, 4.0, 8.0, 16.0];

/// From the history and all pulls of the lot so far, the current one included; expiry in months.
pub fn outlook(history: &[&[Point]], lot: &[Point], expiry: f64) -> Result<Outlook, Needs> {
    build(history, lot, expiry, true)
}

/// The same with the lot taken as one of its history: for comparison.
pub fn outlook_without_stray(history: &[&[Point]], lot: &[Point], expiry: f64) -> Result<Outlook, Needs> {
    build(history, lot, expiry, false)
}

fn build(history: &[&[Point]], lot: &[Point], expiry: f64, stray: bool) -> Result<Outlook, Needs> {
    if !(all_finite(lot) && expiry.is_finite() && expiry > 0.0) {
        return Err(Needs::FiniteNumbers);
    }
    if history.len() < 2 {
        return Err(Needs::HistoryLots(2 - history.len()));
    }
    if lot.is_empty() {
        return Err(Needs::EarlierPulls(1));
    }
    history_suffices(history)?;
    let model = LotModel::new(history, lot)?;
    let share = STRAY_SHARE / STRAY_SIZES.len() as f64;
    let mut strays: Vec<Stray> = vec![(0.0, (1.0 - STRAY_SHARE).ln())];
    for size in STRAY_SIZES {
        let ratio = size * model.age_unit / expiry;
        strays.push((ratio * ratio, share.ln()));
    }
    let strays: &[Stray] = if stray { &strays } else { &LIKE_HISTORY };
    let mut nodes = Vec::with_capacity(NODES * strays.len());
    model.visit(strays, |node| nodes.push(node))?;
    normalise(&mut nodes, |node| &mut node.ln_weight);
    Ok(Outlook {
        stray: nodes.iter().filter(|node| node.stray_index > 0).map(|node| node.ln_weight).sum(),
        student: Student::new(model.df).ok_or(Needs::LongerHistory)?,
        age_unit: model.age_unit,
        pooled: (model.origin(0.0), model.pooled_slope()),
        last_age: lot.iter().map(|p| p.x).fold(f64::NEG_INFINITY, f64::max),
        expiry,
        nodes,
    })
}

impl Outlook {
    /// Probabilities below a lower limit at an age.
    pub fn below(&self, limit: f64, age: f64) -> Outside {
        self.outside(limit, age, 1.0)
    }

    /// Probabilities above an upper limit at an age.
    pub fn above(&self, limit: f64, age: f64) -> Outside {
        self.outside(limit, age, -1.0)
    }

    fn outside(&self, limit: f64, age: f64, side: f64) -> Outside {
        let beyond = limit - self.pooled.0 - self.pooled.1 * age;
        let mut sum = Outside::default();
        for node in &self.nodes {
            let (centre, factor) = node.predict(age / self.age_unit);
            let distance = side * (beyond - centre);
            let tail = |factor: f64| {
                let scale = (factor * node.variance).sqrt();
                if scale > 0.0 {
                    self.student.tails(distance / scale).lower
                } else {
                    f64::from(distance > 0.0)
                }
            };
            // After `normalise` the field holds the weight itself.
            sum.mean += node.ln_weight * tail(factor - 1.0);
            sum.result += node.ln_weight * tail(factor);
        }
        Outside { mean: sum.mean.min(1.0), result: sum.result.min(1.0) }
    }

    /// Probability that the mean lies outside either limit at an age.
    fn mean_outside(&self, lower: Option<f64>, upper: Option<f64>, age: f64) -> f64 {
        let below = lower.map_or(0.0, |limit| self.below(limit, age).mean);
        let above = upper.map_or(0.0, |limit| self.above(limit, age).mean);
        (below + above).min(1.0)
    }

    /// The early warning against the limits, each on the analysis scale.
    pub fn warning(&self, lower: Option<f64>, upper: Option<f64>) -> Warning {
        let probability = self.mean_outside(lower, upper, self.expiry);
        let state = if probability > 0.9 {
            State::VeryLikely
        } else if probability > 0.5 {
            State::Likely
        } else {
            State::None
        };
        let whole = |months: f64| months.clamp(0.0, LAST_MONTH).floor() as u64;
        let (first, last) = (whole(self.last_age) + 1, whole(self.expiry));
        let month = (state != State::None)
            .then(|| (first..=last).find(|&month| self.mean_outside(lower, upper, month as f64) > 0.5));
        Warning { state, probability, month: month.flatten() }
    }
}
