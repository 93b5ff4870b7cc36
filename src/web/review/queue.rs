//! The queue of the QA reviewer in three parts, exceptions named in the row.

use askama::Template;

use crate::domain::act::Act;
use crate::domain::check::{TestState, state};
use crate::domain::moment::{date_shown, until_shown};
use crate::domain::review::{Part, SampleState};
use crate::domain::status::Status;
use crate::store;
use crate::store::review::facts::ReviewSample;
use crate::web::page::Shell;
use crate::web::part::StatusMark;
use crate::web::reply::{Outcome, page};
use crate::web::show;
use crate::web::visit::Visit;

#[derive(Template)]
#[template(path = "review/queue.html")]
struct QueuePage {
    shell: Shell,
    lead: String,
    parts: Vec<PartView>,
    is_empty: bool,
    to_check: usize,
    agreed: usize,
    may_sign: bool,
}

struct PartView {
    id: &'static str,
    heading: String,
    empty: &'static str,
    rows: Vec<Row>,
}

struct Row {
    path: String,
    title: String,
    number: String,
    exceptions: Vec<String>,
    window: String,
    status: StatusMark,
    note: String,
}

pub fn queue(visit: &Visit) -> Outcome {
    let account = visit.actor()?.account;
    let (samples, to_check, agreed) = visit.read(|reader| {
        let ids = store::review::facts::open_ids(reader)?;
        Ok((
            store::review::facts::many(reader, &ids)?,
            store::review::facts::ids_to_check(reader)?.len(),
            store::review::decision::agreed_by(reader, account)?.len(),
        ))
    })?;
    let parts: Vec<PartView> = [Part::WithExceptions, Part::WithoutExceptions, Part::WaitingForOthers]
        .into_iter()
        .map(|part| part_view(visit, part, &samples))
        .collect();
    let counts: Vec<usize> = parts.iter().map(|part| part.rows.len()).collect();
    let page_data = QueuePage {
        shell: Shell::of(visit, "Review"),
        lead: lead(&counts),
        is_empty: counts.iter().all(|count| *count == 0),
        parts,
        to_check,
        agreed,
        may_sign: visit.may(Act::SignPulls),
    };
    page(&page_data)
}

fn lead(counts: &[usize]) -> String {
    let [with, without, others] = counts else { return String::new() };
    format!(
        "{} with exceptions, {without} without, {others} waiting for others.",
        show::counted(*with, "sample", "samples")
    )
}

fn part_view(visit: &Visit, part: Part, samples: &[ReviewSample]) -> PartView {
    let mut found: Vec<&ReviewSample> =
        samples.iter().filter(|sample| sample.facts.part() == Some(part)).collect();
    found.sort_by_key(|sample| {
        (sample.head.window_end().is_none(), sample.head.window_end(), sample.head.sample)
    });
    let (id, name, empty) = match part {
        Part::WithExceptions => ("with-exceptions", "With exceptions", "No sample with an exception waits."),
        Part::WithoutExceptions => {
            ("without-exceptions", "Without exceptions", "No sample without an exception waits.")
        }
        Part::WaitingForOthers => {
            ("waiting-for-others", "Waiting for others", "Nothing is in the laboratory’s hands.")
        }
    };
    let rows: Vec<Row> = found.into_iter().map(|sample| row(visit, sample)).collect();
    PartView { id, heading: format!("{name} ({})", rows.len()), empty, rows }
}

fn row(visit: &Visit, sample: &ReviewSample) -> Row {
    let window = sample.head.window_end().map(|day| {
        let left = if sample.head.latest_on.is_some() && sample.head.taken_on.is_none() {
            format!(", {}", until_shown(visit.at.date(), day))
        } else {
            String::new()
        };
        format!("{}{left}", date_shown(day))
    });
    Row {
        path: format!("/review/{}", sample.head.sample),
        title: sample.head.title(),
        number: sample.head.number.clone(),
        exceptions: sample.facts.exceptions.iter().map(|one| one.sentence.clone()).collect(),
        window: window.unwrap_or_else(|| "no date".to_string()),
        status: StatusMark::of(status(sample)),
        note: note(sample),
    }
}

/// The status word of a sample on its way through review.
pub fn status(sample: &ReviewSample) -> Status {
    match sample.facts.state() {
        SampleState::InWork if sample.facts.tests.iter().any(|test| state(test) == TestState::SentBack) => {
            Status::SentBack
        }
        SampleState::InWork => Status::InProgress,
        SampleState::WaitingForCheck => Status::WaitingForCheck,
        SampleState::Signed | SampleState::Imported => Status::Signed,
        SampleState::WaitingForReview | SampleState::ChangedAfterSigning => Status::WaitingForReview,
    }
}

/// What is still out: "2 of 7 tests are not in yet".
fn note(sample: &ReviewSample) -> String {
    let tests = &sample.facts.tests;
    let open =
        tests.iter().filter(|test| matches!(state(test), TestState::Open | TestState::SentBack)).count();
    let unchecked = tests.iter().filter(|test| state(test) == TestState::WaitingForCheck).count();
    let of = show::counted(tests.len(), "test", "tests");
    let mut notes = Vec::new();
    if open > 0 {
        notes.push(format!("{open} of {of} not in yet"));
    }
    if unchecked > 0 {
        notes.push(format!("{unchecked} of {of} not checked yet"));
    }
    if sample.facts.state() == SampleState::ChangedAfterSigning {
        notes.push("changed after signing".to_string());
    }
    notes.join(", ")
}
