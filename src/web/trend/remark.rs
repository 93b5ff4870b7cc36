//! What stands beside a verdict: the published rules, the weights, the screen of the history, what came after the
//! sealing.

use serde_json::Value;

use super::detail;
use crate::domain::trend::words::probability;
use crate::store::trend::forecast::Sealed;
use crate::store::trend::verdict::Verdict;
use crate::web::table::{Cell, Table};

/// The component, or the result as a whole.
pub(super) fn component_words(component: &str) -> String {
    if component.is_empty() { "the result".to_string() } else { component.to_string() }
}

/// The newest verdicts on results.
fn judged(verdicts: &[Verdict]) -> impl Iterator<Item = &Verdict> {
    let newest = verdicts.first().map(|one| one.version);
    verdicts.iter().filter(move |one| Some(one.version) == newest && matches!(one.rule.as_str(), "H" | "A"))
}

fn rule_words(letter: &str) -> &'static str {
    match letter {
        "A" => "A, within the lot",
        "B" => "B, by time point",
        "C" => "C, chart of slopes",
        "D" => "D, common slope and own level",
        _ => "E, lines of the history",
    }
}

pub(super) fn context_table(verdicts: &[Verdict]) -> Table {
    let heads = ["Published rule", "Of", "p#"];
    let empty = "The published rules A to E stand here beside a verdict that could be given.";
    let mut rows = Vec::new();
    for one in judged(verdicts) {
        let detail = detail(one);
        for rule in detail["context"].as_array().into_iter().flatten() {
            let p = rule["p"].as_f64().map(|p| probability(p).trim_start_matches("p ").to_string());
            let needs = rule["needs"].as_str().unwrap_or("none").to_string();
            rows.push(vec![
                Cell::text(rule_words(rule["rule"].as_str().unwrap_or_default())),
                Cell::text(component_words(&one.component)),
                Cell::number_or_missing(p, &needs),
            ]);
        }
    }
    Table::new("Context, never the verdict: run together they alarm more often than one rule", &heads, empty)
        .rows(rows)
}

pub(super) fn remarks(verdicts: &[Verdict], sealed: &[Sealed]) -> Vec<String> {
    let mut said: Vec<String> = judged(verdicts).flat_map(|one| remarks_of(sealed, one)).collect();
    if said.is_empty() {
        said.push("Nothing more.".to_string());
    }
    said
}

fn remarks_of(sealed: &[Sealed], one: &Verdict) -> Vec<String> {
    let detail = detail(one);
    let mut said = vec![format!("Judged on the scale: {}.", detail["scale"].as_str().unwrap_or_default())];
    let percent = |value: &Value| value.as_f64().map(|share| format!("{:.0} %", 100.0 * share));
    if let (Some(levels), Some(slopes)) = (percent(&detail["levels_equal"]), percent(&detail["slopes_equal"]))
    {
        said.push(format!("Lots start equal with a weight of {levels}, age equally with {slopes}."));
    }
    if detail["unusual_lots"].as_bool() == Some(true) {
        said.push("Lot differences lie far outside the usual range.".to_string());
    }
    let screen = &detail["screen"];
    for found in screen["results"].as_array().into_iter().flatten() {
        said.push(format!(
            "A result of the history stands out: lot {} at {:.1} months ({}). Without such results this one would \
             be {}. It counts until a person leaves it out.",
            found["lot"].as_str().unwrap_or_default(),
            found["months"].as_f64().unwrap_or_default(),
            probability(found["p"].as_f64().unwrap_or(1.0)),
            screen["without"].as_str().unwrap_or_default(),
        ));
    }
    let count = |name: &str| detail[name].as_u64().unwrap_or_default();
    let (came, gone) = (count("came_after_sealing"), count("gone_since_sealing"));
    if came + gone > 0 {
        said.push(after_sealing(sealed, one, came, gone));
    }
    said
}

/// Results that came after the forecast was sealed entered the verdict; both are shown.
fn after_sealing(sealed: &[Sealed], one: &Verdict, came: u64, gone: u64) -> String {
    let was_inside = sealed
        .iter()
        .find(|sealed| sealed.component == one.component)
        .and_then(|sealed| sealed.forecast.band)
        .zip(detail(one)["value"].as_str().and_then(|text| text.parse::<f64>().ok()))
        .map(|(band, value)| value >= band.lower && value <= band.upper);
    let sealed = match was_inside {
        Some(true) => " By the sealed forecast it lies within the alert limits.",
        Some(false) => " By the sealed forecast it lies outside the alert limits.",
        None => "",
    };
    let results = |count: u64, words: &str| match count {
        0 => String::new(),
        1 => format!(" 1 result {words}."),
        many => format!(" {many} results {words}."),
    };
    format!(
        "The history has changed since the forecast was sealed; the verdict uses it as it is now.{}{}{sealed}",
        results(came, "came after it"),
        results(gone, "left it")
    )
}
