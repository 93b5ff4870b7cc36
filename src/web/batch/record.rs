//! One record: what is next in one sentence, the steps by phase as tasks, the yields, closing.

use askama::Template;

use super::super::form::Form;
use super::super::page::Shell;
use super::super::part::{Signatures, StatusMark, Trail};
use super::super::reply::{Outcome, page_with};
use super::super::show;
use super::super::visit::Visit;
use super::close;
use crate::acts::batch::Loaded;
use crate::domain::batch::state::{Before, StepState, present, states, unanswered, waits_for};
use crate::domain::batch::{Entry, EntryKind, PhaseYield, Planned, RecordContent, Verdict, yield_of};
use crate::domain::digest::sha256_hex;
use crate::domain::status::Status;
use crate::domain::subject::{Kind, Subject};
use crate::store;

/// How many steps are done or lawfully skipped.
pub fn settled(content: &RecordContent, entries: &[Entry], yields: &[PhaseYield]) -> usize {
    states(content, entries, yields).into_iter().filter(|state| state.is_settled()).count()
}

/// Where the record goes on.
enum Next {
    Running(usize),
    Check(usize),
    Ready(usize),
    Yield(usize),
    YieldCheck(usize),
    Nothing,
}

/// The first thing to go on with: what runs, what waits for a second person, what may begin, then the yields.
fn next(content: &RecordContent, entries: &[Entry], yields: &[PhaseYield]) -> Next {
    let states = states(content, entries, yields);
    let find = |wanted: StepState| states.iter().position(|state| *state == wanted).map(|at| at + 1);
    let running = find(StepState::InProgress).map(Next::Running);
    let step = running
        .or(find(StepState::WaitingForCheck).map(Next::Check))
        .or(find(StepState::Ready).map(Next::Ready));
    if let Some(step) = step {
        return step;
    }
    for (at, _) in content.master.phases.iter().enumerate().filter(|(_, phase)| phase.theory.is_some()) {
        match yield_of(yields, at) {
            None => return Next::Yield(at),
            Some(found) if found.checked.is_none() => return Next::YieldCheck(at),
            Some(_) => {}
        }
    }
    Next::Nothing
}

/// What is next, in one sentence.
pub fn next_words(content: &RecordContent, entries: &[Entry], yields: &[PhaseYield]) -> String {
    let step = |number: usize| content.step(number).map(|one| one.words()).unwrap_or_default();
    let phase = |at: usize| content.phase(at).map(|phase| phase.name.clone()).unwrap_or_default();
    match next(content, entries, yields) {
        Next::Running(number) => format!("In progress: {}.", step(number)),
        Next::Check(number) => format!("Waiting for a second person: {}.", step(number)),
        Next::Ready(number) => format!("Next: {}.", step(number)),
        Next::Yield(at) => format!("Next: the yield of “{}”.", phase(at)),
        Next::YieldCheck(at) => format!("Waiting for a second person: the yield of “{}”.", phase(at)),
        Next::Nothing => "All steps are done. The record can be closed.".to_string(),
    }
}

/// The end of the address at which this person goes on: who did a step does not check it, so it leads them to the next
/// one that may begin.
fn next_path(loaded: &Loaded, account: i64) -> Option<String> {
    if loaded.record.is_closed || loaded.record.lot_decision.is_some() {
        return None;
    }
    let content = &loaded.record.content;
    match next(content, &loaded.entries, &loaded.yields) {
        Next::Check(number) if loaded.facts(number).is_ok_and(|facts| facts.doers().contains(&account)) => {
            let states = states(content, &loaded.entries, &loaded.yields);
            let ready = states.iter().position(|state| *state == StepState::Ready);
            Some(format!("steps/{}", ready.map_or(number, |at| at + 1)))
        }
        Next::Ready(_) if unchecked_of_another(loaded, account).is_some() => {
            unchecked_of_another(loaded, account).map(|at| format!("yields/{}", at + 1))
        }
        Next::Running(number) | Next::Check(number) | Next::Ready(number) => Some(format!("steps/{number}")),
        Next::Yield(at) | Next::YieldCheck(at) => Some(format!("yields/{}", at + 1)),
        Next::Nothing => None,
    }
}

/// The place of a phase whose yield another person worked out and nobody has checked.
fn unchecked_of_another(loaded: &Loaded, account: i64) -> Option<usize> {
    let phases = 0..loaded.record.content.master.phases.len();
    let mut newest = phases.filter_map(|at| yield_of(&loaded.yields, at));
    newest.find(|found| found.checked.is_none() && found.account != account).map(|found| found.phase)
}

struct Task {
    path: String,
    name: String,
    note: String,
    status: StatusMark,
}

struct PhaseTasks {
    name: String,
    tasks: Vec<Task>,
}

#[derive(Template)]
#[template(path = "batch/record.html")]
struct RecordPage {
    shell: Shell,
    lead: String,
    lot: i64,
    lot_number: String,
    id: i64,
    facts: Vec<(String, String)>,
    digest: String,
    phases: Vec<PhaseTasks>,
    deviations: Vec<(i64, String, &'static str)>,
    close: Option<Form>,
    close_note: String,
    reopen: Option<Form>,
    signatures: Signatures,
    packs: bool,
    next: Option<String>,
    trail: Trail,
}

fn step_task(loaded: &Loaded, planned: &Planned<'_>, state: StepState) -> Task {
    let present = present(&loaded.entries, planned.number);
    let who = |kind: EntryKind| present.iter().find(|one| one.kind == kind).map(|one| one.by.clone());
    let outside = unanswered(&loaded.entries, planned.number).len();
    let (status, mut note) = match state {
        StepState::CannotStart => (StatusMark::of(Status::CannotStartYet), waits(loaded, planned)),
        StepState::Ready => (StatusMark::of(Status::NotStarted), planned.step.kind.words().to_string()),
        StepState::InProgress => (
            StatusMark::of(Status::InProgress),
            format!("started by {}", who(EntryKind::Started).unwrap_or_default()),
        ),
        StepState::WaitingForCheck => (
            StatusMark::of(Status::WaitingForCheck),
            format!("ended by {}", who(EntryKind::Ended).unwrap_or_default()),
        ),
        StepState::Done => {
            let checked = who(EntryKind::Checked).map(|by| format!(", checked by {by}")).unwrap_or_default();
            (StatusMark::settled("Done"), format!("{}{checked}", who(EntryKind::Ended).unwrap_or_default()))
        }
        StepState::Skipped => (StatusMark::settled("Skipped"), who(EntryKind::Skipped).unwrap_or_default()),
    };
    let run = crate::domain::batch::state::run_of(&loaded.entries, planned.number);
    if run > 1 {
        note.push_str(&format!(" · run {run}"));
    }
    if outside > 0 {
        note.push_str(&format!(" · {outside} outside limits without a deviation"));
    }
    Task {
        path: format!("/batches/{}/steps/{}", loaded.record.id, planned.number),
        name: planned.words(),
        note,
        status,
    }
}

fn waits(loaded: &Loaded, planned: &Planned<'_>) -> String {
    match waits_for(&loaded.record.content, planned, &loaded.entries, &loaded.yields) {
        Some(Before::Step(step)) => format!("opens when {step} is done"),
        Some(Before::Yield(phase)) => format!("opens when the yield of “{phase}” is recorded"),
        None => String::new(),
    }
}

fn yield_task(loaded: &Loaded, at: usize, phase: &str) -> Task {
    let found = yield_of(&loaded.yields, at);
    let (status, note) = match found {
        None => (StatusMark::of(Status::NotStarted), "taken after the last step of the phase".to_string()),
        Some(found) => {
            let outside = if found.verdict == Verdict::Outside { ", outside its limits" } else { "" };
            let note = format!("{}\u{202f}% of theory{outside}, worked out by {}", found.percent, found.by);
            match &found.checked {
                None => (StatusMark::of(Status::WaitingForCheck), note),
                Some((by, _)) => (StatusMark::settled("Done"), format!("{note}, checked by {by}")),
            }
        }
    };
    let path = format!("/batches/{}/yields/{}", loaded.record.id, at + 1);
    Task { path, name: format!("Yield of {phase}"), note, status }
}

fn phases(loaded: &Loaded) -> Vec<PhaseTasks> {
    let content = &loaded.record.content;
    let states = states(content, &loaded.entries, &loaded.yields);
    let steps = content.steps();
    content
        .master
        .phases
        .iter()
        .enumerate()
        .map(|(at, phase)| {
            let own = steps.iter().zip(&states).filter(|(planned, _)| planned.phase == at);
            let mut tasks: Vec<Task> =
                own.map(|(planned, state)| step_task(loaded, planned, *state)).collect();
            if phase.theory.is_some() {
                tasks.push(yield_task(loaded, at, &phase.name));
            }
            PhaseTasks { name: phase.name.clone(), tasks }
        })
        .collect()
}

fn facts(visit: &Visit, loaded: &Loaded) -> Vec<(String, String)> {
    let content = &loaded.record.content;
    let at = show::instant(&loaded.record.started_at, visit.at.zone);
    vec![
        ("Product".to_string(), content.product.clone()),
        ("Presentation".to_string(), content.presentation.clone()),
        ("Batch size".to_string(), format!("{}\u{202f}{}", content.size, content.size_unit)),
        ("Copied from".to_string(), content.formulation.clone()),
        ("Started".to_string(), format!("{}, {at}", loaded.record.started_by)),
    ]
}

fn lead(loaded: &Loaded) -> String {
    match (&loaded.record.lot_decision, loaded.record.is_closed) {
        (Some(decision), _) => format!("The lot is {decision}. Nothing is added to its record."),
        (None, true) => "The record is closed. QA reviews it with the lot.".to_string(),
        (None, false) => next_words(&loaded.record.content, &loaded.entries, &loaded.yields),
    }
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    record_page(200, visit, visit.id("id")?, None)
}

/// The record's page; a form that failed takes the place of its like.
pub fn record_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (loaded, deviations, signed, canonical, lines) = visit.read(|reader| {
        let loaded = Loaded::of(reader, id)?;
        let deviations = store::deviation::of_lot(reader, loaded.record.lot)?;
        let signed = store::signature::of(reader, Kind::BatchRecord, id)?;
        let canonical = store::batch::canonical(reader, id, signed.last().map(|one| one.act))?;
        let lines = store::trail::of_subject(reader, Subject::new(Kind::BatchRecord, id))?;
        Ok((loaded, deviations, signed, canonical, lines))
    })?;
    let title = format!("Batch record {}", loaded.record.number);
    let mut shell = Shell::of(visit, &title)
        .crumb("/batches", "Batches")
        .bench()
        .print(&close::state_words(&loaded), &loaded.record.digest);
    if let Some(form) = &failed {
        shell = shell.with_errors(form);
    }
    let (close, close_note, reopen) = close::forms(visit, &loaded, failed)?;
    let page = RecordPage {
        shell,
        lead: lead(&loaded),
        lot: loaded.record.lot,
        lot_number: loaded.record.lot_number.clone(),
        id,
        facts: facts(visit, &loaded),
        digest: show::digest(&loaded.record.digest),
        phases: phases(&loaded),
        deviations: deviations.into_iter().map(deviation_row).collect(),
        close,
        close_note,
        reopen,
        signatures: Signatures::of(&signed, &sha256_hex(canonical.as_bytes()), visit.at.zone),
        next: next_path(&loaded, visit.actor()?.account),
        packs: visit.may(crate::domain::act::Act::MakeLot) && loaded.record.lot_decision.is_none(),
        trail: Trail::of(&lines, visit.at.zone),
    };
    page_with(status, &page)
}

fn deviation_row(one: store::deviation::Deviation) -> (i64, String, &'static str) {
    let state = match (one.facts.is_closed, one.facts.is_continued) {
        (true, _) => "closed",
        (false, true) => "signed to go on under",
        (false, false) => "open",
    };
    (one.id, format!("Deviation {}: {}", one.facts.number, one.title), state)
}
