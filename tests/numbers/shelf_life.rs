//! Fifty reference sets: regression, pooling, shelf life, caps, prediction and tolerance limits.
//!
//! Source: our own sets, computed two ways (closed form, and statsmodels 0.15 on explicit design matrices
//! with scipy 1.17.1 root finding) and cross-checked in R; the method is ICH Q1E (2003).

use serde_json::Value;
use supernate::science::diagnostics;
use supernate::science::interval;
use supernate::science::pooling::{FTest, Model, Pooling, Residuals};
use supernate::science::regression::{Line, MeanLine, NoLine, Point};
use supernate::science::shelf_life::{self, LotLife, Outcome, ShelfLife, Side};
use supernate::science::tolerance::{self, Aim};

use crate::reference::{Set, sets};
use crate::support::agree;

const MODELS: [(&str, Model); 3] = [
    ("separate", Model::SeparateLines),
    ("common_slope", Model::CommonSlope),
    ("common_line", Model::CommonLine),
];

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or_else(|| panic!("a number, not {value}"))
}

fn pooled(set: &Set) -> Pooling {
    Pooling::of(&set.slices(), 0.25).unwrap()
}

#[test]
fn all_fifty_are_here() {
    assert_eq!(sets().len(), 50);
}

#[test]
fn lines_of_single_lots() {
    for set in sets() {
        for (name, points) in &set.lots {
            let want = &set.expected["per_lot_own_fit"][name];
            let what = format!("{} {name}", set.name);
            if want["slope"].is_null() {
                assert_eq!(Line::fit(points).unwrap_err(), NoLine::OneAge, "{what}");
                continue;
            }
            let line = Line::fit(points).unwrap();
            let off = 1e-9;
            agree(line.slope, number(&want["slope"]), off, &format!("{what} slope"));
            agree(
                line.intercept() + set.origin,
                number(&want["intercept"]),
                1e-12,
                &format!("{what} intercept"),
            );
            assert_eq!(line.df as u64, want["df"].as_u64().unwrap(), "{what}");
            if want["mse"].is_null() {
                assert_eq!(line.mse(), None, "{what}");
                continue;
            }
            agree(line.mse().unwrap(), number(&want["mse"]), 1e-9, &format!("{what} mse"));
            agree(line.se_slope().unwrap(), number(&want["se_slope"]), off, &format!("{what} se slope"));
            let se = line.se_intercept().unwrap();
            agree(se, number(&want["se_intercept"]), off, &format!("{what} se intercept"));
        }
    }
}

#[test]
fn models_and_tests() {
    for set in sets() {
        let pooling = pooled(&set);
        let (models, ancova) = (&set.expected["models"], &set.expected["ancova"]);
        let what = &set.name;
        let residuals = |got: Residuals, want: &Value| {
            agree(got.sse, number(&want["sse"]), 1e-9, &format!("{what} sse"));
            assert_eq!(got.df as i64, want["df"].as_i64().unwrap(), "{what} df");
        };
        residuals(pooling.separate_residuals, &models["separate"]);
        residuals(pooling.common_slope_residuals, &models["common_slope"]);
        residuals(pooling.common_line_residuals, &models["common_line"]);
        if let Some(slope) = pooling.common_slope {
            let want = number(&models["common_slope"]["slope"]);
            agree(slope, want, 1e-9, &format!("{what} common slope"));
        }
        ftest(&set, pooling.slopes, &ancova["slopes"], "slopes");
        ftest(&set, pooling.intercepts, &ancova["intercepts_reduced_mse"], "intercepts");
        ftest(
            &set,
            pooling.intercepts_full_error(),
            &ancova["intercepts_full_mse"],
            "intercepts, full error",
        );
        ftest(&set, pooling.joint(), &ancova["slopes_and_intercepts_joint"], "joint");
        assert_eq!(name_of(pooling.model), ancova["chosen_model"].as_str().unwrap(), "{what}");
        if let Some(full) = ancova["chosen_if_full_mse_used_for_intercepts"].as_str() {
            assert_eq!(name_of(pooling.model_with_full_error()), full, "{what}");
        }
    }
}

fn name_of(model: Model) -> &'static str {
    MODELS.iter().find(|(_, m)| *m == model).unwrap().0
}

fn ftest(set: &Set, got: Option<FTest>, want: &Value, which: &str) {
    let what = format!("{} {which}", set.name);
    let Some(got) = got else {
        assert!(want.is_null() || want["p"].is_null(), "{what}: not tested here, but there {want}");
        return;
    };
    agree(got.p, number(&want["p"]), 1e-8, &format!("{what} p"));
    assert_eq!(
        (got.df1 as u64, got.df2 as u64),
        (want["df1"].as_u64().unwrap(), want["df2"].as_u64().unwrap())
    );
    match want["F"].as_f64() {
        Some(f) => agree(got.f.unwrap(), f, 1e-8, &format!("{what} F")),
        None => assert_eq!(got.f, None, "{what}"),
    }
}

#[test]
fn shelf_lives_of_every_model() {
    for set in sets() {
        let pooling = pooled(&set);
        let want = &set.expected["shelf_life"];
        for (name, model) in MODELS {
            if want[name].is_null() {
                continue;
            }
            let got = shelf_life::of_model(&pooling, model, &set.specification, 0.95);
            group(&set, &got, &want[name], name);
        }
        let own = shelf_life::of_own_lines(&pooling, &set.specification, 0.95);
        group(&set, &own, &want["own_mse_per_lot"], "own variance");
        let chosen = shelf_life::of_model(&pooling, pooling.model, &set.specification, 0.95);
        overall(&set, &chosen, &want["chosen"], "chosen");
    }
}

fn group(set: &Set, got: &ShelfLife, want: &Value, model: &str) {
    overall(set, got, &want["overall"], model);
    for ((name, _), life) in set.lots.iter().zip(&got.per_lot) {
        let want = &want["per_lot"][name];
        if !want.is_null() {
            lot(life, want, &format!("{} {model} {name}", set.name));
        }
    }
}

fn status(outcome: Outcome) -> &'static str {
    match outcome {
        Outcome::Crosses(_) => "crosses",
        Outcome::NoCrossing => "no_crossing",
        Outcome::FailsAtZero => "fails_at_zero",
        Outcome::NotEstimable => "not_estimable",
        Outcome::NoLimit => "no_limit",
    }
}

fn lot(got: &LotLife, want: &Value, what: &str) {
    assert_eq!(status(got.outcome), want["status"].as_str().unwrap(), "{what}");
    let Some(t) = want["t_quantile"].as_f64() else { return };
    agree(got.t.unwrap(), t, 1e-11, &format!("{what} t"));
    assert_eq!(got.df as u64, want["df"].as_u64().unwrap(), "{what}");
    let side = if got.side == Some(Side::Lower) { "lower" } else { "upper" };
    assert_eq!(side, want["side"].as_str().unwrap(), "{what}");
    if let Some(months) = want["months"].as_f64() {
        agree(got.outcome.months().unwrap(), months, 1e-8, &format!("{what} months"));
    }
    if let Some(mean) = want["mean_line_crossing"].as_f64() {
        agree(got.mean_line_crossing.unwrap(), mean, 1e-8, &format!("{what} mean line"));
    }
}

fn overall(set: &Set, got: &ShelfLife, want: &Value, model: &str) {
    let what = format!("{} {model}", set.name);
    assert_eq!(status(got.outcome), want["status"].as_str().unwrap(), "{what}");
    match want["months"].as_f64() {
        Some(months) => agree(got.outcome.months().unwrap(), months, 1e-8, &what),
        None => assert_eq!(got.outcome.months(), None, "{what}"),
    }
    assert_eq!(got.months_floor, want["months_floor"].as_u64(), "{what}");
    let binding = got.binding_lot.map(|lot| set.lots[lot].0.as_str());
    let equal_lots = set.name == "constant_values" || got.outcome == Outcome::FailsAtZero;
    if !equal_lots {
        assert_eq!(binding, want["binding_lot"].as_str(), "{what}");
    }
    let missing = want["lots_not_estimable"].as_array().unwrap().len();
    assert_eq!(got.partial, missing > 0 && missing < got.per_lot.len(), "{what}");
}

/// Two decimals of the overview in the method document, kept as a second, independent record.
#[test]
fn the_error_term_can_turn_the_verdict() {
    let set = sets().into_iter().find(|s| s.name == "intercept_verdict_depends_on_error_term").unwrap();
    let pooling = pooled(&set);
    assert_eq!(format!("{:.4}", pooling.intercepts.unwrap().p), "0.2548");
    assert_eq!(format!("{:.4}", pooling.intercepts_full_error().unwrap().p), "0.2453");
    assert_eq!((pooling.model, pooling.model_with_full_error()), (Model::CommonLine, Model::CommonSlope));
}

#[test]
fn extrapolation_caps() {
    use supernate::science::extrapolation::{Node, Storage, limit};
    for set in sets() {
        let want = &set.expected["extrapolation_caps"];
        let covered = number(&want["months_covered_by_every_lot"]);
        let cap = |node| limit(covered, node, Storage::RoomTemperature).unwrap();
        assert_eq!(cap(Node::N2), number(&want["twice_max_plus_12"]));
        assert_eq!(cap(Node::N4), number(&want["one_and_half_max_plus_6"]));
        assert_eq!(cap(Node::N5), number(&want["plus_3"]));
    }
}

#[test]
fn prediction_and_tolerance_at_the_next_pull() {
    let mut checked = 0;
    for set in sets() {
        let pooling = pooled(&set);
        let x = number(&set.expected["next_time"]);
        for (index, (name, _)) in set.lots.iter().enumerate() {
            let want = &set.expected["next_point"][name];
            for (key, line) in [
                (name_of(pooling.model), pooling.mean_line(pooling.model, index)),
                ("own", pooling.own_line(index)),
            ] {
                if want[key].is_null() {
                    continue;
                }
                next_point(&set, &line.unwrap(), x, &want[key], &format!("{} {name} {key}", set.name));
                checked += 1;
            }
        }
    }
    assert!(checked > 150, "{checked}");
}

/// Limits are compared as distances from the fitted value, in units of the half width.
fn next_point(set: &Set, line: &MeanLine, x: f64, want: &Value, what: &str) {
    let off = 1e-9;
    let fit = number(&want["fit"]);
    agree(line.at(x) + set.origin, fit, 1e-11, &format!("{what} fit"));
    agree(line.leverage(x), number(&want["leverage"]), 1e-11, &format!("{what} leverage"));
    agree(line.variance.sqrt(), number(&want["s"]), off, &format!("{what} s"));
    let near = |got: f64, want: &Value, half: f64, name: &str| {
        let distance = (got + set.origin - number(want)).abs();
        let allowed = 2e-8 * half + 4.0 * f64::EPSILON * number(want).abs();
        assert!(distance <= allowed, "{what} {name}: {got} {want} differ by {distance:e}");
    };
    for (key, confidence) in [("0.9", 0.9), ("0.95", 0.95), ("0.99", 0.99)] {
        let limits = interval::prediction(line, x, 1, confidence).unwrap();
        let want = &want[format!("pi_two_sided_{key}")];
        let half = 0.5 * (limits.upper - limits.lower);
        near(limits.lower, &want[0], half, key);
        near(limits.upper, &want[1], half, key);
    }
    let half = line.variance.sqrt();
    let one = interval::prediction_one_sided(line, x, 1, 0.95).unwrap();
    near(one.lower, &want["pi_lower_one_sided_0.95"], half, "one-sided");
    let three = interval::prediction_one_sided(line, x, 3, 0.95).unwrap();
    near(three.lower, &want["pi_lower_one_sided_0.95_mean_of_3"], half, "mean of three");
    let mean = interval::confidence_of_mean_one_sided(line, x, 0.95).unwrap();
    near(mean.upper, &want["ci_mean_upper_one_sided_0.95"], half, "mean line");
    for (key, content) in [("ti_p0.95_g0.95", 0.95), ("ti_p0.99_g0.95", 0.99)] {
        let aim = Aim::of_line(content, 0.95, line, x);
        let want = &want[key];
        agree(tolerance::one_sided(&aim).unwrap(), number(&want["k1_exact"]), 1e-8, &format!("{what} k1"));
        agree(tolerance::two_sided(&aim).unwrap(), number(&want["k2_exact"]), 1e-7, &format!("{what} k2"));
        agree(tolerance::howe(&aim).unwrap(), number(&want["k2_howe"]), 1e-10, &format!("{what} Howe"));
    }
    if let Some(back) = want["pi_two_sided_0.95_original_scale"].as_array() {
        let limits = interval::prediction(line, x, 1, 0.95).unwrap();
        agree(set.scale.back(limits.lower), number(&back[0]), 1e-8, &format!("{what} back"));
        agree(set.scale.back(limits.upper), number(&back[1]), 1e-8, &format!("{what} back"));
    }
}

#[test]
fn residuals_and_lack_of_fit() {
    for set in sets() {
        let pooling = pooled(&set);
        let offset = 1e-8;
        for want in set.expected["residuals_chosen_model"].as_array().unwrap() {
            let index = set.lots.iter().position(|(name, _)| name == want["lot"].as_str().unwrap()).unwrap();
            let x = number(&want["x"]);
            let line = pooling.mean_line(pooling.model, index).unwrap();
            // Replicates share an age: the one whose residual is the wanted one.
            let wanted = number(&want["residual"]);
            let point = set.lots[index].1.iter().filter(|p| p.x == x).min_by(|a, b| {
                let distance = |p: &Point| (p.y - line.at(p.x) - wanted).abs();
                distance(a).total_cmp(&distance(b))
            });
            let got = diagnostics::residual(&line, *point.unwrap());
            let what = format!("{} {} {x}", set.name, want["lot"]);
            assert!(
                (got.residual - wanted).abs() <= 1e-8 * line.variance.sqrt() + 1e-9 * wanted.abs().max(1e-4),
                "{what}"
            );
            if let Some(t) = want["externally_studentized"].as_f64() {
                assert!((got.external.unwrap() - t).abs() <= offset * t.abs().max(1.0) * 10.0, "{what}");
                agree(got.p.unwrap(), number(&want["p_two_sided"]), offset * 10.0, &what);
            }
        }
        let residuals = match pooling.model {
            Model::SeparateLines => pooling.separate_residuals,
            Model::CommonSlope => pooling.common_slope_residuals,
            Model::CommonLine => pooling.common_line_residuals,
        };
        let got = diagnostics::lack_of_fit(&set.slices(), residuals.sse, residuals.df, pooling.floor);
        match set.expected["lack_of_fit"]["F"].as_f64() {
            Some(f) => {
                let got = got.unwrap();
                agree(got.f, f, 1e-9, &set.name);
                agree(got.p, number(&set.expected["lack_of_fit"]["p"]), 1e-9, &set.name);
            }
            None => assert_eq!(got, None, "{}", set.name),
        }
    }
}
