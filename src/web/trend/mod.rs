//! The trend: verdicts as pages show them, how each was judged, and what people decide about the history.

mod alike;
mod home;
mod remark;
mod test;

use askama::Template;
use rust_decimal::Decimal;

use super::route::{Route, get, post};
use super::table::{Cell, Table};
use crate::domain::act::Act;
use crate::domain::judgement::flag_kind;
use crate::store::trend::tally::Standout;
use crate::store::trend::verdict::Verdict;

pub const ROUTES: &[Route] = &[
    get("/trend", home::home),
    get("/trend/alike", alike::list),
    post("/trend/alike", &[Act::DeclareAlike], alike::declare),
    get("/trend/tests/{id}", test::one),
    post("/trend/tests/{id}/history", &[Act::LeaveOutOfTrend], test::leave_out),
];

/// The verdicts on the newest results of a sample, as a table.
pub fn table(verdicts: &[Verdict]) -> Table {
    let heads = ["Test", "Verdict", "What it says"];
    let empty = "No result has been judged yet. Verdicts are given when a test of a taken pull is completed.";
    Table::new("Of the newest results", &heads, empty).rows(verdicts.iter().map(|one| {
        let part = if one.component.is_empty() { String::new() } else { format!(", {}", one.component) };
        vec![
            Cell::link(format!("/trend/tests/{}", one.sample_test), format!("{}{part}", one.title)),
            Cell::text(format!("{} ({})", words(&one.verdict), one.rule)),
            Cell::text(&one.sentence),
        ]
    }))
}

/// An early warning as the lot's page tells it: where it was judged, test and place, what it says.
pub fn warning(one: Standout) -> (String, String, String) {
    let part = if one.component.is_empty() { String::new() } else { format!(", {}", one.component) };
    let path = format!("/trend/tests/{}", one.sample_test);
    (path, format!("{}{part}, {}:", one.title, one.place), one.sentence)
}

/// One verdict in a list.
#[derive(Clone, Debug)]
pub struct Line {
    pub slug: String,
    pub verdict: String,
    pub component: String,
    pub sentence: String,
    pub sealed: String,
    pub is_raised: bool,
}

/// The verdicts on a test's newest result: at the bench, in review, with the pull.
#[derive(Clone, Debug, Default, Template)]
#[template(path = "part/trend.html")]
pub struct TrendPart {
    pub lines: Vec<Line>,
    pub more: Option<String>,
}

impl askama::filters::HtmlSafe for TrendPart {}

impl TrendPart {
    /// Of the newest version; `verdicts` are of one test, the newest first.
    pub fn of(verdicts: &[Verdict]) -> TrendPart {
        let newest = verdicts.iter().map(|one| one.version).max();
        let lines: Vec<Line> = verdicts.iter().filter(|one| Some(one.version) == newest).map(line).collect();
        let more = verdicts.first().map(|one| format!("/trend/tests/{}", one.sample_test));
        TrendPart { lines, more }
    }
}

fn line(one: &Verdict) -> Line {
    Line {
        slug: slug(&one.verdict).to_string(),
        verdict: words(&one.verdict),
        component: one.component.clone(),
        sentence: one.sentence.clone(),
        sealed: detail(one)["sealed"].as_str().unwrap_or_default().to_string(),
        is_raised: is_raised(&one.verdict),
    }
}

/// Whether a verdict asks to be looked at.
fn is_raised(verdict: &str) -> bool {
    ["alert", "action", "likely", "very likely"].contains(&verdict)
}

/// "Alert", "Early warning, likely".
fn words(verdict: &str) -> String {
    match verdict {
        "likely" | "very likely" => format!("Early warning, {verdict}"),
        "no warning" => "No early warning".to_string(),
        other => super::failure::capital(other),
    }
}

/// The class of a verdict.
fn slug(verdict: &str) -> &'static str {
    match verdict {
        "action" | "very likely" => "action",
        "alert" | "likely" => "alert",
        "not evaluable" => "not-evaluable",
        _ => "in-trend",
    }
}

fn detail(one: &Verdict) -> serde_json::Value {
    serde_json::from_str(&one.detail).unwrap_or_default()
}

/// Flags that the list of verdicts says already.
pub fn is_told_by_verdict(kind: &str) -> bool {
    [flag_kind::OUT_OF_TREND, flag_kind::LOT_TREND, flag_kind::EARLY_WARNING, flag_kind::NOT_EVALUABLE]
        .contains(&kind)
}

/// The bands of a sample's verdicts, for its charts: test, component, lower and upper.
pub fn bands(verdicts: &[Verdict]) -> Vec<(i64, String, Decimal, Decimal)> {
    let exact = |text: &str| Decimal::from_str_exact(&cut(text)).ok();
    verdicts
        .iter()
        .filter_map(|one| {
            let [lower, _, upper, _, _] = one.band.as_ref()?;
            Some((one.sample_test, one.component.clone(), exact(lower)?, exact(upper)?))
        })
        .collect()
}

/// A stored number with no more digits than an exact decimal holds.
fn cut(text: &str) -> String {
    text.chars().take(20).collect()
}
