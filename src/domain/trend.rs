//! The first trend signal: whether a result agrees with the earlier results of its own lot.
//!
//! Rule: a two-sided t prediction interval for the next result of a straight line through the lot's own
//! earlier results (`science::interval`). Alert outside 95 %, action outside 99 % (decision A13). Three
//! earlier ages are enough to judge, but the verdict is marked weak; fewer are not evaluable. No rule
//! removes data.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;
use serde_json::json;

use super::judgement::{FlagLevel, NewFlag, flag_kind};
use crate::science::interval::{Forecast, Limits, next_value};
use crate::science::regression::Point;

/// The words of decision A13.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TrendVerdict {
    NotEvaluable,
    InTrend,
    Alert,
    Action,
}

impl TrendVerdict {
    pub fn words(self) -> &'static str {
        match self {
            TrendVerdict::NotEvaluable => "not evaluable",
            TrendVerdict::InTrend => "in trend",
            TrendVerdict::Alert => "alert",
            TrendVerdict::Action => "action",
        }
    }
}

/// A verdict with the sentence that explains it, and the flag it raises.
#[derive(Clone, Debug, PartialEq)]
pub struct TrendSignal {
    pub verdict: TrendVerdict,
    pub sentence: String,
    /// Alert: a mark. Action: an exception. Not evaluable: context. In trend: none.
    pub flag: Option<NewFlag>,
}

const ALERT_CONFIDENCE: f64 = 0.95;
const ACTION_CONFIDENCE: f64 = 0.99;

/// Judges `value` at `age` (months) from the lot's earlier results (age, value) of the same test and arm.
///
/// Results of one age are averaged first, the judged one with its equals too (a retest is never a second
/// entry). `decimals` are those the method reports; limits are shown with one more.
pub fn first_signal(
    earlier: &[(Decimal, Decimal)],
    age: Decimal,
    value: Decimal,
    decimals: u32,
) -> TrendSignal {
    let (same, other): (Vec<_>, Vec<_>) = earlier.iter().copied().partition(|(at, _)| *at == age);
    let values: Vec<Decimal> = same.iter().map(|(_, value)| *value).chain([value]).collect();
    let Some(judged) = mean(&values) else { return unusable() };
    let Some(points) = averaged(&other) else { return unusable() };
    let (Some(x), Some(y)) = (age.to_f64(), judged.to_f64()) else { return unusable() };
    let shown = Shown { value: judged.round_dp(decimals + 1), decimals: decimals + 1, count: points.len() };
    match (next_value(&points, x, ALERT_CONFIDENCE), next_value(&points, x, ACTION_CONFIDENCE)) {
        (Forecast::NeedsMore { results }, _) => not_evaluable(format!("needs {}", more_ages(results))),
        (Forecast::NeedsAnotherAge, _) => not_evaluable("needs one more age".to_string()),
        (Forecast::NoVariance { centre }, _) => no_variance(&shown, y, centre),
        (Forecast::Expected { limits: alert, weak, .. }, Forecast::Expected { limits: action, .. }) => {
            judge(&shown, y, &alert, &action, weak)
        }
        _ => unusable(),
    }
}

struct Shown {
    value: Decimal,
    decimals: u32,
    count: usize,
}

fn mean(values: &[Decimal]) -> Option<Decimal> {
    super::judgement::spread::Spread::of(values).map(|spread| spread.mean)
}

/// One point per age, as numbers.
fn averaged(earlier: &[(Decimal, Decimal)]) -> Option<Vec<Point>> {
    let mut ages: Vec<Decimal> = earlier.iter().map(|(age, _)| *age).collect();
    ages.sort();
    ages.dedup();
    let point = |age: &Decimal| {
        let own: Vec<Decimal> = earlier.iter().filter(|(at, _)| at == age).map(|(_, value)| *value).collect();
        Some(Point { x: age.to_f64()?, y: mean(&own)?.to_f64()? })
    };
    ages.iter().map(point).collect()
}

fn more_ages(count: usize) -> &'static str {
    match count {
        1 => "one more age",
        2 => "two more ages",
        _ => "three more ages",
    }
}

fn not_evaluable(why: String) -> TrendSignal {
    let sentence = format!("Trend not evaluable: {why}.");
    let flag = NewFlag {
        kind: flag_kind::NOT_EVALUABLE,
        level: FlagLevel::Context,
        sentence: sentence.clone(),
        numbers: json!({ "verdict": TrendVerdict::NotEvaluable.words(), "why": why }),
    };
    TrendSignal { verdict: TrendVerdict::NotEvaluable, sentence, flag: Some(flag) }
}

fn unusable() -> TrendSignal {
    not_evaluable("needs values that can be computed with".to_string())
}

/// The earlier results lie exactly on a line: nothing can be said of the spread, only whether this one is on
/// it.
fn no_variance(shown: &Shown, y: f64, centre: f64) -> TrendSignal {
    let line = format!("{centre:.*}", shown.decimals as usize);
    let off = if format!("{y:.*}", shown.decimals as usize) == line { "on" } else { "off" };
    not_evaluable(format!(
        "needs a spread, and the method's resolution hides it (this result lies {off} the line of the \
         earlier ones, {line})"
    ))
}

fn judge(shown: &Shown, y: f64, alert: &Limits, action: &Limits, weak: bool) -> TrendSignal {
    let is_outside = |limits: &Limits| y < limits.lower || y > limits.upper;
    let (verdict, limits, share) = match (is_outside(action), is_outside(alert)) {
        (true, _) => (TrendVerdict::Action, action, "99"),
        (false, true) => (TrendVerdict::Alert, alert, "95"),
        (false, false) => (TrendVerdict::InTrend, alert, "95"),
    };
    let number = |value: f64| format!("{value:.*}", shown.decimals as usize);
    let side = if verdict == TrendVerdict::InTrend { "within" } else { "outside" };
    let note = if weak { " Weak: three earlier ages only." } else { "" };
    let sentence = format!(
        "Trend {}: {} is {side} {} to {}, the {share} % prediction interval from the lot's own {} \
         earlier ages.{note}",
        verdict.words(),
        shown.value,
        number(limits.lower),
        number(limits.upper),
        shown.count,
    );
    let numbers = json!({
        "verdict": verdict.words(),
        "value": shown.value.to_string(),
        "expected": number(alert.centre),
        "alert": [number(alert.lower), number(alert.upper)],
        "action": [number(action.lower), number(action.upper)],
        "earlier_ages": shown.count,
        "is_weak": weak,
    });
    let level = match verdict {
        TrendVerdict::Action => Some(FlagLevel::Exception),
        TrendVerdict::Alert => Some(FlagLevel::Mark),
        _ => None,
    };
    let flag = level.map(|level| NewFlag {
        kind: flag_kind::OUT_OF_TREND,
        level,
        sentence: sentence.clone(),
        numbers,
    });
    TrendSignal { verdict, sentence, flag }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn d(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn points(pairs: &[(&str, &str)]) -> Vec<(Decimal, Decimal)> {
        pairs.iter().map(|(age, value)| (d(age), d(value))).collect()
    }

    const FIVE: [(&str, &str); 5] =
        [("0", "100.0"), ("3", "99.4"), ("6", "99.1"), ("9", "98.4"), ("12", "98.1")];

    /// Limits at 18 months from the five points, worked by hand: slope −0.16, line at 18 = 97.08,
    /// s² = 0.0360/3, leverage 0.2 + 144/90 = 1.8, half width = t·s·√2.8 with t(0.975, 3) = 3.18245 and
    /// t(0.995, 3) = 5.84091 (Student's table): 0.5834 and 1.0707.
    #[test]
    fn levels_are_alert_and_action() {
        let table = [
            ("97.1", TrendVerdict::InTrend, None),
            ("97.6", TrendVerdict::InTrend, None),
            ("97.8", TrendVerdict::Alert, Some(FlagLevel::Mark)),
            ("96.3", TrendVerdict::Alert, Some(FlagLevel::Mark)),
            ("98.3", TrendVerdict::Action, Some(FlagLevel::Exception)),
            ("95.8", TrendVerdict::Action, Some(FlagLevel::Exception)),
        ];
        for (value, verdict, level) in table {
            let signal = first_signal(&points(&FIVE), d("18"), d(value), 1);
            assert_eq!(signal.verdict, verdict, "{value}: {}", signal.sentence);
            assert_eq!(signal.flag.map(|flag| flag.level), level, "{value}");
        }
        let signal = first_signal(&points(&FIVE), d("18"), d("98.3"), 1);
        assert_eq!(
            signal.sentence,
            "Trend action: 98.3 is outside 96.01 to 98.15, the 99 % prediction interval from the lot's own 5 \
             earlier ages."
        );
    }

    #[test]
    fn what_is_missing_is_named() {
        let table = [(0, "needs three more ages"), (1, "needs two more ages"), (2, "needs one more age")];
        for (count, words) in table {
            let signal = first_signal(&points(&FIVE[..count]), d("18"), d("97"), 1);
            assert_eq!(signal.verdict, TrendVerdict::NotEvaluable);
            let flag = signal.flag.unwrap();
            assert_eq!((flag.kind, flag.level), ("not evaluable", FlagLevel::Context));
            assert_eq!(flag.sentence, format!("Trend not evaluable: {words}."));
        }
        let weak = first_signal(&points(&FIVE[..3]), d("9"), d("98.4"), 1);
        assert_eq!(weak.verdict, TrendVerdict::InTrend);
        assert!(weak.sentence.ends_with("Weak: three earlier ages only."));
    }

    #[test]
    fn an_exact_line_hides_the_spread() {
        let exact = points(&[("0", "100"), ("3", "99"), ("6", "98"), ("9", "97")]);
        let on = first_signal(&exact, d("12"), d("96"), 0);
        assert_eq!(on.verdict, TrendVerdict::NotEvaluable);
        assert!(on.sentence.contains("lies on the line"), "{}", on.sentence);
        assert!(first_signal(&exact, d("12"), d("93"), 0).sentence.contains("lies off the line"));
    }

    /// A retest at the judged age, and doubled earlier ages, are averaged and never counted twice.
    #[test]
    fn results_of_one_age_are_one_entry() {
        let mut doubled = points(&FIVE);
        doubled.push((d("3"), d("99.4")));
        let signal = first_signal(&doubled, d("18"), d("98.3"), 1);
        assert!(signal.sentence.contains("own 5 earlier ages"), "{}", signal.sentence);
        doubled.push((d("18"), d("96.0")));
        let retested = first_signal(&doubled, d("18"), d("98.2"), 1);
        assert_eq!(retested.verdict, TrendVerdict::InTrend, "{}", retested.sentence);
    }

    #[test]
    fn the_verdict_does_not_depend_on_unit_or_level() {
        for (scale, shift) in [("1000", "0"), ("0.001", "0"), ("1", "5000")] {
            let moved = |value: &str| d(value) * d(scale) + d(shift);
            let earlier: Vec<_> = FIVE.iter().map(|(age, value)| (d(age), moved(value))).collect();
            for (value, verdict) in [("97.6", TrendVerdict::InTrend), ("98.3", TrendVerdict::Action)] {
                assert_eq!(first_signal(&earlier, d("18"), moved(value), 1).verdict, verdict);
            }
        }
    }
}
