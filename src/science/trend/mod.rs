//! Does a result follow the trend of its product? Verdicts, and the rules behind them.
//!
//! * [`single_result`]: rule H, the verdict on one result.
//! * [`lot_trend`]: rule HL, the verdict on a lot's slope.
//! * [`early_warning`]: rule HS, whether the lot's mean will leave its limits before expiry.
//! * [`history_screen`]: gross errors in the history, shown, never removed silently.
//! * [`context`]: the published rules A–E, shown beside the verdict.
//! * [`promise`]: false alarms a person signed up for, expected and found.
//!
//! The model behind H, HL and HS: every lot has its own level and slope around common ones (Laird & Ware,
//! Biometrics 38 (1982) 963), with a fixed discrete prior on the two variance ratios (after Box & Tiao,
//! Bayesian Inference in Statistical Analysis, 1973). The grid is part of the definition.

pub mod context;
pub mod early_warning;
pub mod history_screen;
mod lot_model;
pub mod lot_trend;
pub mod mixture;
pub mod promise;
pub mod single_result;

use thiserror::Error;

use super::regression::Point;

/// The verdict on a result or a lot.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Verdict {
    /// Too little is known; never to be read as "in trend".
    NotEvaluable,
    /// Nothing to report.
    InTrend,
    /// A mark.
    Alert,
    /// A record.
    Action,
}

/// Two-sided probabilities below which a verdict is given.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Levels {
    /// Alert below this.
    pub alert: f64,
    /// Action below this.
    pub action: f64,
}

impl Default for Levels {
    fn default() -> Self {
        Self { alert: 0.05, action: 0.01 }
    }
}

impl Levels {
    /// The verdict for a probability.
    pub fn verdict(&self, p: f64) -> Verdict {
        if p < self.action {
            Verdict::Action
        } else if p < self.alert {
            Verdict::Alert
        } else {
            Verdict::InTrend
        }
    }
}

/// What is missing for a verdict, in the order in which it is looked for.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum Needs {
    /// A value or an age is not a finite number.
    #[error("needs values and ages that are finite numbers")]
    FiniteNumbers,
    /// Some values are known only as "more than" or "less than".
    #[error("needs values known exactly: some are known only as bounds")]
    ExactValues,
    /// Neither other lots nor enough own pulls.
    #[error("needs 2 history lots or 4 earlier pulls of the lot")]
    HistoryOrEarlierPulls,
    /// More history lots.
    #[error("needs {0} more history lot{s}", s = if *.0 == 1 { "" } else { "s" })]
    HistoryLots(usize),
    /// With two history lots the first pull cannot be judged.
    #[error("needs a third history lot or an earlier pull of the lot")]
    ThirdLotOrEarlierPull,
    /// More earlier pulls of the lot.
    #[error("needs {0} more earlier pull{s} of the lot", s = if *.0 == 1 { "" } else { "s" })]
    EarlierPulls(usize),
    /// The lot has one age only.
    #[error("needs pulls of the lot at two ages")]
    TwoAges,
    /// History lots with enough ages.
    #[error("needs 2 history lots with 3 ages and 3 results more than their lines take up")]
    LongerHistory,
    /// The age lies beyond every history lot.
    #[error("needs a history that reaches {0:.1} months")]
    HistoryAtAge(f64),
    /// The lot has an earlier result at this age.
    #[error("needs the results of one age to be averaged first")]
    AverageOfAge,
    /// Constant or exactly linear data.
    #[error("needs results that vary: the method's resolution hides the variance")]
    Variance,
}

/// Ages within this many months of each other are the same age.
pub const SAME_AGE_MONTHS: f64 = 0.5;

fn all_finite(points: &[Point]) -> bool {
    points.iter().all(|p| p.x.is_finite() && p.y.is_finite())
}

/// Number of distinct ages, exactly compared.
fn distinct_ages(points: &[Point]) -> usize {
    (0..points.len()).filter(|&i| !points[..i].iter().any(|p| p.x == points[i].x)).count()
}

/// What the history itself must offer before anything can be judged from it.
fn history_suffices(history: &[&[Point]]) -> Result<(), Needs> {
    if !history.iter().all(|lot| all_finite(lot)) {
        return Err(Needs::FiniteNumbers);
    }
    let long = history.iter().filter(|lot| distinct_ages(lot) >= 3).count();
    let spare: usize = history.iter().map(|lot| lot.len().saturating_sub(2)).sum();
    if long < 2 || spare < 3 { Err(Needs::LongerHistory) } else { Ok(()) }
}
