//! Laws that hold for every data set: shift, scale, order, unit of age, and what "root" means.

use proptest::prelude::*;
use supernate::science::distribution::student::Student;
use supernate::science::interval::{Forecast, next_value};
use supernate::science::pooling::{Model, Pooling};
use supernate::science::regression::{Line, Point};
use supernate::science::shelf_life::{
    Direction, Outcome, Side, Specification, crossing, of_model, prediction_crossing,
};
use supernate::science::trend::context::{self, RULES};
use supernate::science::trend::{Levels, early_warning, lot_trend, single_result};
use supernate::science::warning_rules::facts::{Lot, Pull, Viscosity};
use supernate::science::warning_rules::{Settings, all};
use supernate::science::{flow, kinetics, settling_curve, tolerance};

const MODELS: [Model; 3] = [Model::SeparateLines, Model::CommonSlope, Model::CommonLine];

/// One to five lots of three to eight pulls, falling from about 100 against a lower limit of 90.
fn lots() -> impl Strategy<Value = Vec<Vec<Point>>> {
    let lot = (98.0..102.0, -0.4..0.05, proptest::collection::vec(-1.0..1.0_f64, 3..9));
    proptest::collection::vec(lot, 1..6).prop_map(|lots| {
        let ages = [0.0, 3.0, 6.0, 9.0, 12.0, 18.0, 24.0, 36.0];
        let make = |(level, slope, noise): (f64, f64, Vec<f64>)| {
            noise.iter().zip(ages).map(|(e, x)| Point { x, y: level + slope * x + 0.5 * e }).collect()
        };
        lots.into_iter().map(make).collect()
    })
}

/// Ordinary numbers, and now and then one that no instrument should give.
fn odd() -> impl Strategy<Value = f64> {
    prop_oneof![
        6 => -100.0..100.0_f64,
        2 => Just(0.0),
        1 => Just(3.0),
        1 => proptest::num::f64::ANY,
    ]
}

fn pool(lots: &[Vec<Point>]) -> Pooling {
    let slices: Vec<&[Point]> = lots.iter().map(Vec::as_slice).collect();
    Pooling::of(&slices, 0.25).unwrap()
}

fn against(lower: f64) -> Specification {
    Specification { lower: Some(lower), upper: None, direction: Direction::Decreasing }
}

fn mapped(lots: &[Vec<Point>], f: impl Fn(Point) -> Point) -> Vec<Vec<Point>> {
    lots.iter().map(|lot| lot.iter().map(|p| f(*p)).collect()).collect()
}

fn close(a: f64, b: f64, tolerance: f64) -> Result<(), TestCaseError> {
    prop_assert!((a - b).abs() <= tolerance * a.abs().max(b.abs()).max(1e-12), "{a} {b}");
    Ok(())
}

/// Two analyses say the same: model, probabilities, statuses and roots (times `ages`).
fn same(a: &Pooling, b: &Pooling, limits: (f64, f64), ages: f64) -> Result<(), TestCaseError> {
    for (a, b) in [(a.slopes, b.slopes), (a.intercepts, b.intercepts), (a.joint(), b.joint())] {
        prop_assert_eq!(a.is_some(), b.is_some());
        if let (Some(a), Some(b)) = (a, b) {
            prop_assert!((a.p - b.p).abs() <= 1e-8, "{} {}", a.p, b.p);
        }
    }
    for model in MODELS {
        let left = of_model(a, model, &against(limits.0), 0.95);
        let right = of_model(b, model, &against(limits.1), 0.95);
        match (left.outcome, right.outcome) {
            (Outcome::Crosses(x), Outcome::Crosses(y)) => close(x * ages, y, 1e-7)?,
            (left, right) => prop_assert_eq!(left, right),
        }
    }
    Ok(())
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    #[test]
    fn shifting_all_values_shifts_nothing_else(lots in lots(), shift in -1000.0..1000.0_f64) {
        let moved = mapped(&lots, |p| Point { x: p.x, y: p.y + shift });
        same(&pool(&lots), &pool(&moved), (90.0, 90.0 + shift), 1.0)?;
    }

    #[test]
    fn scaling_all_values_scales_nothing_else(lots in lots(), scale in 0.001..1000.0_f64) {
        let scaled = mapped(&lots, |p| Point { x: p.x, y: p.y * scale });
        same(&pool(&lots), &pool(&scaled), (90.0, 90.0 * scale), 1.0)?;
    }

    #[test]
    fn days_and_months_agree(lots in lots()) {
        let days = mapped(&lots, |p| Point { x: p.x * 30.4375, y: p.y });
        same(&pool(&lots), &pool(&days), (90.0, 90.0), 30.4375)?;
    }

    #[test]
    fn order_of_lots_and_results_is_nothing(lots in lots()) {
        let mut turned: Vec<Vec<Point>> = lots.iter().rev().cloned().collect();
        turned.iter_mut().for_each(|lot| lot.reverse());
        same(&pool(&lots), &pool(&turned), (90.0, 90.0), 1.0)?;
    }

    #[test]
    fn the_root_is_where_the_limit_is_met(lots in lots(), limit in 85.0..97.0_f64) {
        let pooling = pool(&lots);
        for model in MODELS {
            for lot in 0..lots.len() {
                let Some(line) = pooling.mean_line(model, lot) else { continue };
                let t = Student::new(line.df as f64).unwrap().upper_quantile(0.05).unwrap();
                let bound = |x: f64| line.at(x) - t * (line.variance * line.leverage(x)).sqrt();
                match crossing(&line, limit, Side::Lower, t) {
                    Outcome::Crosses(x) => {
                        // The bound misses the limit by no more than a shift of 1e-9 of the age makes.
                        let rise = bound(x * (1.0 + 1e-6)) - bound(x * (1.0 - 1e-6));
                        let slope = rise.abs() / (2e-6 * x.max(1e-9));
                        let allowed = 1e-9 * (slope * x.max(1.0) + limit);
                        prop_assert!((bound(x) - limit).abs() <= allowed, "{x} {} {limit}", bound(x));
                        prop_assert!(bound(0.5 * x) >= limit - 1e-9, "inside before the root");
                    }
                    Outcome::NoCrossing => prop_assert!(bound(1e6) >= limit),
                    Outcome::FailsAtZero => prop_assert!(bound(0.0) < limit),
                    other => prop_assert!(false, "{other:?}"),
                }
            }
        }
    }

    #[test]
    fn one_container_binds_before_the_mean(lots in lots(), limit in 85.0..95.0_f64) {
        let pooling = pool(&lots);
        let Some(line) = pooling.mean_line(pooling.model, 0) else { return Ok(()) };
        let t = Student::new(line.df as f64).unwrap().upper_quantile(0.05).unwrap();
        let bound = |x: f64| line.at(x) - t * (line.variance * (1.0 + line.leverage(x))).sqrt();
        let mean = crossing(&line, limit, Side::Lower, t);
        match prediction_crossing(&line, limit, Side::Lower, t) {
            Outcome::Crosses(x) => {
                prop_assert!((bound(x) - limit).abs() <= 1e-7 * limit, "{} {limit}", bound(x));
                prop_assert!(mean.months().is_none_or(|months| x <= months * (1.0 + 1e-9)));
            }
            Outcome::NoCrossing => prop_assert_eq!(mean, Outcome::NoCrossing),
            Outcome::FailsAtZero => prop_assert!(bound(0.0) < limit),
            other => prop_assert!(false, "{other:?}"),
        }
    }

    #[test]
    fn pooling_identical_lots_narrows_the_limits(lots in lots(), copies in 2..5_usize, x in 0.0..48.0_f64) {
        let twins: Vec<Vec<Point>> = vec![lots[0].clone(); copies];
        let pooling = pool(&twins);
        prop_assert_eq!(pooling.model, Model::CommonLine);
        let one = pooling.mean_line(Model::SeparateLines, 0);
        let all = pooling.mean_line(Model::CommonLine, 0);
        if let (Some(one), Some(all)) = (one, all) {
            let half = |line: &supernate::science::regression::MeanLine| {
                let t = Student::new(line.df as f64).unwrap().upper_quantile(0.05).unwrap();
                t * (line.variance * line.leverage(x)).sqrt()
            };
            prop_assert!(half(&all) <= half(&one) * (1.0 + 1e-12));
            close(one.at(x), all.at(x), 1e-10)?;
        }
    }

    #[test]
    fn replicates_in_any_order_give_one_line(
        values in proptest::collection::vec(95.0..105.0_f64, 6..12), turn in 0..6_usize
    ) {
        let points: Vec<Point> =
            values.iter().enumerate().map(|(i, &y)| Point { x: 3.0 * (i / 2) as f64, y }).collect();
        let mut turned = points.clone();
        turned.rotate_left(turn);
        let (a, b) = (Line::fit(&points).unwrap(), Line::fit(&turned).unwrap());
        close(a.slope, b.slope, 1e-8)?;
        close(a.sse, b.sse, 1e-10)?;
    }

    #[test]
    fn nothing_but_numbers_comes_out(
        xs in proptest::collection::vec(proptest::num::f64::ANY, 0..6),
        ys in proptest::collection::vec(proptest::num::f64::ANY, 0..6),
    ) {
        let points: Vec<Point> = xs.iter().zip(&ys).map(|(&x, &y)| Point { x, y }).collect();
        if let Ok(line) = Line::fit(&points) {
            prop_assert!(line.slope.is_finite() && line.sse.is_finite());
        }
        if let Ok(pooling) = Pooling::of(&[&points, &points], 0.25) {
            for model in MODELS {
                let found = of_model(&pooling, model, &against(0.0), 0.95);
                prop_assert!(found.outcome.months().is_none_or(f64::is_finite));
                prop_assert!(pooling.slopes.is_none_or(|test| test.p.is_finite()));
            }
        }
    }

    #[test]
    fn no_rule_lets_anything_but_numbers_out(
        xs in proptest::collection::vec(odd(), 12),
        ys in proptest::collection::vec(odd(), 12),
        (x, y) in (odd(), odd()),
    ) {
        let points: Vec<Point> = xs.iter().zip(&ys).map(|(&x, &y)| Point { x, y }).collect();
        let history: Vec<&[Point]> = points.chunks(3).collect();
        let own = &points[..4];
        if let Forecast::Expected { limits, .. } = next_value(own, x, 0.95) {
            prop_assert!(limits.lower.is_finite() && limits.upper.is_finite());
        }
        if let Ok(found) = single_result::forecast(&history, own, x) {
            if let Ok(judged) = found.judge(y, Levels::default()) {
                prop_assert!((0.0..=1.0).contains(&judged.p), "{judged:?}");
            }
            if let Some(limits) = found.limits(0.01) {
                prop_assert!(limits.lower.is_finite() && limits.upper.is_finite());
            }
        }
        if let Ok(trend) = lot_trend::judge(&history, own, Levels::default()) {
            prop_assert!((0.0..=1.0).contains(&trend.p));
        }
        if let Ok(outlook) = early_warning::outlook(&history, own, x) {
            let warning = outlook.warning(Some(y), None);
            prop_assert!((0.0..=1.0).contains(&warning.probability), "{warning:?}");
        }
        for rule in RULES {
            if let Ok(test) = context::test(rule, &history, own, Point { x, y }) {
                prop_assert!((0.0..=1.0).contains(&test.p), "{rule:?} {test:?}");
            }
        }
    }

    #[test]
    fn no_formula_lets_anything_but_numbers_out(values in proptest::collection::vec(odd(), 12)) {
        let pairs: Vec<(f64, f64)> = values.chunks(2).map(|pair| (pair[0], pair[1])).collect();
        prop_assert!(kinetics::mean_kinetic_temperature(&pairs, values[0]).is_none_or(f64::is_finite));
        if let Ok(fit) = kinetics::arrhenius(&pairs) {
            prop_assert!(fit.activation_energy.is_finite() && fit.ln_a.is_finite());
        }
        let aim = tolerance::Aim { content: 0.9, confidence: 0.95, centre_size: values[0], df: values[1] };
        prop_assert!(tolerance::howe(&aim).is_none_or(f64::is_finite));
        let readings: Vec<flow::Reading> = pairs
            .iter()
            .map(|&(rate, stress)| flow::Reading { rate, stress, torque_percent: None })
            .collect();
        if let Ok(curve) = flow::fit(&readings) {
            let finite = |fit: &flow::Fit| fit.r_squared.is_finite() && fit.consistency.is_finite();
            prop_assert!(curve.fits.iter().all(finite));
        }
        let heights: Vec<settling_curve::Reading> =
            pairs.iter().map(|&(time, height)| settling_curve::Reading { time, height }).collect();
        if let Ok(curve) = settling_curve::analyse(&heights) {
            prop_assert!(curve.first_rate.is_none_or(|first| first.rate.is_finite()));
        }
    }

    #[test]
    fn evidence_is_made_of_numbers(values in proptest::collection::vec(odd(), 40)) {
        let pulls: Vec<Pull> = values
            .chunks(10)
            .enumerate()
            .map(|(i, v)| Pull {
                age_days: 30.0 * i as f64,
                f: Some(v[0]),
                inversions: Some(v[1]),
                settling_rate: Some(v[2]),
                d10: Some(v[3]),
                d90: Some(v[4]),
                zeta: Some(v[5]),
                viscosity: Some(Viscosity { value: v[6], method: 1, low_shear: true }),
                ph: Some(v[7]),
                assay: Some(v[8]),
                preservative: Some(v[9]),
                ..Pull::default()
            })
            .collect();
        for finding in all(&Lot { pulls, ..Lot::default() }, &Settings::default()) {
            prop_assert!(finding.evidence.iter().all(|e| e.value.is_finite()), "{finding:?}");
        }
    }
}
