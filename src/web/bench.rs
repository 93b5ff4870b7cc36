//! The bench: what can be done now, by sample and by session, and where each test of a sample stands.

use askama::Template;

use super::page::Shell;
use super::pairs::encoded;
use super::part::StatusMark;
use super::reply::{Outcome, page, page_with, see};
use super::route::{Route, get};
use super::show;
use super::visit::Visit;
use crate::acts::stage::{columns, tests_of};
use crate::domain::act::Act;
use crate::domain::label::{labelled, short_label};
use crate::domain::method::Stage;
use crate::domain::moment::{date_from_stored, until_shown};
use crate::domain::qualification;
use crate::domain::reading::{PullState, in_slot};
use crate::domain::slot::Slot;
use crate::domain::stage::{StageRefusal, may_read};
use crate::domain::status::Status;
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::sample::SampleLine;

pub const ROUTES: &[Route] = &[get("/bench", home).at_bench(), get("/bench/session", session).at_bench()];

/// Where a test stands, with a few words more.
pub fn standing(sample: &BenchSample, test: &BenchTest) -> (Status, String) {
    if sample.is_signed {
        return (Status::Signed, String::new());
    }
    match sample.pull_state() {
        PullState::Missed => return (Status::Missed, "the pull was recorded as missed".to_string()),
        PullState::Cancelled => return (Status::Missed, "the pull was cancelled".to_string()),
        PullState::Planned => {
            return (Status::CannotStartYet, "opens when the pull has been taken".to_string());
        }
        PullState::Pulled | PullState::NoPull => {}
    }
    if test.check.as_deref() == Some("sent back") {
        return (Status::SentBack, test.check_why.clone().unwrap_or_default());
    }
    match test.latest_version {
        Some(_) if test.is_out => (Status::OutOfSpecification, String::new()),
        Some(_) if test.content.needs_check && test.check.is_none() => {
            (Status::WaitingForCheck, String::new())
        }
        Some(_) => (Status::WaitingForReview, String::new()),
        None => open_standing(sample, test, &test.content.stages()),
    }
}

/// Where one part of a test stands: an appearance as stored and after the label shake are two tasks of one test.
pub fn part_standing(sample: &BenchSample, test: &BenchTest, stage: Stage) -> (Status, String) {
    match standing(sample, test) {
        (Status::NotStarted | Status::InProgress | Status::CannotStartYet, _)
            if test.content.stages().len() > 1 && sample.pull_state() != PullState::Planned =>
        {
            open_standing(sample, test, &[stage])
        }
        whole => whole,
    }
}

fn open_standing(sample: &BenchSample, test: &BenchTest, stages: &[Stage]) -> (Status, String) {
    let readings = sample.readings_of(test.id);
    let slots = sample.slots(test).into_iter().filter(|slot| stages.contains(&slot.stage));
    let slots: Vec<_> = slots.collect();
    let done = |slot: &&Slot| in_slot(&readings, &slot.key).is_some();
    if slots.iter().any(|slot| done(&slot)) {
        let required = slots.iter().filter(|slot| slot.is_required);
        let of = required.clone().count();
        return (Status::InProgress, format!("{} of {of} readings", required.filter(done).count()));
    }
    let refused = match stages {
        [stage] => part_refusal(sample, test, *stage),
        _ => refusal(sample, test),
    };
    match refused {
        None => (Status::NotStarted, String::new()),
        Some(StageRefusal::StageNotOpen { title, .. }) => {
            (Status::CannotStartYet, format!("opens when {title} is finished"))
        }
        Some(other) => (Status::CannotStartYet, other.to_string()),
    }
}

/// Why no container of the test can be read now; `None` where at least one can.
pub fn refusal(sample: &BenchSample, test: &BenchTest) -> Option<StageRefusal> {
    let mut refusals = Vec::new();
    for stage in test.content.stages() {
        refusals.push(part_refusal(sample, test, stage)?);
    }
    refusals.into_iter().next()
}

/// Why no container of a part of the test can be read now.
pub fn part_refusal(sample: &BenchSample, test: &BenchTest, stage: Stage) -> Option<StageRefusal> {
    let tests = tests_of(sample);
    let columns = columns(sample, test, stage);
    let mut refusals = columns.iter().map(|column| may_read(&tests, &sample.losses, stage, column.container));
    if refusals.clone().any(|said| said.is_ok()) { None } else { refusals.next()?.err() }
}

/// `25 °C/60 % RH inverted · 18 months · window ends 3 Dec 2026`, or the purpose of a received sample.
pub fn place(sample: &BenchSample) -> String {
    match &sample.pull {
        Some(pull) => {
            let window = pull.latest_on.as_deref().map(|day| format!(" · window ends {}", show::date(day)));
            format!("{} {} · {}{}", pull.condition, pull.orientation, pull.age, window.unwrap_or_default())
        }
        None => sample.purpose.clone(),
    }
}

/// A row of the bench's list.
struct Row {
    path: String,
    name: String,
    note: String,
    status: StatusMark,
}

struct MethodRow {
    path: String,
    name: String,
    note: String,
}

#[derive(Template)]
#[template(path = "bench/home.html")]
struct HomePage {
    shell: Shell,
    lead: String,
    mine: Vec<Row>,
    others: Vec<Row>,
    methods: Vec<MethodRow>,
    may_receive: bool,
}

const NOTHING: &str = "Nothing is at the bench. Pulls come here when they are taken, other samples when they \
     are received.";

fn home(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let actor = visit.actor()?;
    let today = visit.at.date();
    let (samples, methods) = visit.read(|reader| {
        Ok((store::sample::at_bench(reader)?, store::reading::open_methods(reader, actor.account, today)?))
    })?;
    let lead = match samples.len() {
        0 => NOTHING.to_string(),
        count => format!(
            "{} at the bench with tests open. The window that ends first comes first.",
            show::counted(count, "sample", "samples")
        ),
    };
    let (mine, others): (Vec<_>, Vec<_>) =
        samples.into_iter().partition(|line| line.assigned_to == Some(actor.account));
    let row = |line: &SampleLine| sample_row(line, visit);
    let methods = methods
        .into_iter()
        .map(|line| MethodRow {
            path: format!("/bench/session?method={}", line.method_version),
            name: format!("{} {}", line.code, line.name),
            note: format!(
                "{} open{}",
                show::counted(line.open as usize, "test", "tests"),
                if line.is_qualified { "" } else { "; you are not qualified for it" }
            ),
        })
        .collect();
    page(&HomePage {
        shell: Shell::of(visit, "Bench").bench(),
        lead,
        mine: mine.iter().map(row).collect(),
        others: others.iter().map(row).collect(),
        methods,
        may_receive: visit.may(Act::ReceiveSample),
    })
}

fn sample_row(line: &SampleLine, visit: &Visit) -> Row {
    let window = line.latest_on.as_deref().and_then(date_from_stored);
    let until = window.map(|day| until_shown(visit.at.date(), day)).unwrap_or_default();
    let parts = [line.place.clone(), line.purpose.clone(), until];
    let status = match line.completed {
        0 => Status::NotStarted,
        _ => Status::InProgress,
    };
    Row {
        path: format!("/samples/{}", line.id),
        name: format!("{} · lot {}", line.number, line.lot_number),
        note: parts.into_iter().filter(|part| !part.is_empty()).collect::<Vec<_>>().join(" · "),
        status: StatusMark::counting(status, line.completed as usize, line.tests as usize, "tests complete"),
    }
}

#[derive(Template)]
#[template(path = "bench/session.html")]
struct SessionPage {
    shell: Shell,
    method: String,
    method_version: i64,
    refusal: String,
    instrument: String,
    check: String,
    label: String,
    wrong_label: String,
    due: Vec<Row>,
}

/// One method, its instrument with the day's check, and the due samples across pulls: scan, read, next.
fn session(visit: &Visit) -> Outcome {
    visit.knows_query(&["method", "label", "instrument"])?;
    let Some(version) = visit.query.get("method").and_then(|text| text.parse::<i64>().ok()) else {
        return see("/bench");
    };
    let (actor, today) = (visit.actor()?, visit.at.date());
    let (method, facts, open) = visit.read(|reader| {
        Ok((
            store::method::version(reader, version)?,
            store::qualification::facts(reader, actor.account, version, today)?,
            store::reading::open_tests(reader, version)?,
        ))
    })?;
    let samples = visit.read(|reader| {
        let ids: Vec<i64> = open.iter().map(|(id, _)| *id).collect();
        store::bench::samples(reader, &ids)
    })?;
    let label = visit.query.get("label").unwrap_or_default().trim().to_string();
    let found = samples
        .iter()
        .zip(&open)
        .find(|(sample, _)| labelled(&label, &sample.number, &sample.containers).is_some());
    if let Some((_, (_, test))) = found {
        return see(format!("/tests/{test}?label={}&session={version}", encoded(&label)));
    }
    let due =
        samples.iter().zip(&open).filter_map(|(sample, (_, test))| session_row(sample, *test)).collect();
    let wrong_label = match label.is_empty() {
        true => String::new(),
        false => format!("“{label}” is no label of a sample that waits for this method. Nothing was opened."),
    };
    let (instrument, check) = instrument_words(visit, method.content.instruments.first())?;
    let mut shell = Shell::of(visit, &format!("Session: {} {}", method.code, method.name))
        .crumb("/bench", "Bench")
        .bench();
    if !wrong_label.is_empty() {
        shell.has_errors = true;
        shell.errors.push(("code".to_string(), wrong_label.clone()));
    }
    let refusal = qualification::may_test(&facts, today).err().map(|why| why.to_string()).unwrap_or_default();
    let status = if wrong_label.is_empty() { 200 } else { 409 };
    let method_words = format!("{} {}, version {}", method.code, method.name, method.number);
    let page = SessionPage {
        shell,
        method: method_words,
        method_version: version,
        refusal,
        instrument,
        check,
        label,
        wrong_label,
        due,
    };
    page_with(status, &page)
}

fn session_row(sample: &BenchSample, test: i64) -> Option<Row> {
    let test = sample.test(test)?;
    let (status, note) = standing(sample, test);
    let labels: Vec<&str> = sample.containers.iter().map(|one| short_label(&one.label)).collect();
    let place = place(sample);
    Some(Row {
        path: format!("/tests/{}", test.id),
        name: match labels.is_empty() {
            true => sample.number.clone(),
            false => format!("{} · {} {}", sample.number, sample.container_word, labels.join(", ")),
        },
        note: if note.is_empty() { place } else { format!("{place} · {note}") },
        status: StatusMark::of(status),
    })
}

/// The instruments of the method's kind with the day's check.
fn instrument_words(
    visit: &Visit,
    kind: Option<&String>,
) -> Result<(String, String), crate::domain::failure::Failure> {
    let Some(kind) = kind else { return Ok((String::new(), String::new())) };
    let today = visit.at.date();
    let found = visit.read(|reader| store::instrument::usable_kinds(reader, kind, today))?;
    let words: Vec<String> = found
        .iter()
        .map(|facts| match crate::domain::instrument::may_use(facts, today) {
            Ok(()) => {
                let check = facts.check_of(today);
                let words = check.map(|check| check.words(crate::domain::instrument::EventKind::DailyCheck));
                format!(
                    "{} {}: {}",
                    facts.code,
                    facts.name,
                    words.unwrap_or_else(|| "may be used".to_string())
                )
            }
            Err(why) => why.to_string(),
        })
        .collect();
    Ok((kind.clone(), if words.is_empty() { format!("No {kind} is registered.") } else { words.join(" · ") }))
}
