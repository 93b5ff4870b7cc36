//! The evaluation as JSON. Numbers that do not exist are null.

use serde::Serialize;

use crate::domain::evaluation::assess::Assessment;
use crate::domain::evaluation::trend::TrendRow;
use crate::science::pooling::{FTest, Model, Pooling};
use crate::science::shelf_life::{Direction, Side};
use crate::science::transform::Scale;
use crate::science::trend::context::Rule;
use crate::science::trend::early_warning::State;
use crate::science::trend::single_result::Rule as ResultRule;
use crate::science::trend::{Needs, Verdict};

#[derive(Serialize)]
struct Document {
    series: Vec<SeriesJson>,
}

#[derive(Serialize)]
struct SeriesJson {
    product: Option<String>,
    test: String,
    condition: Option<String>,
    pack: Option<String>,
    orientation: Option<String>,
    unit: Option<String>,
    direction: Option<&'static str>,
    scale: &'static str,
    lots: Vec<LotJson>,
    pooling: PoolingJson,
    shelf_life: ShelfLifeJson,
    trend: Vec<TrendJson>,
    notes: Vec<String>,
}

#[derive(Serialize)]
struct LotJson {
    lot: String,
    n: usize,
    slope: Option<f64>,
    intercept: Option<f64>,
    se_slope: Option<f64>,
    mse: Option<f64>,
    df: Option<usize>,
}

#[derive(Serialize)]
struct PoolingJson {
    tested: bool,
    slopes: Option<TestJson>,
    intercepts: Option<InterceptsJson>,
    model: &'static str,
}

#[derive(Serialize)]
struct TestJson {
    f: Option<f64>,
    df1: usize,
    df2: usize,
    p: f64,
}

#[derive(Serialize)]
struct InterceptsJson {
    f: Option<f64>,
    df1: usize,
    df2: usize,
    p: f64,
    p_full_mse: Option<f64>,
}

#[derive(Serialize)]
struct ShelfLifeJson {
    status: &'static str,
    months: Option<f64>,
    months_floor: Option<u64>,
    side: Option<&'static str>,
    binding_lot: Option<String>,
    per_lot: Vec<LotLifeJson>,
}

#[derive(Serialize)]
struct LotLifeJson {
    lot: String,
    status: &'static str,
    months: Option<f64>,
}

#[derive(Serialize)]
struct TrendJson {
    lot: String,
    age_months: f64,
    value: f64,
    result: ResultJson,
    lot_trend: LotTrendJson,
    early_warning: Option<WarningJson>,
    context: Vec<ContextJson>,
}

#[derive(Serialize)]
struct ResultJson {
    verdict: &'static str,
    rule: &'static str,
    p: Option<f64>,
    nu: Option<f64>,
    lower: Option<f64>,
    upper: Option<f64>,
    needs: Option<String>,
}

#[derive(Serialize)]
struct LotTrendJson {
    verdict: &'static str,
    rule: &'static str,
    p: Option<f64>,
    needs: Option<String>,
}

#[derive(Serialize)]
struct WarningJson {
    state: &'static str,
    probability: f64,
    month: Option<u64>,
}

#[derive(Serialize)]
struct ContextJson {
    rule: &'static str,
    p: Option<f64>,
    needs: Option<String>,
}

/// The whole document, with a line end.
pub(super) fn document(assessments: &[Assessment]) -> String {
    let document = Document { series: assessments.iter().map(series).collect() };
    // Every value is a string, a whole number or a finite float, so writing it cannot fail.
    let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
    text.push('\n');
    text
}

fn stated(text: &str) -> Option<String> {
    (!text.is_empty()).then(|| text.to_string())
}

fn series(found: &Assessment) -> SeriesJson {
    let series = &found.series;
    SeriesJson {
        product: stated(&series.product),
        test: series.test.clone(),
        condition: stated(&series.condition),
        pack: stated(&series.pack),
        orientation: stated(&series.orientation),
        unit: stated(&series.unit),
        direction: series.direction.map(direction),
        scale: scale(series.scale),
        lots: lots(found),
        pooling: pooling(found),
        shelf_life: shelf_life(found),
        trend: found.trend.iter().map(|row| trend(found, row)).collect(),
        notes: found.notes.clone(),
    }
}

fn lots(found: &Assessment) -> Vec<LotJson> {
    let each = found.series.lots.iter().zip(&found.lines).zip(&found.points);
    each.map(|((lot, line), points)| LotJson {
        lot: lot.name.clone(),
        n: points.len(),
        slope: line.map(|line| line.slope),
        intercept: line.map(|line| line.intercept() + found.origin),
        se_slope: line.and_then(|line| line.se_slope()),
        mse: line.and_then(|line| line.mse()),
        df: line.map(|line| line.df),
    })
    .collect()
}

fn pooling(found: &Assessment) -> PoolingJson {
    let Some(pooling) = &found.pooling else {
        let model = if found.series.lots.len() == 1 { Model::CommonLine } else { Model::SeparateLines };
        return PoolingJson { tested: false, slopes: None, intercepts: None, model: model_name(model) };
    };
    PoolingJson {
        tested: pooling.tested(),
        slopes: pooling.slopes.map(|test| TestJson { f: test.f, df1: test.df1, df2: test.df2, p: test.p }),
        intercepts: pooling.intercepts.map(|test| intercepts(pooling, test)),
        model: model_name(pooling.model),
    }
}

fn intercepts(pooling: &Pooling, test: FTest) -> InterceptsJson {
    let p_full_mse = pooling.intercepts_full_error().map(|full| full.p);
    InterceptsJson { f: test.f, df1: test.df1, df2: test.df2, p: test.p, p_full_mse }
}

fn shelf_life(found: &Assessment) -> ShelfLifeJson {
    let (life, lots) = (&found.life, &found.series.lots);
    ShelfLifeJson {
        status: life.outcome.code(),
        months: life.outcome.months(),
        months_floor: life.months_floor,
        side: life.side.filter(|_| life.outcome.months().is_some()).map(side),
        binding_lot: life.binding_lot.map(|lot| lots[lot].name.clone()),
        per_lot: lots
            .iter()
            .zip(&life.per_lot)
            .map(|(lot, life)| LotLifeJson {
                lot: lot.name.clone(),
                status: life.outcome.code(),
                months: life.outcome.months(),
            })
            .collect(),
    }
}

fn trend(found: &Assessment, row: &TrendRow) -> TrendJson {
    let needs = |needs: &Needs| Some(needs.to_string());
    let rule = result_rule(row.rule);
    let result = match &row.result {
        Ok(judged) => ResultJson {
            verdict: verdict(judged.judgement.verdict),
            rule: result_rule(judged.judgement.rule),
            p: Some(judged.judgement.p),
            nu: Some(judged.judgement.df),
            lower: Some(judged.limits.lower),
            upper: Some(judged.limits.upper),
            needs: None,
        },
        Err(missing) => ResultJson {
            verdict: verdict(Verdict::NotEvaluable),
            rule,
            p: None,
            nu: None,
            lower: None,
            upper: None,
            needs: needs(missing),
        },
    };
    let lot_trend = match &row.lot_trend {
        Ok(trend) => {
            LotTrendJson { verdict: verdict(trend.verdict), rule: "HL", p: Some(trend.p), needs: None }
        }
        Err(missing) => LotTrendJson {
            verdict: verdict(Verdict::NotEvaluable),
            rule: "HL",
            p: None,
            needs: needs(missing),
        },
    };
    let context = row.context.iter().map(|(rule, p)| ContextJson {
        rule: context_rule(*rule),
        p: p.as_ref().ok().copied(),
        needs: p.as_ref().err().and_then(needs),
    });
    TrendJson {
        lot: found.series.lots[row.lot].name.clone(),
        age_months: row.age_months,
        value: row.value,
        result,
        lot_trend,
        early_warning: row.warning.map(|warning| WarningJson {
            state: state(warning.state),
            probability: warning.probability,
            month: warning.month,
        }),
        context: context.collect(),
    }
}

pub(super) fn model_name(model: Model) -> &'static str {
    match model {
        Model::SeparateLines => "separate",
        Model::CommonSlope => "common_slope",
        Model::CommonLine => "common_line",
    }
}

pub(super) fn direction(direction: Direction) -> &'static str {
    match direction {
        Direction::Decreasing => "decreasing",
        Direction::Increasing => "increasing",
        Direction::Either => "either",
    }
}

pub(super) fn scale(scale: Scale) -> &'static str {
    match scale {
        Scale::None => "none",
        Scale::Ln => "ln",
        Scale::Anscombe => "anscombe",
        Scale::Logit => "logit",
    }
}

pub(super) fn side(side: Side) -> &'static str {
    match side {
        Side::Lower => "lower",
        Side::Upper => "upper",
    }
}

fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::NotEvaluable => "not_evaluable",
        Verdict::InTrend => "in_trend",
        Verdict::Alert => "alert",
        Verdict::Action => "action",
    }
}

fn state(state: State) -> &'static str {
    match state {
        State::None => "none",
        State::Likely => "likely",
        State::VeryLikely => "very_likely",
    }
}

pub(super) fn result_rule(rule: ResultRule) -> &'static str {
    match rule {
        ResultRule::H => "H",
        ResultRule::A => "A",
    }
}

fn context_rule(rule: Rule) -> &'static str {
    match rule {
        Rule::A => "A",
        Rule::B => "B",
        Rule::C => "C",
        Rule::D => "D",
        Rule::E => "E",
    }
}
