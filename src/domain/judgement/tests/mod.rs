//! Cases of judging, as tables.

mod kinds;

use super::*;
use crate::domain::method::{
    Attribute, Component, Formula, Grade, Halves, Input, InterfaceRead, Level, Reportable, RoundTo, Rounding,
    Settings, Stage,
};
use crate::domain::specification::{Limit, Range, Way};

fn d(text: &str) -> Decimal {
    text.parse().unwrap()
}

fn method(settings: Settings, reportable: Reportable, unit: &str, decimals: u32) -> MethodContent {
    MethodContent {
        stage: Stage::AfterRedispersion,
        unit: unit.to_string(),
        reading_decimals: decimals,
        rounding: Rounding { halves: Halves::AwayFromZero, to: RoundTo::Decimals(decimals) },
        replicates: 3,
        level: Level::Reading,
        reportable,
        possible_least: d("0"),
        possible_most: d("100000"),
        repeatability: None,
        needs_check: true,
        second_reader_tolerance: None,
        hides_limits: false,
        is_repeatable_on_container: true,
        containers_needed: 1,
        ml_needed: None,
        needs_unopened: false,
        may_share_after: true,
        test_within_days: 3,
        hands_on_minutes: 10,
        instruments: Vec::new(),
        settings,
    }
}

fn plain() -> Settings {
    Settings::Numeric { inputs: Vec::new(), formula: None, components: Vec::new(), has_total: false }
}

fn mean_within(range: Option<&str>, rsd: Option<&str>) -> Reportable {
    Reportable::Mean { range_at_most: range.map(d), rsd_percent_at_most: rsd.map(d) }
}

fn ph(range: Option<&str>) -> MethodContent {
    method(plain(), mean_within(range, None), "pH units", 2)
}

fn between(lower: Option<&str>, upper: Option<&str>) -> Limit {
    Limit::Between { lower: lower.map(d), upper: upper.map(d) }
}

fn limits(limit: Limit, way: Way) -> TestLimits {
    TestLimits {
        test: "ph".to_string(),
        title: "pH".to_string(),
        method: 1,
        unit: "pH units".to_string(),
        release: Limit::None,
        shelf_life: limit,
        in_use: Limit::None,
        way,
    }
}

fn ph_limits() -> TestLimits {
    limits(between(Some("6.00"), Some("7.50")), Way::Rounding)
}

fn reading(container: i64, replicate: u32, field: &str, typed: &str) -> ReadingValue {
    let (qualifier, number) = match typed.chars().next() {
        Some('>') => (Qualifier::Above, &typed[1..]),
        Some('<') => (Qualifier::Below, &typed[1..]),
        _ => (Qualifier::Equal, typed),
    };
    let value = number.parse::<Decimal>().ok();
    let qualifier = if value.is_some() { qualifier } else { Qualifier::Words };
    ReadingValue {
        container: (container > 0).then_some(container),
        container_label: if container > 0 { format!("bottle {container:02}") } else { String::new() },
        replicate,
        field: field.to_string(),
        typed: typed.to_string(),
        value,
        qualifier,
        first_typed: None,
    }
}

fn values(typed: &[&str]) -> Vec<ReadingValue> {
    let at = |(index, typed): (usize, &&str)| reading(0, u32::try_from(index).unwrap() + 1, "value", typed);
    typed.iter().enumerate().map(at).collect()
}

fn first(mut reading: ReadingValue, typed: &str) -> ReadingValue {
    reading.first_typed = Some((typed.to_string(), typed.parse().ok()));
    reading
}

fn one(method: &MethodContent, limits: Option<&TestLimits>, readings: &[ReadingValue]) -> Judged {
    on_arm(method, limits, None, readings)
}

fn on_arm(
    method: &MethodContent,
    limits: Option<&TestLimits>,
    arm: Option<LimitsDo>,
    readings: &[ReadingValue],
) -> Judged {
    let mut judged = judge(method, limits, LimitSet::ShelfLife, arm, readings);
    assert_eq!(judged.len(), 1);
    judged.remove(0)
}

fn kinds(judged: &Judged) -> Vec<&'static str> {
    judged.flags.iter().map(|flag| flag.kind).collect()
}

/// screen_U101: 7.504 against at most 7.50 passes by rounding and fails by the absolute way.
#[test]
fn screen_u101_rounding_and_absolute_are_two_ways() {
    let table = [
        ("7.504", Way::Rounding, Verdict::Conforms),
        ("7.504", Way::Absolute, Verdict::OutOfSpecification),
        ("7.505", Way::Rounding, Verdict::OutOfSpecification),
        ("7.50", Way::Absolute, Verdict::Conforms),
        ("5.995", Way::Rounding, Verdict::Conforms),
        ("5.9949", Way::Rounding, Verdict::OutOfSpecification),
        ("5.995", Way::Absolute, Verdict::OutOfSpecification),
    ];
    for (typed, way, verdict) in table {
        let limits = limits(between(Some("6.00"), Some("7.50")), way);
        assert_eq!(one(&ph(None), Some(&limits), &values(&[typed])).verdict, verdict, "{typed} {way:?}");
    }
    let absolute = limits(between(None, Some("7.50")), Way::Absolute);
    let judged = one(&ph(None), Some(&absolute), &values(&["7.504"]));
    assert_eq!(judged.flags[0].sentence, "7.504 pH units, above 7.50, compared unrounded.");
    assert_eq!(judged.detail["way"], "compared unrounded");
}

/// screen_U102: a half goes where the method says, also in the comparison.
#[test]
fn screen_u102_halves_decide_at_the_limit() {
    let limits = limits(between(None, Some("2.66")), Way::Rounding);
    let mut method = ph(None);
    assert_eq!(one(&method, Some(&limits), &values(&["2.665"])).verdict, Verdict::OutOfSpecification);
    method.rounding.halves = Halves::ToEven;
    assert_eq!(one(&method, Some(&limits), &values(&["2.665"])).verdict, Verdict::Conforms);
}

/// Decision A6: the shown value is never an input. 7.449 shows as 7.4 and is judged as 7.45 against 7.44.
#[test]
fn screen_u103_the_unrounded_value_is_judged() {
    let mut method = ph(None);
    method.rounding.to = RoundTo::Decimals(1);
    let limits = limits(between(None, Some("7.44")), Way::Rounding);
    let judged = one(&method, Some(&limits), &values(&["7.449"]));
    assert_eq!((judged.shown.as_str(), judged.verdict), ("7.4", Verdict::OutOfSpecification));
    assert_eq!(judged.flags[0].sentence, "7.45 pH units, above 7.44.");
    assert_eq!(judged.value, Some(d("7.449")));
}

#[test]
fn a_step_rule_holds_where_the_limit_is_stated_to_the_step() {
    let mut method = method(plain(), mean_within(None, None), "mPa·s", 0);
    method.rounding.to = RoundTo::Nearest(10);
    for (limit, verdict) in [("1500", Verdict::Conforms), ("1503", Verdict::OutOfSpecification)] {
        let limits = limits(between(None, Some(limit)), Way::Rounding);
        let judged = one(&method, Some(&limits), &values(&["1504"]));
        assert_eq!((judged.shown.as_str(), judged.verdict), ("1500", verdict), "{limit}");
    }
}

/// req_O1: out of specification from the unrounded value compared after rounding, named with unit and limit.
#[test]
fn req_o1_a_value_beyond_its_limit_is_named() {
    let judged = one(&ph(None), Some(&ph_limits()), &values(&["7.62"]));
    assert_eq!(judged.verdict, Verdict::OutOfSpecification);
    assert!(judged.is_out_of_specification());
    assert_eq!(judged.flags.len(), 1);
    assert_eq!(judged.flags[0].kind, "out of specification");
    assert_eq!(judged.flags[0].level, FlagLevel::Exception);
    assert_eq!(judged.flags[0].sentence, "7.62 pH units, above 7.50.");
    let low = one(&ph(None), Some(&ph_limits()), &values(&["5.9"]));
    assert_eq!(low.flags[0].sentence, "5.90 pH units, below 6.00.");
}

/// Decision A7: what a limit does is a property of the arm.
#[test]
fn each_arm_gives_its_own_verdict_and_level() {
    use FlagLevel::{Context, Exception, Mark};
    let table = [
        (None, Verdict::OutOfSpecification, "out of specification", Exception),
        (Some(LimitsDo::OutOfSpecification), Verdict::OutOfSpecification, "out of specification", Exception),
        (Some(LimitsDo::InUse), Verdict::OutsideInUseLimit, "in-use limit", Exception),
        (Some(LimitsDo::SignificantChange), Verdict::NotJudged, "significant change", Mark),
        (Some(LimitsDo::Information), Verdict::NotJudged, "information", Context),
    ];
    for (arm, verdict, kind, level) in table {
        let judged = on_arm(&ph(None), Some(&ph_limits()), arm, &values(&["7.62"]));
        let flag = &judged.flags[0];
        assert_eq!((judged.verdict, flag.kind, flag.level), (verdict, kind, level), "{arm:?}");
        assert!(flag.sentence.starts_with("7.62 pH units, above 7.50"), "{}", flag.sentence);
    }
    let inside = |arm| on_arm(&ph(None), Some(&ph_limits()), arm, &values(&["7.10"]));
    assert_eq!(inside(Some(LimitsDo::Information)).verdict, Verdict::NotJudged);
    assert_eq!(inside(Some(LimitsDo::InUse)).verdict, Verdict::Conforms);
    assert!(inside(None).flags.is_empty());
}

/// req_O10: replicates are averaged only where the method says so and only while they agree; a single value
/// outside is named although the mean is inside.
#[test]
fn req_o10_nothing_is_averaged_away() {
    let readings = values(&["7.35", "7.40", "7.62"]);
    let judged = one(&ph(None), Some(&ph_limits()), &readings);
    assert_eq!((judged.verdict, judged.shown.as_str()), (Verdict::Conforms, "7.46"));
    assert_eq!(kinds(&judged), ["single value outside"]);
    assert_eq!(
        judged.flags[0].sentence,
        "reading 3: 7.62 pH units, above 7.50; the reported 7.46 is within."
    );
    let judged = one(&ph(Some("0.10")), Some(&ph_limits()), &readings);
    assert_eq!((judged.verdict, judged.value), (Verdict::NoReportableValue, None));
    assert_eq!(kinds(&judged), ["spread", "single value outside"]);
    assert_eq!(
        judged.flags[0].sentence,
        "The 3 values differ by 0.27 pH units, more than 0.10: no reportable value."
    );
    let worst = MethodContent { reportable: Reportable::Worst { highest: true }, ..ph(None) };
    let judged = one(&worst, Some(&ph_limits()), &readings);
    assert_eq!((judged.verdict, kinds(&judged)), (Verdict::OutOfSpecification, vec!["out of specification"]));
    let each = MethodContent { reportable: Reportable::EachContainer, ..ph(None) };
    let judged = one(&each, Some(&ph_limits()), &readings);
    assert_eq!((judged.verdict, judged.shown.as_str()), (Verdict::OutOfSpecification, "7.35; 7.40; 7.62"));
}

#[test]
fn the_spread_may_be_limited_by_rsd() {
    // s = 0.0251661, RSD = 0.35329 %
    for (most, shown) in [("0.36", "7.12"), ("0.35", "no reportable value")] {
        let method = method(plain(), mean_within(None, Some(most)), "pH units", 2);
        let judged = one(&method, Some(&ph_limits()), &values(&["7.10", "7.12", "7.15"]));
        assert_eq!(judged.shown, shown, "{most}");
    }
}

#[test]
fn containers_of_unequal_numbers_weigh_the_same_at_container_level() {
    let mut method = ph(None);
    let readings =
        [reading(1, 1, "value", "7.0"), reading(1, 2, "value", "7.0"), reading(2, 1, "value", "7.6")];
    assert_eq!(one(&method, None, &readings).shown, "7.20");
    method.level = Level::Container;
    assert_eq!(one(&method, None, &readings).shown, "7.30");
}

/// Decision A5: limits are judged on the first recorded value too.
#[test]
fn a_first_value_outside_stays_visible_after_its_correction() {
    let mut readings = values(&["6.82", "6.83"]);
    readings[0] = first(readings[0].clone(), "7.62");
    let judged = one(&ph(None), Some(&ph_limits()), &readings);
    assert_eq!(judged.verdict, Verdict::Conforms);
    assert_eq!(kinds(&judged), ["first value outside"]);
    assert_eq!(
        judged.flags[0].sentence,
        "reading 1: first recorded 7.62 pH units, above 7.50; corrected to 6.82."
    );
    readings[0] = first(readings[0].clone(), "6.28");
    assert!(one(&ph(None), Some(&ph_limits()), &readings).flags.is_empty());
}

fn redispersibility() -> MethodContent {
    let settings = Settings::Redispersibility {
        cap: 100,
        beat_per_minute: 60,
        inspect_every: 5,
        instruction: "turn over and back".to_string(),
    };
    method(settings, Reportable::Worst { highest: true }, "inversions", 0)
}

/// Decision A6: the worst container judges; a censored count stays censored, with the median and without a
/// mean.
#[test]
fn a_censored_count_stays_censored() {
    let limits = limits(between(None, Some("20")), Way::Rounding);
    let read = |counts: [&str; 3]| -> Vec<ReadingValue> {
        (1..).zip(counts).map(|(bottle, count)| reading(bottle, 1, "inversions", count)).collect()
    };
    let judged = one(&redispersibility(), Some(&limits), &read(["12", "14", "18"]));
    assert_eq!((judged.shown.as_str(), judged.verdict), ("18", Verdict::Conforms));
    assert_eq!(judged.detail["mean"].as_str().unwrap()[..5], *"14.66");

    let judged = one(&redispersibility(), Some(&limits), &read(["12", ">100", "14"]));
    assert_eq!((judged.shown.as_str(), judged.qualifier), (">100", ResultQualifier::Above));
    assert_eq!(judged.verdict, Verdict::OutOfSpecification);
    assert_eq!(judged.flags[0].sentence, ">100 inversions, above 20.");
    assert_eq!(judged.detail["median"], "14");
    assert!(judged.detail["mean"].is_null());
    let two_capped = one(&redispersibility(), Some(&limits), &read(["12", ">100", ">100"]));
    assert_eq!(two_capped.detail["median"], ">100");
}

#[test]
fn a_bound_that_does_not_decide_has_no_reportable_value() {
    let table = [
        (">100", None, Some("150"), Verdict::NoReportableValue),
        (">100", None, Some("100"), Verdict::OutOfSpecification),
        (">100", Some("50"), None, Verdict::Conforms),
        ("<0.05", None, Some("0.20"), Verdict::Conforms),
        ("<0.05", Some("0.05"), None, Verdict::OutOfSpecification),
        ("<0.05", Some("0.01"), None, Verdict::NoReportableValue),
        ("<0.05", Some("0.01"), Some("0.10"), Verdict::NoReportableValue),
    ];
    let method = method(plain(), Reportable::EachContainer, "", 2);
    for (typed, lower, upper, verdict) in table {
        let limits = limits(between(lower, upper), Way::Rounding);
        assert_eq!(
            one(&method, Some(&limits), &values(&[typed])).verdict,
            verdict,
            "{typed} {lower:?} {upper:?}"
        );
    }
    let judged = one(&ph(None), Some(&ph_limits()), &values(&["7.1", ">14"]));
    assert_eq!((judged.verdict, kinds(&judged)[0]), (Verdict::NoReportableValue, "no reportable value"));
}

#[test]
fn without_a_limit_or_a_reading_nothing_is_invented() {
    let judged = one(&ph(None), None, &values(&["7.1"]));
    assert_eq!((judged.verdict, judged.shown.as_str()), (Verdict::NoLimit, "7.10"));
    let mut unread = values(&["7.1"]);
    unread[0] = ReadingValue {
        value: None,
        qualifier: Qualifier::NotRead,
        typed: "electrode broke".to_string(),
        ..unread[0].clone()
    };
    let judged = one(&ph(None), Some(&ph_limits()), &unread);
    assert_eq!((judged.verdict, judged.qualifier), (Verdict::NoReportableValue, ResultQualifier::None));
    assert_eq!(judged.detail["not_read"][0]["why"], "electrode broke");
    assert_eq!(judged.flags[0].sentence, "No value could be read.");
}

#[test]
fn codes_lead_back() {
    for verdict in Verdict::ALL {
        assert_eq!(Verdict::from_words(verdict.words()), Some(verdict));
    }
    for code in ["=", ">", "<", "words", "not read"] {
        assert_eq!(Qualifier::from_code(code).map(Qualifier::code), Some(code));
    }
}
