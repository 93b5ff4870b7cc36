//! Amending a study: every row that changes is listed before it is done.

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::acts::amendment::Amending;
use crate::domain::act::Act;
use crate::domain::amendment::Row;
use crate::domain::failure::Failure;
use crate::domain::role::Role;
use crate::store;

pub const ROUTES: &[Route] =
    &[get("/studies/{id}/amend", amend_page), post("/studies/{id}/amend", &[Act::AmendStudy], amend)];

fn prepared(visit: &Visit) -> Result<Amending, Failure> {
    visit.needs_role(&[Role::LabManager], Act::AmendStudy)?;
    let (id, today) = (visit.id("id")?, visit.at.date());
    visit.read(|reader| {
        let study = store::study::get(reader, id)?;
        let newer = acts::amendment::newer_version(reader, &study)?;
        let newer = newer.ok_or_else(|| Failure::missing("newer approved version of its protocol"))?;
        acts::amendment::prepare(reader, id, newer, today)
    })
}

fn amend_form(visit: &Visit, amending: &Amending) -> Result<Form, Failure> {
    let action = format!("/studies/{}/amend", amending.study.id);
    let why = Field::new("reason", "Why the study is amended", Entry::Text).hint("At least ten characters.");
    Ok(Form::new(visit, &action, "Amend the study")?.field(why).hide("seen", amending.digest()))
}

fn cells(amending: &Amending, row: &Row) -> Vec<Cell> {
    let arm = amending.arms.iter().find(|arm| arm.position == row.arm_position);
    let words = arm.map(|arm| format!("{}, {}", arm.condition_name, arm.orientation)).unwrap_or_default();
    vec![
        Cell::noted(&row.age_text, words),
        Cell::or_missing(row.number.clone(), "no pull yet"),
        Cell::Was(row.was.clone()),
        Cell::Is(row.is.clone()),
    ]
}

fn show_rows(status: u16, visit: &Visit, amending: &Amending, form: Form) -> Outcome {
    let study = &amending.study;
    let title = format!("Amend study {}", study.number);
    let shell = Shell::of(visit, &title)
        .crumb("/studies", "Studies")
        .crumb(format!("/studies/{}", study.id), study.number.clone())
        .with_errors(&form);
    let lead = format!(
        "From version {} of its protocol to version {}: {}. Pulls that were taken stay as they are.",
        amending.facts.was,
        amending.facts.is,
        show::counted(amending.rows.len(), "row changes", "rows change")
    );
    let heads = ["Age", "Pull", "Was", "Is"];
    let table = Table::new("Every row that changes, arm by arm", &heads, "No pull to come changes.")
        .rows(amending.rows.iter().map(|row| cells(amending, row)));
    Record::new(shell, lead)
        .fact("Why there is a new version", &amending.version.reason)
        .table("Rows that change", table)
        .form("Amend", "A pull that changes gets a new number; the one before stays on record.", Some(form))
        .show_with(status)
}

fn amend_page(visit: &Visit) -> Outcome {
    let amending = prepared(visit)?;
    let form = amend_form(visit, &amending)?;
    show_rows(200, visit, &amending, form)
}

fn amend(visit: &Visit) -> Outcome {
    let amending = prepared(visit)?;
    let (id, version) = (amending.study.id, amending.version.id);
    form::submit(
        visit,
        amend_form(visit, &amending)?,
        |typed| Some((typed.reason("reason")?, typed.raw("seen"))),
        |actor, (reason, seen)| acts::amendment::amend(visit.db(), actor, id, version, &seen, &reason),
        |id| format!("/studies/{id}"),
        |status, form| show_rows(status, visit, &amending, form),
    )
}
