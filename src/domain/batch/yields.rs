//! The yield of a phase: actual, theoretical, percent, and what can be accounted for.

use rust_decimal::{Decimal, RoundingStrategy};

use super::{PhaseYield, Verdict};
use crate::domain::master::TheoreticalYield;
use crate::domain::refusal::NamedReason;

/// What was counted or weighed at the end of a phase, in the unit of its yield.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct NewYield {
    pub actual: Decimal,
    pub samples: Decimal,
    pub rejects: Decimal,
    pub waste: Decimal,
}

/// A yield worked out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Computed {
    pub theoretical: Decimal,
    /// Two decimals, halves away from zero.
    pub percent: Decimal,
    pub accountable_percent: Decimal,
    pub verdict: Verdict,
    pub limits: String,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum YieldRefusal {
    #[error("A yield is not less than 0. Look at the sign.")]
    YieldNegative,
    #[error(
        "{accounted}\u{202f}{unit} are accounted for where {theoretical}\u{202f}{unit} went in: half as much again \
         cannot come out. Look at the unit and the decimal mark."
    )]
    YieldImpossible { accounted: Decimal, theoretical: Decimal, unit: String },
    #[error("{unit} are counted: a part of one cannot be. Type a whole number.")]
    YieldNotWhole { unit: String },
    #[error("The phase “{0}” has steps that are not done. Its yield is taken after the last.")]
    PhaseNotDone(String),
    #[error("The master record takes no yield of the phase “{0}”.")]
    NoYieldHere(String),
    #[error(
        "{percent} % lies outside {limits}. Look at the figures; if they are right, say what happened: that opens a \
         deviation."
    )]
    YieldOutside { percent: Decimal, limits: String },
    #[error("You worked this yield out yourself. Another person checks the calculation.")]
    YieldCheckerWorkedItOut(i64),
    #[error("This yield is checked already.")]
    YieldChecked,
    #[error("There is no yield of this phase to check yet.")]
    YieldMissing,
    #[error(
        "Your figure for the percent is {0}, and the record has another. Work it out again, or correct the yield."
    )]
    CheckDiffers(Decimal),
}

impl NamedReason for YieldRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            YieldRefusal::YieldNegative
            | YieldRefusal::YieldImpossible { .. }
            | YieldRefusal::YieldNotWhole { .. } => "actual",
            YieldRefusal::YieldOutside { .. } => "deviation",
            YieldRefusal::CheckDiffers(_) => "percent",
            _ => return None,
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            YieldRefusal::YieldCheckerWorkedItOut(account) => Some(vec![*account]),
            _ => None,
        }
    }

    fn is_noted(&self) -> bool {
        matches!(self, YieldRefusal::YieldImpossible { .. } | YieldRefusal::YieldOutside { .. })
    }
}

fn percent(part: Decimal, whole: Decimal) -> Decimal {
    let exact = part * Decimal::ONE_HUNDRED / whole;
    let mut rounded = exact.round_dp_with_strategy(2, RoundingStrategy::MidpointAwayFromZero);
    rounded.rescale(2);
    rounded
}

/// Works a yield out: percent = 100 × actual ÷ theoretical; accountable = 100 × (actual + samples + rejects + waste) ÷
/// theoretical, each to two decimals, and the percent as it is shown is judged. The limits are those of the master
/// record; no rule of law gives any.
///
/// Refuses in this order: a figure below 0, part of a counted thing, more than can come out.
pub fn compute(new: &NewYield, theory: &TheoreticalYield, size: Decimal) -> Result<Computed, YieldRefusal> {
    let figures = [new.actual, new.samples, new.rejects, new.waste];
    if figures.iter().any(|figure| *figure < Decimal::ZERO) {
        return Err(YieldRefusal::YieldNegative);
    }
    let is_measure = crate::domain::master::scale::unit_of(&theory.unit).is_some();
    if !is_measure && [new.actual, new.samples, new.rejects].iter().any(|figure| !figure.fract().is_zero()) {
        return Err(YieldRefusal::YieldNotWhole { unit: theory.unit.clone() });
    }
    let theoretical = (size * theory.per_size_unit).normalize();
    let accounted: Decimal = figures.iter().sum();
    // Half as much again as went in is a slip of unit or decimal mark, not a yield.
    if accounted * Decimal::TWO > theoretical * Decimal::from(3) {
        return Err(YieldRefusal::YieldImpossible { accounted, theoretical, unit: theory.unit.clone() });
    }
    let yielded = percent(new.actual, theoretical);
    Ok(Computed {
        theoretical,
        percent: yielded,
        accountable_percent: percent(accounted, theoretical),
        verdict: Verdict::of(yielded, Some(theory.least_percent), Some(theory.most_percent)),
        limits: format!("{} to {}\u{202f}%", theory.least_percent, theory.most_percent),
    })
}

/// A second person works the percent out again and types it. Refuses in this order: no yield, own work, checked
/// already, another figure.
pub fn may_check(found: Option<&PhaseYield>, account: i64, typed: Decimal) -> Result<(), YieldRefusal> {
    let Some(found) = found else { return Err(YieldRefusal::YieldMissing) };
    if found.account == account {
        return Err(YieldRefusal::YieldCheckerWorkedItOut(account));
    }
    if found.checked.is_some() {
        return Err(YieldRefusal::YieldChecked);
    }
    if typed != found.percent && typed.round_dp(1) != found.percent.round_dp(1) {
        return Err(YieldRefusal::CheckDiffers(typed));
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn decimal(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    /// suspension.md example 19: 985 bottles of 100 mL from 100 L → 98.5 %; with 10 samples and 0.3 L waste → 99.8 %.
    #[test]
    fn a_yield_is_worked_out_and_judged() {
        let theory = |unit: &str, per: &str| TheoreticalYield {
            unit: unit.to_string(),
            per_size_unit: decimal(per),
            least_percent: decimal("97"),
            most_percent: decimal("101"),
        };
        let new = |actual: &str, samples: &str, waste: &str| NewYield {
            actual: decimal(actual),
            samples: decimal(samples),
            rejects: Decimal::ZERO,
            waste: decimal(waste),
        };
        let bottles = theory("bottles", "10");
        let found = compute(&new("985", "10", "3"), &bottles, decimal("100")).unwrap();
        assert_eq!(found.percent.to_string(), "98.50");
        assert_eq!(found.accountable_percent.to_string(), "99.80");
        assert_eq!((found.theoretical, found.verdict), (decimal("1000"), Verdict::Within));
        let said = |new: &NewYield, theory: &TheoreticalYield| match compute(new, theory, decimal("100")) {
            Ok(found) => format!("{:?} {}", found.verdict, found.percent),
            Err(refusal) => format!("{refusal:?}"),
        };
        for (new, theory, expected) in [
            (new("-1", "0", "0"), &bottles, "YieldNegative"),
            (new("98.5", "0", "0"), &bottles, "YieldNotWhole"),
            (new("9850", "0", "0"), &bottles, "YieldImpossible"),
            (new("970", "0", "0"), &bottles, "Within 97.00"),
            (new("969", "0", "0"), &bottles, "Outside 96.90"),
            (new("96.994", "1", "0.5"), &theory("L", "1"), "Outside 96.99"),
            (new("101", "0", "0"), &theory("L", "1"), "Within 101.00"),
        ] {
            let said = said(&new, theory);
            assert!(said.starts_with(expected), "{new:?}: {said}");
        }
    }
}
