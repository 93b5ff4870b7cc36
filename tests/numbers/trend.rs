//! The trend rules against dense-matrix computations (scipy; three also with 40 digits), and the published
//! rules against the reference sets.

use proptest::prelude::*;
use serde_json::Value;
use supernate::science::regression::Point;
use supernate::science::trend::context::{self, RULES};
use supernate::science::trend::single_result::{Rule, forecast};
use supernate::science::trend::{Levels, Needs, Verdict, early_warning, history_screen, lot_trend};

use crate::reference;
use crate::support::{agree, data};

fn points(value: &Value) -> Vec<Point> {
    let pair = |p: &Value| Point { x: p[0].as_f64().unwrap(), y: p[1].as_f64().unwrap() };
    value.as_array().unwrap().iter().map(pair).collect()
}

fn lots(value: &Value) -> Vec<Vec<Point>> {
    value.as_array().unwrap().iter().map(points).collect()
}

fn slices(lots: &[Vec<Point>]) -> Vec<&[Point]> {
    lots.iter().map(Vec::as_slice).collect()
}

fn cases() -> Value {
    serde_json::from_str(&std::fs::read_to_string(data("oot/cases.json")).unwrap()).unwrap()
}

/// Relative 1e-9 for p ≥ 1e-4, 1e-7 below.
fn p_agrees(got: f64, want: f64, what: &str) {
    agree(got, want, if want >= 1e-4 { 1e-9 } else { 1e-7 }, what);
}

#[test]
fn rule_h() {
    let cases = cases();
    for case in cases["cases"].as_array().unwrap() {
        let (history, earlier) = (lots(&case["history"]), points(&case["new_lot_earlier"]));
        let (x, y) = (case["x"].as_f64().unwrap(), case["y"].as_f64().unwrap());
        let want = &case["expected"];
        let value = |key: &str| want[key].as_f64().unwrap();
        let what = case["name"].as_str().unwrap();
        let found = forecast(&slices(&history), &earlier, x).unwrap();
        let judged = found.judge(y, Levels::default()).unwrap();
        assert_eq!(judged.rule, Rule::H);
        p_agrees(judged.p, value("p"), what);
        let tails = found.mixture.tails(y).unwrap();
        p_agrees(tails.lower, value("lo"), what);
        p_agrees(tails.upper, value("up"), what);
        assert_eq!(judged.df, value("nu"), "{what}");
        for (key, level) in [("limits95", 0.05), ("limits99", 0.01)] {
            let limits = found.limits(level).unwrap();
            agree(limits.lower, want[key][0].as_f64().unwrap(), 1e-9, &format!("{what} {key} lower"));
            agree(limits.upper, want[key][1].as_f64().unwrap(), 1e-9, &format!("{what} {key} upper"));
            agree(limits.centre, value("median"), 1e-9, &format!("{what} median"));
        }
        agree(found.levels_equal.unwrap(), value("post_level0"), 1e-7, &format!("{what} levels equal"));
        agree(found.slopes_equal.unwrap(), value("post_slope0"), 1e-8, &format!("{what} slopes equal"));
    }
}

#[test]
fn context_rules_of_the_cases() {
    let cases = cases();
    for case in cases["cases"].as_array().unwrap() {
        let (history, earlier) = (lots(&case["history"]), points(&case["new_lot_earlier"]));
        let new = Point { x: case["x"].as_f64().unwrap(), y: case["y"].as_f64().unwrap() };
        for (rule, key) in RULES.into_iter().zip(["A", "B", "C", "D", "E"]) {
            let what = format!("{} {key}", case["name"]);
            let got = context::test(rule, &slices(&history), &earlier, new);
            match case["rules"][key].as_f64() {
                Some(p) => p_agrees(got.unwrap().p, p, &what),
                None => assert!(got.is_err(), "{what}: {got:?}"),
            }
        }
    }
}

#[test]
fn lot_trend_and_early_warning() {
    let cases = cases();
    for case in cases["slope_and_early_warning_cases"].as_array().unwrap() {
        let (history, lot) = (lots(&case["history"]), points(&case["new_lot"]));
        let what = case["name"].as_str().unwrap();
        let value = |key: &str| case[key].as_f64().unwrap();
        let trend = lot_trend::judge(&slices(&history), &lot, Levels::default()).unwrap();
        p_agrees(trend.p, value("HL_p"), what);
        agree(trend.slope, value("lot_slope"), 1e-12, what);
        let (expiry, limit) = (value("expiry"), value("lower_limit"));
        let plain = early_warning::outlook_without_stray(&slices(&history), &lot, expiry).unwrap();
        agree(plain.below(limit, expiry).mean, value("H_mean_below"), 1e-8, what);
        agree(plain.below(limit, expiry).result, value("H_future_below"), 1e-8, what);
        let outlook = early_warning::outlook(&slices(&history), &lot, expiry).unwrap();
        agree(outlook.below(limit, expiry).mean, value("HS_mean_below"), 1e-8, what);
        agree(outlook.below(limit, expiry).result, value("HS_future_below"), 1e-8, what);
        agree(outlook.stray, value("HS_stray"), 1e-8, what);
    }
}

/// The published rules, point by point, on the three history sets (statsmodels and scipy).
#[test]
fn context_rules_of_the_reference_sets() {
    let all = reference::all();
    for want in all["oot"].as_array().unwrap() {
        let name = want["dataset"].as_str().unwrap();
        let set = reference::sets().into_iter().find(|set| set.name == name).unwrap();
        let (new, history) = set.lots.split_last().unwrap();
        let history: Vec<&[Point]> = history.iter().map(|(_, points)| points.as_slice()).collect();
        let rules = ["within_lot", "by_time_point", "slope_chart", "common_slope", "fitted_line_history"];
        for (rule, key) in RULES.into_iter().zip(rules) {
            let list = want[key].as_array().unwrap();
            assert!(!list.is_empty(), "{name} {key}");
            for row in list {
                let x = row["time"].as_f64().unwrap();
                let index = new.1.iter().position(|p| p.x == x).unwrap();
                let test = context::test(rule, &history, &new.1[..index], new.1[index]).unwrap();
                let what = format!("{name} {key} {x}");
                agree(test.p, row["p"].as_f64().unwrap(), 1e-7, &what);
                agree(test.df, row["df"].as_f64().unwrap(), 1e-9, &what);
                agree(test.t.abs(), row["t"].as_f64().unwrap().abs(), 1e-7, &what);
            }
        }
    }
}

fn line(level: f64, slope: f64, noise: &[f64]) -> Vec<Point> {
    let ages = [0.0, 3.0, 6.0, 9.0, 12.0, 18.0, 24.0, 36.0];
    noise.iter().zip(ages).map(|(e, x)| Point { x, y: level + slope * x + e }).collect()
}

const NOISE: [[f64; 8]; 4] = [
    [0.3, -0.5, 0.2, 0.6, -0.4, 0.1, -0.2, 0.3],
    [-0.2, 0.4, -0.6, 0.1, 0.5, -0.3, 0.2, -0.1],
    [0.5, 0.1, -0.3, -0.4, 0.2, 0.6, -0.5, 0.0],
    [-0.4, -0.1, 0.5, 0.3, -0.2, -0.6, 0.4, 0.1],
];

/// The edge table of the method, in its order.
#[test]
fn what_is_missing_is_named() {
    let lots: Vec<Vec<Point>> = (0..4).map(|i| line(100.0 + i as f64, -0.1, &NOISE[i])).collect();
    let history = slices(&lots);
    let own = line(101.0, -0.1, &[0.1, -0.2, 0.3, -0.1, 0.2]);
    let needs = |history: &[&[Point]], earlier: &[Point], x: f64| forecast(history, earlier, x).unwrap_err();
    assert_eq!(needs(&[], &own[..2], 9.0), Needs::HistoryOrEarlierPulls);
    assert_eq!(needs(&history[..1], &own[..2], 9.0), Needs::HistoryOrEarlierPulls);
    assert_eq!(needs(&history[..2], &[], 0.0), Needs::ThirdLotOrEarlierPull);
    assert_eq!(needs(&history, &own, 36.6), Needs::HistoryAtAge(36.6));
    assert_eq!(needs(&history, &own, 12.0), Needs::AverageOfAge);
    assert_eq!(needs(&history, &own, f64::NAN), Needs::FiniteNumbers);
    let short: Vec<&[Point]> = history.iter().map(|lot| &lot[..2]).collect();
    assert_eq!(needs(&short, &own[..1], 3.0), Needs::LongerHistory);
    let flat: Vec<Vec<Point>> = (0..4).map(|_| line(7.0, 0.0, &[0.0; 8])).collect();
    assert_eq!(needs(&slices(&flat), &flat[0][..3], 9.0), Needs::Variance);
    let exact: Vec<Vec<Point>> = (0..4).map(|i| line(7.0 + i as f64, -0.01, &[0.0; 8])).collect();
    assert_eq!(needs(&slices(&exact), &exact[0][..3], 9.0), Needs::Variance);

    let alone = forecast(&[], &own[..4], 12.0).unwrap();
    assert_eq!((alone.rule, alone.weak), (Rule::A, false));
    assert!(forecast(&[], &own[..3], 12.0).unwrap().weak);
    assert!(forecast(&history[..3], &[], 0.0).unwrap().weak);
    assert!(!forecast(&history, &[], 0.0).unwrap().weak);
    assert!(forecast(&history, &own, 36.4).is_ok(), "within half a month of the oldest history");

    let levels = Levels::default();
    assert_eq!(lot_trend::judge(&history[..2], &own, levels), Err(Needs::HistoryLots(1)));
    assert_eq!(lot_trend::judge(&history, &own[..1], levels), Err(Needs::TwoAges));
}

/// Rule A as the verdict is the same test as rule A as context.
#[test]
fn rule_a_is_one_rule() {
    let own = line(101.0, -0.1, &[0.1, -0.2, 0.3, -0.1, 0.9]);
    let judged = forecast(&[], &own[..4], 12.0).unwrap().judge(own[4].y, Levels::default()).unwrap();
    let test = context::test(context::Rule::A, &[], &own[..4], own[4]).unwrap();
    agree(judged.p, test.p, 1e-13, "p");
    let limits = forecast(&[], &own[..4], 12.0).unwrap().limits(0.05).unwrap();
    let expected = supernate::science::interval::next_value(&own[..4], 12.0, 0.95);
    let supernate::science::interval::Forecast::Expected { limits: want, .. } = expected else { panic!() };
    agree(limits.lower, want.lower, 1e-12, "lower");
    agree(limits.upper, want.upper, 1e-12, "upper");
}

#[test]
fn a_bound_is_judged_only_where_it_stands_out() {
    let lots: Vec<Vec<Point>> = (0..4).map(|i| line(100.0 + i as f64, -0.1, &NOISE[i])).collect();
    let own = line(101.0, -0.1, &[0.1, -0.2, 0.3]);
    let found = forecast(&slices(&lots), &own, 9.0).unwrap();
    let limits = found.limits(0.01).unwrap();
    let levels = Levels::default();
    let high = found.judge_bound(limits.upper + 0.1, true, levels).unwrap();
    assert_eq!(high.verdict, Verdict::Action);
    assert_eq!(found.judge_bound(limits.centre, true, levels), Err(Needs::ExactValues));
    assert_eq!(found.judge_bound(limits.upper + 0.1, false, levels), Err(Needs::ExactValues));
    let low = found.judge_bound(limits.lower - 0.1, false, levels).unwrap();
    assert_eq!(low.verdict, Verdict::Action);
}

#[test]
fn a_gross_error_in_the_history_is_flagged() {
    let mut lots: Vec<Vec<Point>> = (0..4).map(|i| line(100.0 + i as f64, -0.1, &NOISE[i])).collect();
    assert!(history_screen::screen(&slices(&lots), 0.01).is_empty());
    lots[2][4].y -= 6.0;
    let findings = history_screen::screen(&slices(&lots), 0.01);
    assert_eq!(findings.iter().map(|f| (f.lot, f.result)).collect::<Vec<_>>(), [(2, 4)]);
    let cleaned = history_screen::without(&slices(&lots), &findings);
    assert_eq!(cleaned[2].len(), 7);
    let own = line(101.0, -0.1, &[0.1, -0.2, 0.3]);
    let as_is = forecast(&slices(&lots), &own, 9.0).unwrap().limits(0.01).unwrap();
    let screened = forecast(&slices(&cleaned), &own, 9.0).unwrap().limits(0.01).unwrap();
    assert!(screened.upper - screened.lower < as_is.upper - as_is.lower);
}

#[test]
fn a_drifting_lot_is_announced_with_a_month() {
    let lots: Vec<Vec<Point>> = (0..4).map(|i| line(100.0 + i as f64, -0.05, &NOISE[i])).collect();
    let drifting = line(101.0, -0.35, &[0.2, -0.3, 0.1, 0.3, -0.2, 0.1]);
    let history = slices(&lots);
    let trend = lot_trend::judge(&history, &drifting, Levels::default()).unwrap();
    assert_eq!(trend.verdict, Verdict::Action);
    let outlook = early_warning::outlook(&history, &drifting, 36.0).unwrap();
    let warning = outlook.warning(Some(92.0), None);
    assert_eq!(warning.state, early_warning::State::VeryLikely);
    assert!((24..=28).contains(&warning.month.unwrap()), "{warning:?}");
    let good = early_warning::outlook(&history, &lots[0][..6], 36.0).unwrap().warning(Some(92.0), None);
    assert_eq!((good.state, good.month), (early_warning::State::None, None));
}

fn invariant() -> impl Strategy<Value = (Vec<Vec<Point>>, Vec<Point>, f64)> {
    let lot = || (98.0..102.0, -0.3..0.0_f64, proptest::collection::vec(-1.0..1.0_f64, 4..9));
    (proptest::collection::vec(lot(), 3..6), lot(), 90.0..105.0_f64).prop_map(|(lots, own, y)| {
        let make = |(level, slope, noise): (f64, f64, Vec<f64>)| line(level, slope, &noise);
        (lots.into_iter().map(make).collect(), make(own)[..3].to_vec(), y)
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]

    #[test]
    fn p_knows_no_units_and_no_order(
        (lots, own, y) in invariant(), shift in -500.0..500.0_f64, scale in 0.01..100.0_f64,
        unit in 0.05..50.0_f64, turn in 0..5_usize
    ) {
        let p = |lots: &[Vec<Point>], own: &[Point], x: f64, y: f64| {
            let found = forecast(&slices(lots), own, x).unwrap();
            found.judge(y, Levels::default()).unwrap().p
        };
        let plain = p(&lots, &own, 9.0, y);
        let map = |f: &dyn Fn(&Point) -> Point| -> (Vec<Vec<Point>>, Vec<Point>) {
            (lots.iter().map(|lot| lot.iter().map(f).collect()).collect(), own.iter().map(f).collect())
        };
        let close = |other: f64| (plain - other).abs() <= 1e-10 * plain.max(1e-6);
        let (l, o) = map(&|p| Point { x: p.x, y: shift + scale * p.y });
        prop_assert!(close(p(&l, &o, 9.0, shift + scale * y)), "shift and scale");
        let (l, o) = map(&|p| Point { x: p.x * unit, y: p.y });
        // Ages in other units: the history reaches as far.
        prop_assert!(close(p(&l, &o, 9.0 * unit, y)), "unit of age");
        let mut turned = lots.clone();
        turned.rotate_left(turn % lots.len());
        prop_assert!(close(p(&turned, &own, 9.0, y)), "order of lots");
        // A design that differs by nothing but rounding is worked out as a group of its own.
        let mut split = lots.clone();
        split[0][1].x += 1e-13;
        prop_assert!(close(p(&split, &own, 9.0, y)), "groups");
    }
}
