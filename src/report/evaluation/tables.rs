//! The tables of an evaluation as words.

use super::{About, words};
use crate::domain::evaluation::assess::Assessment;
use crate::science::pooling::{FTest, Pooling, Residuals};
use crate::science::shelf_life;

/// The analysis of covariance: question, sum of squares, df, mean square, F, p, answer. The row with the reduced
/// model's error decides on intercepts; the other error term is shown beside it.
pub fn pooling(found: &Assessment) -> Vec<Vec<String>> {
    let Some(pooling) = found.pooling.as_ref().filter(|_| found.series.lots.len() > 1) else {
        return Vec::new();
    };
    let mut rows = Vec::new();
    let level = pooling.alpha;
    let differ = |test: FTest| if test.p < level { "yes" } else { "no" };
    rows.push(tested("Do slopes differ?", pooling.slopes, pooling.between_slopes(), differ));
    rows.push(residual("Residual, a line for each lot", pooling.separate_residuals));
    rows.push(tested(
        "Do intercepts differ, given one slope?",
        pooling.intercepts,
        pooling.between_lots(),
        differ,
    ));
    rows.push(residual("Residual, one slope (decides on intercepts)", pooling.common_slope_residuals));
    let shown = |test: FTest| {
        if test.p < level { "yes; shown, does not decide" } else { "no; shown, does not decide" }
    };
    rows.push(tested(
        "Intercepts against the error of separate lines",
        pooling.intercepts_full_error(),
        pooling.between_lots(),
        shown,
    ));
    rows.push(tested(
        "Slopes and intercepts together",
        pooling.joint(),
        pooling.between_slopes() + pooling.between_lots(),
        shown,
    ));
    rows.push(residual("Residual, one line", pooling.common_line_residuals));
    rows
}

fn tested(
    question: &str,
    test: Option<FTest>,
    squares: f64,
    answer: impl Fn(FTest) -> &'static str,
) -> Vec<String> {
    let Some(test) = test else {
        let dash = || "–".to_string();
        let why = "cannot be tested yet".to_string();
        return vec![question.to_string(), words::number(squares), dash(), dash(), dash(), dash(), why];
    };
    vec![
        question.to_string(),
        words::number(squares),
        format!("{}, {}", test.df1, test.df2),
        words::number(squares / test.df1 as f64),
        test.f.map_or("no residual variance".to_string(), |f| format!("{f:.4}")),
        words::probability(test.p),
        answer(test).to_string(),
    ]
}

fn residual(name: &str, residuals: Residuals) -> Vec<String> {
    vec![
        name.to_string(),
        words::number(residuals.sse),
        residuals.df.to_string(),
        residuals.mse().map_or("–".to_string(), words::number),
        // A residual has no test of its own.
        "–".to_string(),
        "–".to_string(),
        "–".to_string(),
    ]
}

/// The lots, each by itself, with its months under the chosen model and by its own variance alone.
pub fn lots(about: &About<'_>) -> Vec<Vec<String>> {
    let found = about.found;
    let own = found.pooling.as_ref().map(|pooling| own_lives(found, pooling));
    let dash = || "–".to_string();
    let each = found.series.lots.iter().enumerate();
    each.map(|(at, lot)| {
        let line = found.lines.get(at).copied().flatten();
        let formulation = about.built.used.get(at).and_then(|(_, records)| records.first());
        vec![
            lot.name.clone(),
            formulation.map(|record| record.formulation.clone()).unwrap_or_default(),
            found.points.get(at).map_or(0, Vec::len).to_string(),
            line.map_or_else(dash, |line| words::number(line.slope)),
            line.and_then(|line| line.se_slope()).map_or_else(dash, words::number),
            line.map_or_else(dash, |line| words::number(line.intercept() + found.origin)),
            line.and_then(|line| line.mse()).map_or_else(dash, words::number),
            found.life.per_lot.get(at).map_or_else(dash, |life| words::outcome(life.outcome)),
            own.as_ref().and_then(|own| own.get(at).cloned()).unwrap_or_else(dash),
        ]
    })
    .collect()
}

fn own_lives(found: &Assessment, pooling: &Pooling) -> Vec<String> {
    let life = shelf_life::of_own_lines(pooling, &found.specification, 0.95);
    life.per_lot.iter().map(|life| words::outcome(life.outcome)).collect()
}
