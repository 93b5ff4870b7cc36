//! The evaluation as tables for reading.

use std::collections::BTreeMap;

use super::{json, plot};
use crate::domain::evaluation::assess::Assessment;
use crate::domain::evaluation::trend::TrendRow;
use crate::science::pooling::FTest;
use crate::science::shelf_life::Outcome;
use crate::science::trend::Verdict;
use crate::science::trend::early_warning::State;

/// A number with six significant digits, without exponent where it is of ordinary size.
pub(super) fn number(value: f64) -> String {
    if value == 0.0 {
        return "0".into();
    }
    let magnitude = value.abs().log10().floor();
    if !(-5.0..9.0).contains(&magnitude) {
        return format!("{value:.5e}");
    }
    let decimals = (5.0 - magnitude).clamp(0.0, 10.0) as usize;
    let text = format!("{value:.decimals$}");
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    if text == "-0" { "0".into() } else { text.into() }
}

fn optional(value: Option<f64>) -> String {
    value.map_or_else(|| "–".into(), number)
}

fn probability(p: f64) -> String {
    if p < 0.00005 { "< 0.0001".into() } else { format!("= {p:.4}") }
}

/// All series.
pub(super) fn document(assessments: &[Assessment]) -> String {
    assessments.iter().map(series).collect::<Vec<_>>().join("\n")
}

fn series(found: &Assessment) -> String {
    let mut text = heading(found);
    text.push_str(&lots(found));
    text.push_str(&pooling(found));
    text.push_str(&shelf_life(found));
    text.push('\n');
    text.push_str(&plot::draw(found));
    text.push_str(&trend(found));
    for note in &found.notes {
        text.push_str(&format!("  Note: {note}.\n"));
    }
    text
}

fn heading(found: &Assessment) -> String {
    let series = &found.series;
    let parts = [&series.product, &series.test, &series.condition, &series.pack, &series.orientation];
    let title = parts.into_iter().filter(|part| !part.is_empty()).cloned().collect::<Vec<_>>().join(" · ");
    let unit = if series.unit.is_empty() || series.unit == "1" { "no unit" } else { &series.unit };
    let limit = |name: &str, limit: Option<rust_decimal::Decimal>| {
        limit.map(|limit| format!("{name} limit {limit}")).unwrap_or_default()
    };
    let facts = [
        unit.to_string(),
        limit("lower", series.lower_limit),
        limit("upper", series.upper_limit),
        series.direction.map(json::direction).unwrap_or("no limits").into(),
        format!("scale {}", json::scale(series.scale)),
    ];
    let facts = facts.into_iter().filter(|fact| !fact.is_empty()).collect::<Vec<_>>().join(", ");
    format!("{title}\n{}\n  {facts}\n\n", "=".repeat(title.chars().count()))
}

fn lots(found: &Assessment) -> String {
    let widest = found.series.lots.iter().map(|lot| lot.name.chars().count()).max().unwrap_or(3).max(3);
    let mut text = format!(
        "  {:<4}{:<widest$} {:>4} {:>12} {:>12} {:>12} {:>12} {:>4} {:>14}\n",
        "", "lot", "n", "slope/month", "intercept", "se slope", "mse", "df", "months"
    );
    for (index, lot) in found.series.lots.iter().enumerate() {
        let line = &found.lines[index];
        let df = line.map_or_else(|| "–".into(), |line| line.df.to_string());
        text.push_str(&format!(
            "  {:<4}{:<widest$} {:>4} {:>12} {:>12} {:>12} {:>12} {:>4} {:>14}\n",
            plot::letter(index),
            lot.name,
            found.points[index].len(),
            optional(line.map(|line| line.slope)),
            optional(line.map(|line| line.intercept() + found.origin)),
            optional(line.and_then(|line| line.se_slope())),
            optional(line.and_then(|line| line.mse())),
            df,
            outcome(found.life.per_lot[index].outcome),
        ));
    }
    text.push('\n');
    text
}

fn outcome(outcome: Outcome) -> String {
    match outcome {
        Outcome::Crosses(months) => format!("{months:.4}"),
        Outcome::NoCrossing => "never".into(),
        Outcome::FailsAtZero => "fails at 0".into(),
        Outcome::NotEstimable => "not estimable".into(),
        Outcome::NoLimit => "no limit".into(),
    }
}

fn pooling(found: &Assessment) -> String {
    let Some(pooling) = &found.pooling else { return "  Pooling: no line is drawn.\n".into() };
    let test = |name: &str, test: Option<FTest>| {
        test.map(|test| {
            let f = test.f.map_or_else(|| "–".into(), number);
            format!("  {name}: F({}, {}) = {f}, p {}\n", test.df1, test.df2, probability(test.p))
        })
        .unwrap_or_default()
    };
    let mut text = test("Slopes", pooling.slopes);
    text.push_str(&test("Intercepts", pooling.intercepts));
    text.push_str(&test("Intercepts, error of separate lines (not used)", pooling.intercepts_full_error()));
    let why = match (found.series.lots.len(), pooling.tested()) {
        (1, _) => "one lot".into(),
        (_, false) => "not testable, so not pooled".into(),
        _ => format!("tests at {}", pooling.alpha),
    };
    text.push_str(&format!("  Model: {} ({why})\n", json::model_name(pooling.model)));
    text
}

fn shelf_life(found: &Assessment) -> String {
    let life = &found.life;
    let bound =
        life.binding_lot.map(|lot| format!(", lot {}", found.series.lots[lot].name)).unwrap_or_default();
    let side = life.side.map(|side| format!("{} limit{bound}", json::side(side))).unwrap_or_default();
    match life.outcome {
        Outcome::Crosses(months) => format!(
            "  Shelf life: {} months (exactly {months:.4}; {side})\n",
            life.months_floor.unwrap_or_default()
        ),
        Outcome::FailsAtZero => {
            format!("  Shelf life: 0 months, the limit is not supported at age 0 ({side})\n")
        }
        Outcome::NoCrossing => "  Shelf life: the confidence limit never meets the limit\n".into(),
        Outcome::NotEstimable => "  Shelf life: not estimable\n".into(),
        Outcome::NoLimit => "  Shelf life: none, no limit on the side in question\n".into(),
    }
}

/// How many results got which verdict, then those that stand out, one line each.
fn trend(found: &Assessment) -> String {
    let mut text = String::from("\n");
    text.push_str(&counts("Results (rule H, or A without history)", &found.trend, |row| {
        row.result.as_ref().map(|judged| judged.judgement.verdict).map_err(ToString::to_string)
    }));
    text.push_str(&counts("Lot trends (rule HL)", &found.trend, |row| {
        row.lot_trend.as_ref().map(|trend| trend.verdict).map_err(ToString::to_string)
    }));
    for row in &found.trend {
        text.push_str(&standing_out(found, row));
    }
    text
}

fn counts(name: &str, rows: &[TrendRow], verdict: impl Fn(&TrendRow) -> Result<Verdict, String>) -> String {
    let mut verdicts = [0; 3];
    let mut missing: BTreeMap<String, usize> = BTreeMap::new();
    for row in rows {
        match verdict(row) {
            Ok(Verdict::InTrend) => verdicts[0] += 1,
            Ok(Verdict::Alert) => verdicts[1] += 1,
            Ok(Verdict::Action) => verdicts[2] += 1,
            Ok(Verdict::NotEvaluable) => {}
            Err(needs) => *missing.entry(needs).or_default() += 1,
        }
    }
    let [in_trend, alert, action] = verdicts;
    let judged = in_trend + alert + action;
    let mut text = format!("  {name}: {judged} judged, {in_trend} in trend, {alert} alert, {action} action");
    if judged > 0 {
        let expected = |level: f64| number(level * f64::from(judged));
        text.push_str(&format!(
            " (by chance alone expect {} below 0.05, {} of them below 0.01)",
            expected(0.05),
            expected(0.01)
        ));
    }
    text.push('\n');
    for (needs, count) in missing {
        text.push_str(&format!("    {count} not evaluable: {needs}\n"));
    }
    text
}

fn standing_out(found: &Assessment, row: &TrendRow) -> String {
    let place = format!("lot {}, {:.2} months", found.series.lots[row.lot].name, row.age_months);
    let word = |verdict: Verdict| if verdict == Verdict::Action { "ACTION" } else { "alert" };
    let mut text = String::new();
    if let Ok(judged) = &row.result
        && judged.judgement.verdict > Verdict::InTrend
    {
        text.push_str(&format!(
            "    {} {place}: {} outside {} to {} (rule {}, p {}, ν = {}{})\n",
            word(judged.judgement.verdict),
            number(row.value),
            number(judged.limits.lower),
            number(judged.limits.upper),
            json::result_rule(judged.judgement.rule),
            probability(judged.judgement.p),
            number(judged.judgement.df),
            if judged.judgement.weak { ", weak: little can be found here" } else { "" },
        ));
    }
    if let Ok(trend) = &row.lot_trend
        && trend.verdict > Verdict::InTrend
    {
        text.push_str(&format!(
            "    {} {place}: slope {} per month against the other lots (rule HL, p {})\n",
            word(trend.verdict),
            number(trend.slope),
            probability(trend.p),
        ));
    }
    if let Some(warning) = row.warning.filter(|warning| warning.state != State::None) {
        let how = if warning.state == State::VeryLikely { "very likely" } else { "likely" };
        let month = warning.month.map(|month| format!(", from about month {month}")).unwrap_or_default();
        text.push_str(&format!(
            "    {place}: {how} out before expiry{month} (probability {})\n",
            if warning.probability > 0.99 {
                "above 0.99".into()
            } else {
                format!("{:.2}", warning.probability)
            }
        ));
    }
    text
}
