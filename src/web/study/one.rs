//! One study: arms by ages with where each pull stands, the sample ledger, labels, protocol and history.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form};
use super::super::page::Shell;
use super::super::part::{StatusMark, Trail};
use super::super::reply::{Outcome, page, page_with};
use super::super::show;
use super::super::visit::Visit;
use super::started;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::chamber::qualification_warning;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::pull::{self, PullFacts};
use crate::domain::subject::{Kind, Subject};
use crate::report::chart::Drawn;
use crate::report::chart::from_series::of_arms;
use crate::store;
use crate::store::amendment::Amendment;
use crate::store::container::{Container, LedgerLine};
use crate::store::pull::Pull;
use crate::store::study::{ArmLine, Study};

#[derive(Template)]
#[template(path = "study/study.html")]
struct StudyPage {
    shell: Shell,
    study: Study,
    started: String,
    ages: Vec<String>,
    arms: Vec<ArmRow>,
    charts: Vec<Drawn>,
    ledger: Vec<LedgerRow>,
    followed: Vec<store::follow_through::Followed>,
    warnings: Vec<String>,
    /// Version, words, when, who and why of each amendment.
    amendments: Vec<AmendmentRow>,
    /// A newer approved version of the protocol waits and this person may apply it.
    may_amend: bool,
    trigger: Option<Form>,
    trail: Trail,
}

struct AmendmentRow {
    protocol_version: i64,
    words: String,
    at: String,
    by: String,
    why: String,
}

fn amendment_row(visit: &Visit, one: Amendment) -> AmendmentRow {
    AmendmentRow {
        protocol_version: one.protocol_version,
        words: one.protocol_words,
        at: show::instant(&one.at, visit.at.zone),
        by: one.by,
        why: one.why,
    }
}

struct ArmRow {
    words: String,
    side: String,
    balance: String,
    cells: Vec<Option<Cell>>,
}

struct Cell {
    pull: i64,
    number: String,
    status: StatusMark,
    dates: String,
    side: String,
}

struct LedgerRow {
    at: String,
    who: String,
    container: i64,
    label: String,
    what: String,
    note: String,
    /// Containers of the arm that stand in the chamber after this line.
    balance: i64,
}

/// A pull's status mark: with the count of tests where one is out of specification.
pub(in crate::web) fn mark(facts: &PullFacts, today: chrono::NaiveDate) -> StatusMark {
    let progress = facts.progress;
    match pull::status(facts, today) {
        status @ crate::domain::status::Status::OutOfSpecification => {
            StatusMark::counting(status, progress.out_of_specification, progress.tests, "tests")
        }
        status => StatusMark::of(status),
    }
}

fn cell(visit: &Visit, pull: &Pull) -> Cell {
    let today = visit.at.date();
    let dates = match (pull.facts.happened_on, pull.facts.due_on) {
        (Some(on), _) => date_shown(on),
        (None, Some(due_on)) => format!("due {}", date_shown(due_on)),
        _ => String::new(),
    };
    Cell {
        pull: pull.id,
        number: pull.number.clone(),
        status: mark(&pull.facts, today),
        dates,
        side: pull::side_fact(&pull.facts, today),
    }
}

/// The ages of all arms, young to old, months before days of the same words.
fn ages(pulls: &[Pull]) -> Vec<String> {
    let mut sorted: Vec<&Pull> = pulls.iter().collect();
    sorted.sort_by_key(|pull| (pull.facts.due_on, pull.id));
    let mut ages: Vec<String> = Vec::new();
    for pull in sorted {
        if !ages.contains(&pull.age_text) {
            ages.push(pull.age_text.clone());
        }
    }
    ages
}

fn arm_row(visit: &Visit, arm: &ArmLine, ages: &[String], pulls: &[Pull]) -> ArmRow {
    let own: Vec<&Pull> = pulls.iter().filter(|pull| pull.study_arm == arm.id).collect();
    let at = |age: &String| own.iter().find(|pull| pull.age_text == *age).map(|pull| cell(visit, pull));
    let mut side = vec![format!("beyond a limit: {}", arm.limits_do)];
    side.extend(arm.chamber_code.iter().map(|code| format!("chamber {code}")));
    side.extend(arm.container_text.clone());
    if arm.is_labelled_condition {
        side.push("labelled condition".to_string());
    }
    if arm.is_contingent {
        side.push(if arm.is_triggered { "triggered" } else { "contingent, not triggered" }.to_string());
    }
    ArmRow {
        words: format!("{}, {}", arm.condition_name, arm.orientation),
        side: side.join("; "),
        balance: format!("{} of {}", arm.containers_left, arm.containers),
        cells: ages.iter().map(at).collect(),
    }
}

fn ledger_rows(visit: &Visit, arms: &[ArmLine], lines: Vec<LedgerLine>) -> Vec<LedgerRow> {
    let mut balances: Vec<(i64, i64)> = arms.iter().map(|arm| (arm.position, arm.containers)).collect();
    let mut left: Vec<i64> = Vec::new();
    let mut rows = Vec::new();
    for line in lines {
        // Only the first event takes a container out of its chamber; a later one destroys what left.
        let leaves = !left.contains(&line.container);
        left.push(line.container);
        let mut balance = 0;
        for (position, count) in &mut balances {
            if *position == line.position {
                *count -= i64::from(leaves);
                balance = *count;
            }
        }
        rows.push(ledger_row(visit, line, balance));
    }
    rows
}

pub(in crate::web) fn what_words(line: &LedgerLine) -> String {
    let mut what = line.kind.clone();
    if let Some(number) = &line.sample_number {
        what = format!("{what} for {number}");
    }
    if let Some(witness) = &line.witness {
        what = format!("{what}, seen by {witness}");
    }
    what
}

fn ledger_row(visit: &Visit, line: LedgerLine, balance: i64) -> LedgerRow {
    LedgerRow {
        at: show::instant(&line.at, visit.at.zone),
        what: what_words(&line),
        who: line.who,
        container: line.container,
        label: line.label,
        note: line.note.unwrap_or_default(),
        balance,
    }
}

pub(super) fn one(visit: &Visit) -> Outcome {
    study_page(200, visit, visit.id("id")?, None)
}

fn study_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (study, arms, mut pulls, points, ledger, lines) = visit.read(|reader| {
        Ok((
            store::study::get(reader, id)?,
            store::study::arms(reader, id)?,
            store::pull::of_study(reader, id)?,
            store::series::arms_of_study(reader, id)?,
            store::container::ledger(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Study, id))?,
        ))
    })?;
    let (amendments, superseded, newer) = visit.read(|reader| {
        let newer = acts::amendment::newer_version(reader, &study)?;
        Ok((
            store::amendment::of_study(reader, id)?,
            store::amendment::superseded(reader, id)?,
            newer.is_some(),
        ))
    })?;
    pulls.retain(|pull| !superseded.contains(&pull.id));
    let trigger = match failed {
        Some(failed) => Some(failed),
        None => trigger_form(visit, id, &arms)?,
    };
    let mut shell = Shell::of(visit, &format!("Study {}", study.number)).crumb("/studies", "Studies");
    if let Some(form) = &trigger {
        shell = shell.with_errors(form);
    }
    let today = visit.at.date();
    let warning =
        |arm: &ArmLine| qualification_warning(arm.chamber_code.as_deref()?, arm.chamber_due_on?, today);
    let mut warnings: Vec<String> = arms.iter().filter_map(warning).collect();
    warnings.dedup();
    let ages = ages(&pulls);
    let page = StudyPage {
        shell,
        started: started(&study),
        arms: arms.iter().map(|arm| arm_row(visit, arm, &ages, &pulls)).collect(),
        ages,
        charts: of_arms(&study.lot_number, &points, true),
        ledger: ledger_rows(visit, &arms, ledger),
        followed: visit.read(|reader| store::follow_through::of_study(reader, id))?,
        warnings,
        amendments: amendments.into_iter().map(|one| amendment_row(visit, one)).collect(),
        may_amend: newer && visit.may(Act::AmendStudy),
        trigger,
        trail: Trail::of(&lines, visit.at.zone),
        study,
    };
    page_with(status, &page)
}

fn trigger_form(visit: &Visit, id: i64, arms: &[ArmLine]) -> Result<Option<Form>, Failure> {
    let open: Vec<(String, String)> = arms
        .iter()
        .filter(|arm| arm.is_contingent && !arm.is_triggered)
        .map(|arm| (arm.id.to_string(), format!("{}, {}", arm.condition_name, arm.orientation)))
        .collect();
    if open.is_empty() || !visit.may(Act::TriggerArm) {
        return Ok(None);
    }
    let form = Form::new(visit, &format!("/studies/{id}/trigger"), "Trigger the arm")?
        .field(Field::new("arm", "Contingent arm", Entry::Select).choices(open))
        .field(
            Field::new("reason", "Why it is triggered", Entry::Text)
                .hint("Such as the significant change at 40 °C/75 % RH, with the test and the age."),
        )
        .quiet();
    Ok(Some(form))
}

pub(super) fn trigger(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let arms = visit.read(|reader| store::study::arms(reader, id))?;
    let Some(form) = trigger_form(visit, id, &arms)? else {
        return Err(crate::domain::study::TriggerRefusal::ArmTriggered.into());
    };
    form::submit(
        visit,
        form,
        |typed| {
            let arm = typed.record("arm");
            let reason = typed.reason("reason");
            Some((arm?, reason?))
        },
        |actor, (arm, reason)| acts::study::trigger(visit.db(), actor, arm, &reason),
        |id| format!("/studies/{id}"),
        |status, form| study_page(status, visit, id, Some(form)),
    )
}

#[derive(Template)]
#[template(path = "study/labels.html")]
struct LabelsPage {
    shell: Shell,
    study: Study,
    started: String,
    containers: Vec<Container>,
}

pub(super) fn labels(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (study, containers) =
        visit.read(|reader| Ok((store::study::get(reader, id)?, store::container::of_study(reader, id)?)))?;
    let shell = Shell::of(visit, &format!("Labels of {}", study.number))
        .crumb("/studies", "Studies")
        .crumb(format!("/studies/{id}"), study.number.clone());
    page(&LabelsPage { shell, started: started(&study), containers, study })
}
