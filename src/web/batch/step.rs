//! One step at the bench: what is asked, what is recorded, and each entry recorded by itself.

use askama::Template;
use rust_decimal::Decimal;

use super::super::form::Form;
use super::super::page::Shell;
use super::super::part::StatusMark;
use super::super::reply::{Outcome, page_with};
use super::super::show;
use super::super::visit::Visit;
use super::forms::{self, Section};
use super::late::{LateWords, QUERY};
use crate::acts;
use crate::acts::batch::Loaded;
use crate::domain::batch::rule::{StepFacts, may_look};
use crate::domain::batch::state::{Before, StepState, waits_for};
use crate::domain::batch::weighing::{judge, parts, target, weighings};
use crate::domain::batch::{Entry, EntryKind};
use crate::domain::failure::Failure;
use crate::domain::status::Status;
use crate::store;

/// One entry as the page lists it.
struct Row {
    at: String,
    what: String,
    value: String,
    is_outside: bool,
    is_superseded: bool,
    limits: String,
    by: String,
    note: String,
    deviation: Option<(i64, i64)>,
    correct: Option<String>,
}

#[derive(Template)]
#[template(path = "batch/step.html")]
struct StepPage {
    shell: Shell,
    id: i64,
    number: usize,
    lot_number: String,
    words: String,
    instruction: String,
    status: StatusMark,
    said: String,
    target: Option<TargetWords>,
    scanned: String,
    lot_words: String,
    sections: Vec<Section>,
    rows: Vec<Row>,
    late: LateWords,
    late_told: String,
    may_be_late: bool,
    /// A material lot can still be looked at for this step.
    may_weigh: bool,
    next: Option<usize>,
}

/// What is to be weighed, and how far it is.
struct TargetWords {
    amount: String,
    name: String,
    allowed: String,
    so_far: String,
}

/// Whether the first figures of a blind weighing are kept from this person.
pub fn is_hidden(facts: &StepFacts<'_>, account: i64) -> bool {
    facts.planned.step.blind_within.is_some()
        && !facts.state().is_settled()
        && !facts.doers().contains(&account)
}

fn status(facts: &StepFacts<'_>) -> StatusMark {
    match facts.state() {
        StepState::Ready | StepState::CannotStart => {
            match waits_for(facts.content, &facts.planned, facts.entries, facts.yields) {
                Some(_) => StatusMark::of(Status::CannotStartYet),
                None => StatusMark::of(Status::NotStarted),
            }
        }
        StepState::InProgress => StatusMark::of(Status::InProgress),
        StepState::WaitingForCheck => StatusMark::of(Status::WaitingForCheck),
        StepState::Done => StatusMark::settled("Done"),
        StepState::Skipped => StatusMark::settled("Skipped"),
    }
}

/// Why nothing can be done here now, where nothing can.
fn said(facts: &StepFacts<'_>, account: i64) -> String {
    if let Err(why) = crate::domain::batch::rule::may_enter(facts) {
        return why.to_string();
    }
    match facts.state() {
        StepState::Ready | StepState::CannotStart => {
            match waits_for(facts.content, &facts.planned, facts.entries, facts.yields) {
                Some(Before::Step(step)) => format!("It opens when {step} is done."),
                Some(Before::Yield(phase)) => format!("It opens when the yield of “{phase}” is recorded."),
                None => String::new(),
            }
        }
        StepState::WaitingForCheck => match may_look(facts, account) {
            Ok(()) => String::new(),
            Err(why) => why.to_string(),
        },
        _ => String::new(),
    }
}

fn target_words(facts: &StepFacts<'_>, account: i64) -> Option<TargetWords> {
    let found = target(facts.content, &facts.planned)?;
    let unit = &found.row.unit;
    let stands = judge(&found, &parts(&weighings(&facts.planned, facts.entries)));
    let with = |value: Decimal| format!("{value}\u{202f}{unit}");
    let so_far = match is_hidden(facts, account) {
        true => "hidden until you have weighed".to_string(),
        false => with(stands.weighed.normalize()),
    };
    Some(TargetWords {
        amount: found.amount.map_or("what makes up to the mark".to_string(), with),
        name: found.row.name.clone(),
        allowed: stands.limit_words(unit),
        so_far,
    })
}

/// What is known of the scanned material lot: its state and the target corrected for it.
fn lot_words(visit: &Visit, facts: &StepFacts<'_>, scanned: &str) -> Result<String, Failure> {
    let Some(target) = target(facts.content, &facts.planned).filter(|_| !scanned.is_empty()) else {
        return Ok(String::new());
    };
    visit.read(|reader| {
        let Some(lot) = store::material_lot::by_scan(reader, scanned)? else {
            return Ok(format!(
                "There is no material lot “{scanned}”. Scan its label again, or type the number on it."
            ));
        };
        let wanted = (target.row.material, target.row.name.as_str());
        if let Err(why) = crate::domain::material_lot::may_use(&lot.facts, wanted, visit.at.date()) {
            return Ok(why.to_string());
        }
        let (full, formula) = match acts::batch::weighing::full(reader, &target, &lot) {
            Err(Failure::Refused(refusal)) => return Ok(refusal.sentence),
            other => other?,
        };
        let holds = format!("{} holds {}\u{202f}{}", lot.facts.number, lot.facts.balance, lot.facts.unit);
        Ok(match (full, formula.is_empty()) {
            (Some(full), false) => {
                format!(
                    "{holds}. Corrected for its assay and water: {formula} = {full}\u{202f}{}.",
                    target.row.unit
                )
            }
            _ => format!("{holds}."),
        })
    })
}

fn row(visit: &Visit, facts: &StepFacts<'_>, record: i64, one: &Entry, hides: bool) -> Row {
    let is_masked = hides && one.kind == EntryKind::Weighing;
    let mut notes = Vec::new();
    if one.kind == EntryKind::Weighing || one.kind == EntryKind::SecondWeighing {
        let weighed = &one.weighed;
        if !is_masked && !weighed.gross.is_empty() {
            notes.push(format!("gross {}, tare {}", weighed.gross, weighed.tare));
        }
        notes.push(format!("on {} ({})", weighed.balance, weighed.balance_check));
        if !is_masked && !weighed.formula.is_empty() {
            notes.push(weighed.formula.clone());
        }
    }
    notes.extend(one.equipment_code.iter().map(|code| format!("in {code}")));
    if one.happened_at.is_some() && one.supersedes.is_none() {
        notes.push(format!("entered late, {}", show::instant(&one.at, visit.at.zone)));
    }
    notes.extend(one.reason.iter().map(|reason| format!("because {reason}")));
    let is_superseded = facts.entries.iter().any(|later| later.supersedes == Some(one.id));
    let account = visit.actor().map(|actor| actor.account).unwrap_or_default();
    let may_correct = visit.may(crate::domain::act::Act::CorrectStep)
        && crate::domain::batch::rule::may_correct(facts, one, account).is_ok();
    Row {
        at: show::instant(one.instant(), visit.at.zone),
        what: one.label(),
        value: if is_masked { "hidden".to_string() } else { one.shown() },
        is_outside: one.verdict == crate::domain::batch::Verdict::Outside && !is_masked,
        is_superseded,
        limits: if one.limits == "no limit" || is_masked { String::new() } else { one.limits.clone() },
        by: one.by.clone(),
        note: notes.join("; "),
        deviation: one.deviation.zip(one.deviation_number),
        correct: may_correct
            .then(|| format!("/batches/{record}/steps/{}/entries/{}", facts.planned.number, one.id)),
    }
}

pub fn load(visit: &Visit) -> Result<(Loaded, usize), Failure> {
    let (id, step) = (visit.id("id")?, visit.id("step")?);
    let loaded = visit.read(|reader| Loaded::of(reader, id))?;
    let step = usize::try_from(step).unwrap_or_default();
    loaded.facts(step)?;
    Ok((loaded, step))
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[QUERY[0], QUERY[1], QUERY[2], "material_lot"])?;
    let (loaded, step) = load(visit)?;
    step_page(200, visit, &loaded, step, None)
}

/// The page of a step; a form that failed takes the place of its like.
pub fn step_page(
    status_code: u16,
    visit: &Visit,
    loaded: &Loaded,
    step: usize,
    failed: Option<Form>,
) -> Outcome {
    // What was recorded since the form was sent must show.
    let loaded = &visit.read(|reader| Loaded::of(reader, loaded.record.id))?;
    let facts = loaded.facts(step)?;
    let (words, account) = (facts.planned.words(), visit.actor()?.account);
    let mut shell = Shell::of(visit, &words)
        .crumb("/batches", "Batches")
        .crumb(format!("/batches/{}", loaded.record.id), loaded.record.number.as_str())
        .bench();
    let mut sections = forms::all(visit, loaded, step)?;
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        put_in(&mut sections, failed, loaded, step);
    }
    let late = LateWords::of(visit);
    let hides = is_hidden(&facts, account);
    let scanned = visit.query.get("material_lot").unwrap_or_default().trim().to_string();
    let entries = facts.entries.iter().filter(|one| one.step == step);
    let page = StepPage {
        shell,
        id: loaded.record.id,
        number: step,
        lot_number: loaded.record.lot_number.clone(),
        instruction: facts.planned.step.instruction.clone(),
        status: status(&facts),
        said: said(&facts, account),
        target: target_words(&facts, account),
        lot_words: lot_words(visit, &facts, &scanned)?,
        scanned,
        may_be_late: !sections.is_empty(),
        may_weigh: matches!(facts.state(), StepState::Ready | StepState::InProgress) && !sections.is_empty(),
        sections,
        rows: entries.map(|one| row(visit, &facts, loaded.record.id, one, hides)).collect(),
        late_told: late.told(),
        late,
        next: facts.content.step(step + 1).filter(|_| facts.state().is_settled()).map(|next| next.number),
        words,
    };
    page_with(status_code, &page)
}

/// A failed form comes back with the entries of now: sent again, it means what is shown.
fn put_in(sections: &mut Vec<Section>, mut failed: Form, loaded: &Loaded, step: usize) {
    let newest = loaded.entries.iter().filter(|one| one.step == step).map(|one| one.id).max();
    for (name, value) in &mut failed.hidden {
        if name == "seen" {
            *value = newest.unwrap_or_default().to_string();
        }
    }
    match sections.iter_mut().find(|section| section.form.action == failed.action) {
        Some(section) => {
            section.form = failed;
            section.is_folded = false;
        }
        None => sections.insert(
            0,
            Section {
                heading: "Not recorded".to_string(),
                note: String::new(),
                form: failed,
                is_folded: false,
            },
        ),
    }
}
