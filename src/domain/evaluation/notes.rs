//! Notes beside a computed series: everything a reader should know before trusting it.

use rust_decimal::Decimal;

use super::series::Series;
use super::{Choices, Replicates};
use crate::science::diagnostics;
use crate::science::pooling::{Model, Pooling, Residuals};
use crate::science::regression::Point;
use crate::science::shelf_life::{Outcome, ShelfLife};
use crate::science::transform::Scale;
use crate::science::trend::history_screen;

pub(super) fn first(series: &Series, choices: &Choices) -> Vec<String> {
    let mut notes = Vec::new();
    let results: usize = series.lots.iter().flat_map(|lot| &lot.pulls).map(|pull| pull.results.len()).sum();
    let pulls: usize = series.lots.iter().map(|lot| lot.pulls.len()).sum();
    if results > pulls {
        notes.push(match choices.replicates {
            Replicates::Mean => {
                format!("replicates of a pull are averaged: {results} results, {pulls} pulls")
            }
            Replicates::Independent => {
                format!(
                    "replicates count as independent results in the lines: {results} results of {pulls} \
                     pulls; the trend judges pull means"
                )
            }
        });
    }
    if series.scale != Scale::None {
        notes.push(
            "lines, limits and lots are on the analysis scale; back-transformed means are medians".into(),
        );
    }
    notes.extend(printed_spread(series));
    if !series.has_two_ages() {
        notes.push("needs 2 ages of one lot: no line, no shelf life".into());
    }
    notes
}

/// Standard deviations and counts of the file, shown as a range; they take no part.
fn printed_spread(series: &Series) -> Option<String> {
    let range = |texts: Vec<&str>, name: &str| {
        let mut numbers: Vec<Decimal> = texts.iter().filter_map(|text| text.parse().ok()).collect();
        numbers.sort();
        let unread =
            texts.iter().filter(|text| text.parse::<Decimal>().is_err()).map(|text| format!(", \"{text}\""));
        let (first, last) = (numbers.first()?, numbers.last()?);
        let span = if first == last { first.to_string() } else { format!("{first} to {last}") };
        Some(format!("{name} {span}{}", unread.collect::<String>()))
    };
    let column = |pick: fn(&(String, String)) -> &String| {
        series
            .printed
            .iter()
            .map(pick)
            .map(String::as_str)
            .filter(|text| !text.is_empty())
            .collect::<Vec<_>>()
    };
    let parts: Vec<String> =
        [range(column(|row| &row.0), "sd"), range(column(|row| &row.1), "n")].into_iter().flatten().collect();
    (!parts.is_empty()).then(|| format!("the file prints {}; shown, not used", parts.join(" and ")))
}

pub(super) fn of_model(series: &Series, pooling: &Pooling, life: &ShelfLife, notes: &mut Vec<String>) {
    if pooling.model_with_full_error() != pooling.model {
        notes.push("the error term of separate lines would have chosen another model (p_full_mse)".into());
    }
    let missing = |lot: &usize| life.per_lot[*lot].outcome == Outcome::NotEstimable;
    let named: Vec<&str> =
        (0..series.lots.len()).filter(missing).map(|lot| series.lots[lot].name.as_str()).collect();
    if life.partial {
        notes.push(format!("not estimable: {}; the shelf life comes from the other lots", named.join(", ")));
    }
    let residuals = residuals_of(pooling);
    if (1..3).contains(&residuals.df) && life.outcome != Outcome::NoLimit {
        notes.push(format!("only {} degrees of freedom: the limit is very wide", residuals.df));
    }
    if residuals.df > 0 && residuals.sse == 0.0 {
        notes.push(
            "the results lie exactly on their lines: the method's resolution hides the variance".into(),
        );
    }
    if life.outcome.months().is_some() && series.lots.len() < 3 {
        notes.push("ICH Q1A asks for at least 3 lots".into());
    }
    if life.outcome != Outcome::NoLimit {
        notes.push(
            "by ICH Q1E (2003); the cap beyond the long-term data (Q1E appendix A) needs a person's \
             answers and is not applied here"
                .into(),
        );
    }
}

/// The residuals of the chosen model.
fn residuals_of(pooling: &Pooling) -> Residuals {
    match pooling.model {
        Model::SeparateLines => pooling.separate_residuals,
        Model::CommonSlope => pooling.common_slope_residuals,
        Model::CommonLine => pooling.common_line_residuals,
    }
}

pub(super) fn of_data(series: &Series, slices: &[&[Point]], pooling: &Pooling, notes: &mut Vec<String>) {
    let variances: Vec<(f64, usize)> = pooling
        .own_sse()
        .iter()
        .zip(slices)
        .map(|(sse, lot)| (if *sse > pooling.floor { *sse } else { 0.0 }, lot.len().saturating_sub(2)))
        .collect();
    if let Some(p) = diagnostics::bartlett(&variances).filter(|p| *p < 0.01) {
        notes.push(format!(
            "the lots scatter differently (Bartlett, p {}): look before trusting one variance",
            probability(p)
        ));
    }
    let residuals = residuals_of(pooling);
    if let Some(fit) = diagnostics::lack_of_fit(slices, residuals.sse, residuals.df, pooling.floor) {
        notes.push(format!("lack of fit against replicates: F = {:.3}, p {}", fit.f, probability(fit.p)));
    }
    for (lot, points) in series.lots.iter().zip(slices) {
        if let Some((_, p)) = diagnostics::curvature(points).filter(|(_, p)| *p < 0.01) {
            notes.push(format!(
                "lot {} is curved (p {}): a straight line may mislead",
                lot.name,
                probability(p)
            ));
        }
    }
    for finding in history_screen::screen(slices, 0.01) {
        let Some(point) = slices[finding.lot].get(finding.result) else { continue };
        notes.push(format!(
            "lot {}: the result at {:.2} months stands out from its line (p {} over all results); it is \
             kept, only a person takes a result out",
            series.lots[finding.lot].name,
            point.x,
            probability(finding.p)
        ));
    }
}

/// Four decimals, and never "0.0000".
fn probability(p: f64) -> String {
    if p < 0.00005 { "< 0.0001".into() } else { format!("= {p:.4}") }
}
