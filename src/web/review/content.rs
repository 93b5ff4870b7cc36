//! The contents of a sample as review and check show them: results, readings, corrections.

use chrono_tz::Tz;

use crate::domain::reading::{Question, interval_words, shown};
use crate::store::review::page::{CheckLine, ReadingLine, ResultLine};
use crate::web::show;
use crate::web::trend::TrendPart;

/// One test with its latest results and all its readings.
#[derive(Clone, Debug)]
pub struct TestBlock {
    pub id: i64,
    pub title: String,
    pub method: String,
    pub results: Vec<ResultRow>,
    pub readings: Vec<ReadingRow>,
    /// "Completed by …", "Checked by …", "Sent back by …, because …", oldest first.
    pub steps: Vec<String>,
    pub trend: TrendPart,
}

/// A result with its limit, as every page prints it (screen_U104).
#[derive(Clone, Debug)]
pub struct ResultRow {
    pub component: String,
    pub shown: String,
    pub limit: String,
    pub verdict: String,
    pub is_out: bool,
    /// Points to the side of the limit that was passed.
    pub arrow: &'static str,
    pub calculation: String,
}

#[derive(Clone, Debug)]
pub struct ReadingRow {
    pub place: String,
    pub field: String,
    pub shown: String,
    pub instrument: String,
    pub questions: String,
    pub by: String,
    pub at: String,
    pub note: String,
}

/// A corrected value: was → is, who, when, why.
#[derive(Clone, Debug)]
pub struct Correction {
    pub test: String,
    pub place: String,
    pub was: String,
    pub is: String,
    pub why: String,
    pub by: String,
    pub at: String,
}

/// `container TW-12, reading 2`.
fn place(line: &ReadingLine) -> String {
    let reading = format!("reading {}", line.replicate);
    if line.container.is_empty() { reading } else { format!("{}, {reading}", line.container) }
}

/// `sediment_ml@30` becomes `sediment mL, 30 min`.
pub fn field_words(field: &str) -> String {
    let (name, minute) = field.split_once('@').unwrap_or((field, ""));
    let words = name.replace("_ml", " mL").replace("_mm", " mm").replace("_c", " °C");
    let words = words.replace("_percent", " %").replace("_rpm", " rpm").replace("_minutes", " min");
    let words = words.replace('_', " ");
    match minute {
        "" => words,
        minute if name == "unspecified" => format!("unspecified at relative retention {minute}"),
        minute => format!("{words}, {minute} min"),
    }
}

fn questions(line: &ReadingLine) -> String {
    let asked: Vec<Question> =
        line.hints.as_deref().and_then(|json| serde_json::from_str(json).ok()).unwrap_or_default();
    let sentences: Vec<String> = asked.into_iter().map(|question| question.sentence).collect();
    match (sentences.is_empty(), line.hint_answer.as_deref()) {
        (true, _) => String::new(),
        (false, Some(answer)) => format!("{} ({answer})", sentences.join(" ")),
        (false, None) => sentences.join(" "),
    }
}

fn reading_row(line: &ReadingLine, zone: Tz) -> ReadingRow {
    let mut notes = Vec::new();
    if !line.is_standing {
        notes.push("replaced by a later row".to_string());
    }
    if let Some(at) = &line.read_at {
        notes.push(format!("read at {}", show::instant(at, zone)));
    }
    if let Some(at) = &line.due_at {
        notes.push(format!("due {}", show::instant(at, zone)));
    }
    notes.extend(line.inspected_every.and_then(|every| interval_words(&line.typed, every)));
    ReadingRow {
        place: place(line),
        field: field_words(&line.field),
        shown: shown(&line.qualifier, &line.typed),
        instrument: line.instrument.clone(),
        questions: questions(line),
        by: line.by.clone(),
        at: show::instant(&line.at, zone),
        note: notes.join(", "),
    }
}

/// The corrections among the readings, in their order.
pub fn corrections(results: &[ResultLine], readings: &[ReadingLine], zone: Tz) -> Vec<Correction> {
    let title =
        |id: i64| results.iter().find(|result| result.sample_test == id).map(|found| found.title.clone());
    readings
        .iter()
        .filter_map(|line| {
            let (was, qualifier) = line.was.as_ref()?;
            Some(Correction {
                test: title(line.sample_test).unwrap_or_default(),
                place: format!("{}, {}", field_words(&line.field), place(line)),
                was: shown(qualifier, was),
                is: shown(&line.qualifier, &line.typed),
                why: line.reason.clone().unwrap_or_default(),
                by: line.by.clone(),
                at: show::instant(&line.at, zone),
            })
        })
        .collect()
}

/// The tests in bench order. `limit` says the limit of a test and component in words.
pub fn tests(
    results: &[ResultLine],
    readings: &[ReadingLine],
    checks: &[CheckLine],
    limit: &dyn Fn(&str, &str) -> String,
    zone: Tz,
) -> Vec<TestBlock> {
    let mut blocks: Vec<TestBlock> = Vec::new();
    for result in results {
        if !blocks.iter().any(|block| block.id == result.sample_test) {
            blocks.push(TestBlock {
                id: result.sample_test,
                title: result.title.clone(),
                method: result.method.clone(),
                results: Vec::new(),
                readings: readings
                    .iter()
                    .filter(|line| line.sample_test == result.sample_test)
                    .map(|line| reading_row(line, zone))
                    .collect(),
                steps: Vec::new(),
                trend: TrendPart::default(),
            });
        }
        let Some(block) = blocks.last_mut() else { continue };
        if result.is_latest {
            block.results.push(result_row(result, limit));
        }
        let step = completed(result, zone);
        if block.steps.last() != Some(&step) {
            block.steps.push(step);
        }
    }
    for block in &mut blocks {
        let own = checks.iter().filter(|check| check.sample_test == block.id);
        block.steps.extend(own.map(|check| checked(check, zone)));
    }
    blocks
}

fn result_row(result: &ResultLine, limit: &dyn Fn(&str, &str) -> String) -> ResultRow {
    ResultRow {
        component: result.component.clone(),
        shown: show::with_unit(&result.shown, if result.value.is_some() { &result.unit } else { "" }),
        limit: graded_limit(result).unwrap_or_else(|| limit(&result.test, &result.component)),
        arrow: arrow(result, &limit(&result.test, &result.component)),
        verdict: result.verdict.clone(),
        is_out: result.verdict == "out of specification" || result.verdict == "outside in-use limit",
        calculation: calculation(&result.detail),
    }
}

/// The grades that conform in words and of this part alone, as the judgement wrote them down.
fn graded_limit(result: &ResultLine) -> Option<String> {
    if result.qualifier != "words" {
        return None;
    }
    let detail: serde_json::Value = serde_json::from_str(&result.detail).ok()?;
    Some(detail.get("limit")?.as_str()?.to_string())
}

/// Down where the value lies below the lower end that the limit's words begin with.
fn arrow(result: &ResultLine, limit: &str) -> &'static str {
    let lower = limit.trim_start_matches("at least ").split(" to ").next();
    let lower = lower.and_then(|text| rust_decimal::Decimal::from_str_exact(text).ok());
    if result.value.zip(lower).is_some_and(|(value, lower)| value < lower) { "▼" } else { "▲" }
}

/// The judgement's own numbers in reading order: "mean 6.825 · range 0.03".
fn calculation(detail: &str) -> String {
    let Ok(serde_json::Value::Object(fields)) = serde_json::from_str(detail) else { return String::new() };
    let words = |value: &serde_json::Value| match value {
        serde_json::Value::String(text) => Some(text.clone()),
        serde_json::Value::Number(number) => Some(number.to_string()),
        serde_json::Value::Bool(is) => Some(if *is { "yes" } else { "no" }.to_string()),
        serde_json::Value::Array(values) => {
            let texts: Option<Vec<&str>> = values.iter().map(|value| value.as_str()).collect();
            texts.map(|texts| texts.join(", ")).filter(|text| !text.is_empty())
        }
        _ => None,
    };
    let parts: Vec<String> = fields
        .iter()
        .filter_map(|(name, value)| Some(format!("{} {}", name.replace('_', " "), words(value)?)))
        .collect();
    parts.join(" · ")
}

fn completed(result: &ResultLine, zone: Tz) -> String {
    let at = show::instant(&result.at, zone);
    match (result.is_correction, result.version) {
        (true, version) => format!("Version {version} by correction of {}, {at}", result.by),
        (false, 1) => format!("Completed by {}, {at}", result.by),
        (false, version) => format!("Version {version} completed by {}, {at}", result.by),
    }
}

fn checked(check: &CheckLine, zone: Tz) -> String {
    let at = show::instant(&check.at, zone);
    let why = check.why.as_deref().map(|why| format!(", because {why}")).unwrap_or_default();
    let what = if check.is_checked { "checked" } else { "sent back" };
    format!("Version {} {what} by {}, {at}{why}", check.version, check.by)
}

/// The limit of a test and component in words, by the sample's own limit set.
pub fn limit_words(
    specification: Option<&crate::domain::specification::SpecificationContent>,
    set: Option<crate::domain::specification::LimitSet>,
    test: &str,
    component: &str,
) -> String {
    use crate::domain::specification::{Limit, range_words};
    let found = specification.and_then(|content| content.of(test)).zip(set);
    let Some((limits, set)) = found else { return "no limit".to_string() };
    match limits.limit(set) {
        Limit::None => "no limit".to_string(),
        Limit::Between { lower, upper } => range_words(*lower, *upper),
        Limit::Grades(grades) => {
            let one = |(code, good): &(String, Vec<String>)| format!("{code}: {}", good.join(" or "));
            grades.iter().map(one).collect::<Vec<_>>().join("; ")
        }
        Limit::Components(ranges) => {
            let key = if component.starts_with("unspecified") { "unspecified" } else { component };
            let range = ranges.iter().find(|(code, _)| code == key).map(|(_, range)| range);
            range.map_or("no limit".to_string(), |range| range_words(range.lower, range.upper))
        }
    }
}
