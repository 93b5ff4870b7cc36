//! The whole history, newest first, and one act with the records it changed.

use askama::Template;

use super::page::Shell;
use super::part::{TrailLine, trail_line};
use super::reply::{Outcome, page};
use super::route::{Route, get};
use super::show;
use super::visit::Visit;
use crate::domain::failure::Failure;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::parts_that_differ;
use crate::store;
use crate::store::trail::ChangeLine;

pub const ROUTES: &[Route] =
    &[get("/history", history), get("/history/{act}", act), get("/history/of/{kind}/{id}", of_record)];

const PAGE: i64 = 50;

#[derive(Template)]
#[template(path = "history/list.html")]
struct HistoryPage {
    shell: Shell,
    lines: Vec<TrailLine>,
    /// What is under the heading.
    lead: String,
    /// Path of the next page.
    older: Option<String>,
    head: String,
}

const LEAD: &str =
    "Every act, newest first. No entry can be changed or removed, also not by the program itself.";

fn history(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let (found, head) = visit
        .read(|reader| Ok((store::trail::before(reader, before, PAGE)?, store::trail::head(reader)?)))?;
    let last = found.last().map(|line| line.act).filter(|act| *act > 1 && found.len() == PAGE as usize);
    let older = last.map(|act| format!("/history?before={act}"));
    let lines = found.iter().map(|line| trail_line(line, visit.at.zone)).collect();
    let head = head.map(|(act, digest)| format!("{act} · {}", show::digest(&digest))).unwrap_or_default();
    page(&HistoryPage { shell: Shell::of(visit, "History"), lines, lead: LEAD.to_string(), older, head })
}

/// The whole history of one record, newest first.
fn of_record(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let kind = Kind::from_code(visit.param("kind")?);
    let subject = Subject::new(kind.ok_or_else(|| Failure::missing("record"))?, visit.id("id")?);
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let (mut found, name) = visit.read(|reader| {
        Ok((
            store::trail::of_subject_before(reader, subject, before, PAGE + 1)?,
            store::trail::name_of(reader, subject)?,
        ))
    })?;
    if found.is_empty() {
        return Err(Failure::missing("history of this record"));
    }
    let has_older = found.len() as i64 > PAGE;
    found.truncate(PAGE as usize);
    let (code, words) = (subject.kind.code(), subject.kind.words());
    let last = found.last().map(|line| line.act).filter(|_| has_older);
    page(&HistoryPage {
        shell: Shell::of(visit, &format!("History of {words} {name}")).crumb("/history", "History"),
        lines: found.iter().map(|line| trail_line(line, visit.at.zone)).collect(),
        lead: format!("Every act that concerns this {words}, newest first."),
        older: last.map(|act| format!("/history/of/{code}/{}?before={act}", subject.id)),
        head: String::new(),
    })
}

#[derive(Template)]
#[template(path = "history/act.html")]
struct ActPage {
    shell: Shell,
    line: TrailLine,
    digest: String,
    changes: Vec<ChangeView>,
}

/// A changed record: its fields as was and is.
struct ChangeView {
    record: String,
    row: i64,
    kind: String,
    digest: String,
    fields: Vec<(String, String, String)>,
}

impl ChangeView {
    fn of(line: ChangeLine) -> ChangeView {
        let fields = line.changes.as_deref().map(fields).unwrap_or_default();
        let digest = line.digest.chars().take(16).collect();
        ChangeView { record: line.record.replace('_', " "), row: line.row, kind: line.kind, digest, fields }
    }
}

/// Field, was and is of each changed field, as the trail keeps them.
fn fields(text: &str) -> Vec<(String, String, String)> {
    let Ok(serde_json::Value::Object(fields)) = serde_json::from_str(text) else { return Vec::new() };
    let words = |value: Option<&serde_json::Value>| match value {
        None | Some(serde_json::Value::Null) => "nothing".to_string(),
        Some(serde_json::Value::String(text)) => text.clone(),
        Some(other) => other.to_string(),
    };
    fields
        .into_iter()
        .flat_map(|(name, pair)| {
            let (was, is) = (words(pair.get(0)), words(pair.get(1)));
            match parts_that_differ(&was, &is) {
                // A version's document: only the places that differ, not the whole text twice.
                Some(parts) if was.starts_with('{') => parts,
                _ => vec![(name.replace('_', " "), was, is)],
            }
        })
        .collect()
}

fn act(visit: &Visit) -> Outcome {
    let number = visit.id("act")?;
    let (found, changes) = visit
        .read(|reader| Ok((store::trail::act(reader, number)?, store::trail::changes_of(reader, number)?)))?;
    let digest = show::digest(&found.digest);
    let line = trail_line(&found, visit.at.zone);
    let shell = Shell::of(visit, &format!("Entry {number}")).crumb("/history", "History");
    let changes = changes.into_iter().map(ChangeView::of).collect();
    page(&ActPage { shell, line, digest, changes })
}
