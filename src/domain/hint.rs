//! Checks of a reading while it can still be read again (screen_U45, U-62 to U-65; decision A14).
//!
//! A hint asks; it never refuses. What cannot be at all is refused before, by [`possible`].

use rust_decimal::Decimal;

use super::method::{InterfaceRead, MethodContent, RoundTo};
use super::specification::Range;
use super::typed::NumberRule;

/// A question about a value that was just recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Hint {
    /// The rule's name, stored with the answer.
    pub rule: &'static str,
    pub sentence: String,
}

pub const FEWER_DECIMALS: &str = "fewer decimals";
pub const OUT_BY_TEN: &str = "out by ten";
pub const OUTSIDE_LAST_THREE: &str = "outside the last three";
pub const SPREAD: &str = "replicates spread";
pub const IDENTICAL: &str = "identical replicates";
pub const COPIED: &str = "equal to the previous pull";
pub const OUTSIDE_WINDOW: &str = "outside the method's window";
pub const RATIO_ABOVE_ONE: &str = "sedimentation ratio above 1";
pub const RATIO_HIGH: &str = "sedimentation ratio above 1.10";
pub const BOUNDARY_ROSE: &str = "the boundary rose";

/// What the checks look at. Everything is of one field of one test.
#[derive(Clone, Debug, Default)]
pub struct HintFacts {
    pub unit: String,
    /// The value just recorded, and the decimals it was typed with.
    pub value: Decimal,
    pub typed_decimals: u32,
    /// Decimals the method reads; `None` for counts and computed values.
    pub reading_decimals: Option<u32>,
    pub repeatability: Option<Decimal>,
    /// The last pull of the lot on this arm, else the middle of the limits: see [`expected`].
    pub expected: Option<Decimal>,
    /// Reportable values of the last three pulls, newest first; fewer where there are fewer.
    pub last_pulls: Vec<Decimal>,
    /// The other replicates recorded at this pull.
    pub beside: Vec<Decimal>,
    /// How many replicates the method asks for.
    pub replicates: u32,
    /// All single values of the previous pull, in their order.
    pub previous_values: Vec<Decimal>,
    /// The method's greatest range of replicates; `None` takes the repeatability.
    pub range_at_most: Option<Decimal>,
    /// Equal replicates are ordinary here: counts, grades, coarse scales.
    pub may_be_identical: bool,
}

/// The expected value for the out-by-ten check (screen_U64): the last pull, else the middle of the limits.
pub fn expected(last_pull: Option<Decimal>, limits: Option<&Range>) -> Option<Decimal> {
    if last_pull.is_some() {
        return last_pull;
    }
    let limits = limits?;
    let (lower, upper) = (limits.lower?, limits.upper?);
    lower.checked_add(upper)?.checked_div(Decimal::TWO)
}

/// The number a reading of this method can be at all: the hard stop (screen_U62).
pub fn possible(method: &MethodContent, label: &str) -> NumberRule {
    NumberRule {
        least: method.possible_least,
        most: method.possible_most,
        most_decimals: method.reading_decimals.saturating_add(4).min(9),
        ..NumberRule::any(label)
    }
    .unit(&method.unit)
}

/// Every question the value raises, in this order: decimals, out by ten, last three pulls, spread, identical
/// replicates, copied row.
pub fn hints(facts: &HintFacts) -> Vec<Hint> {
    let found = [
        fewer_decimals(facts),
        out_by_ten(facts),
        outside_last_three(facts),
        spread(facts),
        identical(facts),
        copied(facts),
    ];
    found.into_iter().flatten().collect()
}

fn with_unit(value: Decimal, unit: &str) -> String {
    super::judgement::limit::with_unit(&value.normalize().to_string(), unit)
}

/// A computed value as a question shows it: one decimal more than is read; the comparison uses the exact one.
fn shown(value: Decimal, facts: &HintFacts) -> Decimal {
    value.round_dp(facts.reading_decimals.unwrap_or(2).saturating_add(1))
}

fn fewer_decimals(facts: &HintFacts) -> Option<Hint> {
    let decimals = facts.reading_decimals.filter(|decimals| facts.typed_decimals < *decimals)?;
    let step = Decimal::new(1, decimals);
    let mut full = facts.value;
    full.rescale(decimals);
    Some(Hint {
        rule: FEWER_DECIMALS,
        sentence: format!("This method reads to {step}. Type {full} if that is what it showed."),
    })
}

/// A ratio to the expected value of 8 to 12, or of 1/12 to 1/8: a lost point or an extra zero.
fn out_by_ten(facts: &HintFacts) -> Option<Hint> {
    let expected = facts.expected.filter(|expected| !expected.is_zero())?;
    if facts.value.is_zero() {
        return None;
    }
    let (eight, twelve) = (Decimal::from(8), Decimal::from(12));
    let between = |large: Decimal, small: Decimal| {
        small.checked_mul(eight).is_some_and(|least| large >= least)
            && small.checked_mul(twelve).is_some_and(|most| large <= most)
    };
    let (value, usual) = (facts.value.abs(), expected.abs());
    (between(value, usual) || between(usual, value)).then(|| Hint {
        rule: OUT_BY_TEN,
        sentence: format!(
            "Is {} right? About {} was expected: a lost point or an extra zero?",
            facts.value,
            with_unit(shown(expected, facts), &facts.unit)
        ),
    })
}

/// Outside the range of the last three pulls by more than the method's repeatability.
fn outside_last_three(facts: &HintFacts) -> Option<Hint> {
    let repeatability = facts.repeatability?;
    let last = facts.last_pulls.get(..3)?;
    let (least, most) = (last.iter().min()?, last.iter().max()?);
    let is_outside =
        facts.value > most.checked_add(repeatability)? || facts.value < least.checked_sub(repeatability)?;
    is_outside.then(|| Hint {
        rule: OUTSIDE_LAST_THREE,
        sentence: format!(
            "Is {} right? The last three pulls were {} to {}.",
            facts.value,
            shown(*least, facts).normalize(),
            with_unit(shown(*most, facts), &facts.unit)
        ),
    })
}

fn spread(facts: &HintFacts) -> Option<Hint> {
    let tolerance = facts.range_at_most.or(facts.repeatability)?;
    let all = facts.beside.iter().chain([&facts.value]);
    let range = all.clone().max()?.checked_sub(*all.min()?)?;
    (!facts.beside.is_empty() && range > tolerance).then(|| Hint {
        rule: SPREAD,
        sentence: format!(
            "The replicates differ by {}, more than {}. Is each read right?",
            with_unit(range, &facts.unit),
            tolerance.normalize()
        ),
    })
}

/// Two replicates equal to the last digit, where the method rarely gives that.
///
/// Two readings of standard deviation s are equal at a step d with a chance of about d / (2 s √π). With the
/// repeatability r = 2.77 s (ISO 5725-6) that is 0.78 d / r; "rarely" is at most 5 % over the replicates beside.
fn identical(facts: &HintFacts) -> Option<Hint> {
    let decimals = facts.reading_decimals?;
    let step = Decimal::new(78, 2).checked_mul(Decimal::new(1, decimals))?;
    let chance = step.checked_mul(Decimal::from(facts.beside.len()))?;
    let rarely = Decimal::new(5, 2);
    let reads_finer = facts
        .repeatability
        .and_then(|repeatability| repeatability.checked_mul(rarely))
        .is_some_and(|most| chance <= most);
    let is_equal = facts.beside.contains(&facts.value);
    (is_equal && reads_finer && !facts.may_be_identical).then(|| Hint {
        rule: IDENTICAL,
        sentence: format!("Two replicates are {} to the last digit. Was each one read?", facts.value),
    })
}

/// All replicates equal to those of the previous pull: a copied row.
fn copied(facts: &HintFacts) -> Option<Hint> {
    let count = facts.beside.len() + 1;
    let is_whole = count >= 2 && count == facts.replicates as usize && facts.previous_values.len() == count;
    let mut now: Vec<Decimal> = facts.beside.iter().copied().chain([facts.value]).collect();
    let mut before = facts.previous_values.clone();
    now.sort();
    before.sort();
    (is_whole && now == before && !facts.may_be_identical).then(|| Hint {
        rule: COPIED,
        sentence: "All replicates equal those of the previous pull. Were they read today?".to_string(),
    })
}

/// What the checks on a cylinder reading look at (decision A14).
#[derive(Clone, Debug)]
pub struct RatioFacts {
    /// V₀, the reference volume.
    pub total_ml: Decimal,
    pub sediment_ml: Decimal,
    /// The reading before this one in the same cylinder, if there is one.
    pub earlier_sediment_ml: Option<Decimal>,
    pub reads: InterfaceRead,
}

/// F above 1 is asked about, above 1.10 it needs a reason; a falling boundary does not rise by more than
/// 0.05.
pub fn ratio_hints(facts: &RatioFacts) -> Vec<Hint> {
    let Some(ratio) = facts.sediment_ml.checked_div(facts.total_ml) else { return Vec::new() };
    let shown = ratio.round_dp(2);
    let mut found = Vec::new();
    if ratio > Decimal::new(110, 2) {
        found.push(Hint {
            rule: RATIO_HIGH,
            sentence: format!("F is {shown}, above 1.10. Say why it can be, or read again."),
        });
    } else if ratio > Decimal::ONE {
        found.push(Hint {
            rule: RATIO_ABOVE_ONE,
            sentence: format!("F is {shown}: the sediment stands above the reference volume. Is it right?"),
        });
    }
    let earlier = facts.earlier_sediment_ml.and_then(|earlier| earlier.checked_div(facts.total_ml));
    let rise = earlier.map(|earlier| ratio - earlier).filter(|rise| *rise > Decimal::new(5, 2));
    if let Some(rise) = rise.filter(|_| facts.reads == InterfaceRead::FallingBoundary) {
        found.push(Hint {
            rule: BOUNDARY_ROSE,
            sentence: format!(
                "The boundary stands {} higher than before, as a part of the volume. It should fall: was it \
                 read right?",
                rise.round_dp(2)
            ),
        });
    }
    found
}

/// Two replicates of a method that rounds to a step are often equal.
pub fn may_be_identical(method: &MethodContent) -> bool {
    !matches!(method.rounding.to, RoundTo::Decimals(decimals) if decimals > 0)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn d(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn all(texts: &[&str]) -> Vec<Decimal> {
        texts.iter().map(|text| d(text)).collect()
    }

    /// A pH method to 0.01 with a repeatability of 0.05, last pulls 6.80 to 6.84.
    fn facts(typed: &str) -> HintFacts {
        HintFacts {
            unit: "pH units".to_string(),
            value: d(typed),
            typed_decimals: d(typed).scale(),
            reading_decimals: Some(2),
            repeatability: Some(d("0.05")),
            expected: Some(d("6.81")),
            last_pulls: all(&["6.81", "6.84", "6.80"]),
            replicates: 2,
            ..HintFacts::default()
        }
    }

    fn rules(facts: &HintFacts) -> Vec<&'static str> {
        hints(facts).iter().map(|hint| hint.rule).collect()
    }

    /// screen_U45: fewer decimals than the method reads is asked about; more are kept without a word.
    #[test]
    fn screen_u45_fewer_decimals_are_asked_about() {
        assert_eq!(rules(&facts("6.8")), [FEWER_DECIMALS]);
        assert_eq!(
            hints(&facts("6.8"))[0].sentence,
            "This method reads to 0.01. Type 6.80 if that is what it showed."
        );
        assert!(rules(&facts("6.804")).is_empty());
    }

    /// screen_U64: ratio 8 to 12 or its inverse, against the last pull or the middle of the limits.
    #[test]
    fn screen_u64_out_by_ten_is_asked_about() {
        let table = [("68.30", true), ("0.68", true), ("6.83", false), ("83.00", false), ("0.00", false)];
        for (typed, is_asked) in table {
            assert_eq!(rules(&facts(typed)).contains(&OUT_BY_TEN), is_asked, "{typed}");
        }
        let between = |lower: &str, upper: &str| Range { lower: Some(d(lower)), upper: Some(d(upper)) };
        assert_eq!(expected(None, Some(&between("6.00", "7.50"))), Some(d("6.75")));
        assert_eq!(expected(Some(d("7")), Some(&between("6.00", "7.50"))), Some(d("7")));
        assert_eq!(expected(None, Some(&Range { lower: None, upper: Some(d("20")) })), None);
    }

    /// screen_U64: of 1,000 true values moved by a lost point or an extra zero at least 95 % are caught, and
    /// at most 1 % of the true ones are asked about.
    #[test]
    fn screen_u64_a_lost_point_is_caught() {
        let (mut caught, mut false_alarms) = (0, 0);
        for step in 0..1000 {
            let value = d("6.30") + Decimal::new(step % 100, 2);
            let ask = |value: Decimal| out_by_ten(&HintFacts { value, ..facts("6.81") }).is_some();
            let moved = if step % 2 == 0 { value * Decimal::TEN } else { value / Decimal::TEN };
            caught += i32::from(ask(moved));
            false_alarms += i32::from(ask(value));
        }
        assert!(caught >= 950 && false_alarms <= 10, "caught {caught}, false {false_alarms}");
    }

    /// screen_U65: one case for each of the other soft rules.
    #[test]
    fn screen_u65_each_soft_rule_asks() {
        assert_eq!(rules(&facts("6.90")), [OUTSIDE_LAST_THREE]);
        assert!(rules(&facts("6.89")).is_empty());
        let few = HintFacts { last_pulls: all(&["6.81", "6.84"]), ..facts("6.90") };
        assert!(rules(&few).is_empty());
        let spread = HintFacts { beside: all(&["6.76"]), ..facts("6.83") };
        assert_eq!(rules(&spread), [SPREAD]);
        let equal = HintFacts { beside: all(&["6.83"]), ..facts("6.83") };
        assert!(
            rules(&equal).is_empty(),
            "a pH to 0.01 that repeats to 0.05 is equal by chance one time in six"
        );
        let equal = HintFacts { repeatability: Some(d("0.20")), range_at_most: Some(d("0.20")), ..equal };
        assert_eq!(rules(&equal), [IDENTICAL]);
        let coarse = HintFacts { may_be_identical: true, ..equal };
        assert!(rules(&coarse).is_empty());
        let copied =
            HintFacts { beside: all(&["6.82"]), previous_values: all(&["6.83", "6.82"]), ..facts("6.83") };
        assert_eq!(rules(&copied), [COPIED]);
    }

    /// Decision A14: 1 to 1.10 asks, above asks for a reason; only a falling boundary must not rise.
    #[test]
    fn the_sedimentation_ratio_is_asked_about() {
        let facts = |sediment: &str, earlier: Option<&str>, reads| RatioFacts {
            total_ml: d("100"),
            sediment_ml: d(sediment),
            earlier_sediment_ml: earlier.map(d),
            reads,
        };
        use InterfaceRead::{FallingBoundary, RisingBed};
        let table: [(&str, Option<&str>, InterfaceRead, &[&str]); 7] = [
            ("100", None, FallingBoundary, &[]),
            ("104", None, FallingBoundary, &[RATIO_ABOVE_ONE]),
            ("110", None, FallingBoundary, &[RATIO_ABOVE_ONE]),
            ("111", None, FallingBoundary, &[RATIO_HIGH]),
            ("86", Some("80"), FallingBoundary, &[BOUNDARY_ROSE]),
            ("85", Some("80"), FallingBoundary, &[]),
            ("86", Some("80"), RisingBed, &[]),
        ];
        for (sediment, earlier, reads, expected) in table {
            let found: Vec<_> =
                ratio_hints(&facts(sediment, earlier, reads)).iter().map(|hint| hint.rule).collect();
            assert_eq!(found, expected, "{sediment} after {earlier:?}");
        }
        assert!(ratio_hints(&RatioFacts { total_ml: d("0"), ..facts("1", None, RisingBed) }).is_empty());
    }
}
