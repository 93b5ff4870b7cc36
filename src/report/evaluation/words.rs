//! Sentences and numbers of an evaluation.

use super::About;
use crate::domain::evaluation::assess::Assessment;
use crate::domain::evaluation::container::ContainerBounds;
use crate::domain::evaluation::record::{Group, SCALES};
use crate::domain::evaluation::series::Series;
use crate::domain::evaluation::table::Qualifier;
use crate::domain::specification::range_words;
use crate::science::pooling::Model;
use crate::science::shelf_life::{Direction, Outcome, Side};

/// Five figures; very small and very large numbers with a power of ten.
pub fn number(value: f64) -> String {
    let size = value.abs();
    if value == 0.0 {
        return "0".to_string();
    }
    if !(1e-4..1e7).contains(&size) {
        return format!("{value:.4e}");
    }
    let decimals = (4 - size.log10().floor() as i32).clamp(0, 8) as usize;
    format!("{value:.decimals$}")
}

/// A probability to four decimals, never "0.0000".
pub fn probability(p: f64) -> String {
    if p < 0.00005 { "below 0.0001".to_string() } else { format!("{p:.4}") }
}

/// Months without needless decimals: 12, 11.93.
pub fn months(value: f64) -> String {
    let text = format!("{value:.2}");
    text.trim_end_matches('0').trim_end_matches('.').to_string()
}

pub fn model(model: Model) -> &'static str {
    match model {
        Model::SeparateLines => "a line for each lot",
        Model::CommonSlope => "one slope, own intercepts",
        Model::CommonLine => "one line for all lots",
    }
}

pub fn side(side: Side) -> &'static str {
    match side {
        Side::Lower => "lower limit",
        Side::Upper => "upper limit",
    }
}

pub fn scale(found: &Assessment) -> &'static str {
    let scale = found.series.scale;
    SCALES.iter().find(|(_, known, _)| *known == scale).map_or("as it is", |(_, _, words)| *words)
}

/// The outcome of one lot or bound: exact, four decimals.
pub fn outcome(outcome: Outcome) -> String {
    match outcome {
        Outcome::Crosses(months) => format!("{months:.4}"),
        Outcome::NoCrossing => "never".to_string(),
        Outcome::FailsAtZero => "fails at time zero".to_string(),
        Outcome::NotEstimable => "not estimable".to_string(),
        Outcome::NoLimit => "no limit".to_string(),
    }
}

/// Whether no shelf life can be estimated at all.
pub fn is_not_estimable(found: &Assessment) -> bool {
    found.life.outcome == Outcome::NotEstimable
}

/// What is missing where nothing can be estimated: never a silent blank.
pub fn needs(found: &Assessment) -> String {
    let series = &found.series;
    if series.lots.is_empty() {
        return "needs results: none takes part yet".to_string();
    }
    if found.pooling.is_none() && bounds(series) > 0 {
        return "too many results are known only as bounds for a line".to_string();
    }
    let ages = series.lots.iter().map(|lot| lot.pulls.len()).max().unwrap_or(0);
    match 3_usize.saturating_sub(ages) {
        0 => "needs one more age of a lot".to_string(),
        1 => "needs one more age".to_string(),
        2 => "needs two more ages".to_string(),
        more => format!("needs {more} more ages"),
    }
}

fn bounds(series: &Series) -> usize {
    let results = series.lots.iter().flat_map(|lot| &lot.pulls).flat_map(|pull| &pull.results);
    results.filter(|result| result.qualifier != Qualifier::Exact).count()
}

/// The shelf life in a list: "30 months", "not evaluable: needs two more ages".
pub fn life_short(found: &Assessment) -> String {
    let whole = found.life.months_floor.unwrap_or_default();
    match found.life.outcome {
        Outcome::Crosses(_) if whole == 1 => "1 month".to_string(),
        Outcome::Crosses(_) => format!("{whole} months"),
        Outcome::NoCrossing => "the bound never meets the limit".to_string(),
        Outcome::FailsAtZero => "fails at time zero".to_string(),
        Outcome::NotEstimable => format!("not evaluable: {}", needs(found)),
        Outcome::NoLimit => "no shelf-life limit".to_string(),
    }
}

/// The shelf life in full: floored, exact, side and lot that bind.
pub fn life(found: &Assessment) -> String {
    let Outcome::Crosses(exact) = found.life.outcome else { return life_short(found) };
    let lot = found.life.binding_lot.map(|lot| format!(", lot {}", found.series.lots[lot].name));
    let side = found.life.side.map(|one| format!("; the {} binds", side(one))).unwrap_or_default();
    format!("{}, exactly {exact:.4} months{side}{}", life_short(found), lot.unwrap_or_default())
}

/// The finding of the page in a sentence.
pub fn lead(group: &Group, found: &Assessment, covered: Option<f64>) -> String {
    let lots = match found.series.lots.len() {
        1 => "the one lot there is".to_string(),
        count => format!("{count} lots"),
    };
    let how = found.pooling.as_ref().map(|pooling| model(pooling.model)).unwrap_or_default();
    let mut text = match found.life.outcome {
        Outcome::Crosses(_) => format!("The data support {} ({lots}, {how}).", life_short(found)),
        Outcome::NoCrossing => {
            format!("The confidence limit of the mean never meets its limit ({lots}, {how}).")
        }
        Outcome::FailsAtZero => format!("The limit is not supported at time zero ({lots}, {how})."),
        Outcome::NotEstimable => format!("Not evaluable: {}.", needs(found)),
        Outcome::NoLimit => format!("No shelf-life limit is set, so there is no shelf life ({lots})."),
    };
    let is_long_term = group.is_labelled || group.condition_use.starts_with("long-term");
    if let (true, Some(covered)) = (is_long_term && found.life.outcome != Outcome::NotEstimable, covered) {
        let most = (2.0 * covered).min(covered + 12.0).floor();
        text.push_str(&format!(
            " With {} months of data on every lot never more than {most} months may be proposed, \
             less by the answers to the tree.",
            months(covered)
        ));
    }
    text
}

/// The chosen model and why.
pub fn why(found: &Assessment) -> String {
    let Some(pooling) = &found.pooling else {
        return "no line is drawn, so no model".to_string();
    };
    let level = months(pooling.alpha);
    let chosen = model(pooling.model);
    if found.series.lots.len() == 1 {
        return "one lot, one line".to_string();
    }
    let Some(slopes) = pooling.slopes else {
        return format!("{chosen}: the slopes cannot be compared yet, so the lots are not pooled");
    };
    let p = probability(slopes.p);
    match (pooling.model, pooling.intercepts) {
        (Model::SeparateLines, _) => {
            format!(
                "{chosen}: the slopes differ (p {p}, below the level {level}), so the lots are not pooled"
            )
        }
        (Model::CommonSlope, Some(test)) => format!(
            "{chosen}: the slopes do not differ (p {p}), the intercepts do (p {}, below the level {level})",
            probability(test.p)
        ),
        (Model::CommonLine, Some(test)) => format!(
            "{chosen}: neither slopes (p {p}) nor intercepts (p {}) differ at the level {level}",
            probability(test.p)
        ),
        (_, None) => chosen.to_string(),
    }
}

pub fn limit(about: &About<'_>) -> String {
    let series = &about.found.series;
    if series.lower_limit.is_none() && series.upper_limit.is_none() {
        return "no shelf-life limit".to_string();
    }
    let range = range_words(series.lower_limit, series.upper_limit);
    format!("{range} {}, {}", series.unit, about.specification)
}

/// t and ν of the bound, in words.
pub fn quantile(found: &Assessment) -> Option<String> {
    let lot = found.life.binding_lot.unwrap_or(0);
    let life = found.life.per_lot.get(lot)?;
    let how = match found.specification.direction {
        Direction::Either => "two-sided 95 %",
        _ => "one-sided 95 %",
    };
    Some(format!("{how} of the mean, t = {} with {} degrees of freedom", number(life.t?), life.df))
}

pub fn mean_crossing(found: &Assessment) -> Option<String> {
    let lot = found.life.binding_lot.unwrap_or(0);
    let at = found.life.per_lot.get(lot)?.mean_line_crossing?;
    Some(format!("meets the limit at {at:.2} months; the shelf life is never read from it"))
}

/// The bounds for one container.
pub fn container(found: &Assessment, bounds: &ContainerBounds) -> String {
    let lot = bounds.lot.filter(|_| bounds.prediction.months().is_some());
    let lot = lot.map(|lot| format!(" (lot {})", found.series.lots[lot].name)).unwrap_or_default();
    format!(
        "where the limit holds for each container: one more result stays inside to {}{lot} (95 % \
         prediction); 95 % of all containers stay inside to {} (95 % confidence)",
        until(bounds.prediction),
        until(bounds.tolerance)
    )
}

fn until(outcome: Outcome) -> String {
    match outcome {
        Outcome::Crosses(months) => format!("{months:.2} months"),
        Outcome::NoCrossing => "any age".to_string(),
        Outcome::FailsAtZero => "no age: not at time zero".to_string(),
        Outcome::NotEstimable | Outcome::NoLimit => "an age that cannot be estimated".to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_keep_five_figures_and_small_probabilities_are_said_so() {
        for (value, words) in [
            (0.0, "0"),
            (30.43712, "30.437"),
            (-0.187778, "-0.18778"),
            (1025.4, "1025.4"),
            (2.4e-9, "2.4000e-9"),
            (12345678.0, "1.2346e7"),
        ] {
            assert_eq!(number(value), words);
        }
        assert_eq!(probability(0.00001), "below 0.0001");
        assert_eq!(probability(0.6994174), "0.6994");
        assert_eq!((months(12.0), months(11.926)), ("12".to_string(), "11.93".to_string()));
    }
}
