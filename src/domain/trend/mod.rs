//! The trend verdict: whether a result, a lot's trend and its outlook agree with the history.
//!
//! H: one result against a forecast made before it was measured (A where there is no history). HL: the lot's
//! slope against those of the history. HS: whether the lot's mean will leave its limits before expiry. Words of
//! decision A13; no rule removes data.

pub mod declare;
pub mod history;
pub mod judge;
pub mod promise;
pub mod sealed;
pub mod words;

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::judgement::NewFlag;
use super::method::{MethodContent, RoundTo};
use crate::science::trend::early_warning::State;
use crate::science::trend::promise::per_pull;
use crate::science::trend::{Levels, Verdict};

/// A verdict as stored and as shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TrendVerdict {
    NotEvaluable,
    InTrend,
    Alert,
    Action,
    NoWarning,
    Likely,
    VeryLikely,
}

impl TrendVerdict {
    pub fn words(self) -> &'static str {
        match self {
            TrendVerdict::NotEvaluable => "not evaluable",
            TrendVerdict::InTrend => "in trend",
            TrendVerdict::Alert => "alert",
            TrendVerdict::Action => "action",
            TrendVerdict::NoWarning => "no warning",
            TrendVerdict::Likely => "likely",
            TrendVerdict::VeryLikely => "very likely",
        }
    }
}

impl From<Verdict> for TrendVerdict {
    fn from(verdict: Verdict) -> TrendVerdict {
        match verdict {
            Verdict::NotEvaluable => TrendVerdict::NotEvaluable,
            Verdict::InTrend => TrendVerdict::InTrend,
            Verdict::Alert => TrendVerdict::Alert,
            Verdict::Action => TrendVerdict::Action,
        }
    }
}

impl From<State> for TrendVerdict {
    fn from(state: State) -> TrendVerdict {
        match state {
            State::None => TrendVerdict::NoWarning,
            State::Likely => TrendVerdict::Likely,
            State::VeryLikely => TrendVerdict::VeryLikely,
        }
    }
}

/// The levels a result is judged at, and the promise they come from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendLevels {
    pub alert: f64,
    pub action: f64,
    /// Percent of good lots that may ever see a false action, and the planned pulls it is spread over.
    pub promise: Option<(Decimal, u32)>,
}

impl TrendLevels {
    /// 5 % and 1 % per pull; with a promise per lot the action level is its share of one planned pull (Šidák),
    /// and the alert level is never below it.
    pub fn of_promise(percent: Option<Decimal>, planned: u32) -> TrendLevels {
        let usual = Levels::default();
        let share = percent.and_then(|percent| {
            let per_lot = percent.to_f64()? / 100.0;
            per_pull(per_lot, planned).map(|share| (share, percent))
        });
        match share {
            None => TrendLevels { alert: usual.alert, action: usual.action, promise: None },
            Some((action, percent)) => {
                TrendLevels { alert: usual.alert.max(action), action, promise: Some((percent, planned)) }
            }
        }
    }

    pub fn levels(&self) -> Levels {
        Levels { alert: self.alert, action: self.action }
    }
}

/// Decimals of a reported value; limits of forecasts are shown with one more.
pub fn reported_decimals(content: &MethodContent) -> u32 {
    match content.rounding.to {
        RoundTo::Decimals(decimals) => decimals,
        RoundTo::Nearest(_) => 0,
        RoundTo::SignificantFigures(_) => content.reading_decimals,
    }
}

/// The band a forecast gives, in the unit of the test: median, and limits of alert and of action.
#[derive(Clone, Copy, Debug, PartialEq, serde::Serialize, serde::Deserialize)]
pub struct Band {
    pub lower: f64,
    pub centre: f64,
    pub upper: f64,
    pub action_lower: f64,
    pub action_upper: f64,
}

/// A verdict to be stored with its result.
#[derive(Clone, Debug, PartialEq)]
pub struct NewVerdict {
    /// `H`, `A`, `HL` or `HS`.
    pub rule: &'static str,
    pub verdict: TrendVerdict,
    pub sentence: String,
    pub needs: Option<String>,
    pub band: Option<Band>,
    pub degrees_of_freedom: Option<f64>,
    pub probability: Option<f64>,
    pub levels: Option<TrendLevels>,
    pub month: Option<u64>,
    pub detail: serde_json::Value,
    pub flag: Option<NewFlag>,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_promise_per_lot_is_spread_over_the_planned_pulls() {
        let usual = TrendLevels::of_promise(None, 8);
        assert_eq!((usual.alert, usual.action, usual.promise), (0.05, 0.01, None));
        // 5 % over 8 pulls: 0.639 %.
        let promised = TrendLevels::of_promise(Some(Decimal::from(5)), 8);
        assert!((promised.action - 0.00639).abs() < 5e-6, "{}", promised.action);
        assert_eq!(promised.alert, 0.05);
        assert_eq!(TrendLevels::of_promise(Some(Decimal::from(5)), 0).promise, None);
        let loose = TrendLevels::of_promise(Some(Decimal::from(20)), 2);
        assert_eq!(loose.alert, loose.action);
    }
}
