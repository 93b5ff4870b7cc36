//! Qualifications: which person may do tests by which method version.

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
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::qualification::NewQualification;
use crate::domain::role::Role;
use crate::store;
use crate::store::qualification::Qualification;

pub const ROUTES: &[Route] = &[
    get("/qualifications", list),
    get("/qualifications/new", new_page),
    post("/qualifications/new", &[Act::QualifyPerson], add),
];

fn state_words(one: &Qualification, visit: &Visit) -> &'static str {
    let today = visit.at.date();
    if one.ends_on < today {
        "ended"
    } else if one.starts_on > today {
        "not begun"
    } else {
        "qualified"
    }
}

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::qualification::all)?;
    let current = found.iter().filter(|one| state_words(one, visit) == "qualified").count();
    let lead = format!("{} hold today.", show::counted(current, "qualification", "qualifications"));
    let table = Table::new(
        "By person and method, the newest first",
        &["Person", "Method version", "From", "To", "Today", "Reference", "Recorded by"],
        "Nobody is qualified yet. Without a qualification for its method version a person cannot record readings.",
    )
    .rows(found.iter().map(|one| {
        vec![
            Cell::text(&one.full_name),
            Cell::Link {
                path: format!("/methods/{}", one.method),
                words: format!("{} version {}", one.method_code, one.number),
                note: one.method_name.clone(),
            },
            Cell::text(date_shown(one.starts_on)),
            Cell::text(date_shown(one.ends_on)),
            Cell::text(state_words(one, visit)),
            Cell::text(&one.reference),
            Cell::text(&one.recorded_by),
        ]
    }));
    Record::new(Shell::of(visit, "Qualifications").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::QualifyPerson), "/qualifications/new", "Qualify a person")
        .quiet_link_if(visit.may(Act::OverrideStop), "/overrides/new", "Lift a stop for a day")
        .table("", table)
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let (people, methods) = visit.read(|reader| {
        Ok((store::account::people(reader)?, store::qualification::method_choices(reader)?))
    })?;
    let testers = people.into_iter().filter(|person| {
        person.is_enabled && person.roles.iter().any(|role| matches!(role, Role::Analyst | Role::LabManager))
    });
    Ok(Form::new(visit, "/qualifications/new", "Record the qualification")?
        .field(
            Field::new("account", "Person", Entry::Select)
                .choices(testers.map(|person| (person.id.to_string(), person.full_name))),
        )
        .field(
            Field::new("method_version", "Method version", Entry::Select)
                .hint("Approved versions only; a new version asks for a new qualification.")
                .choices(methods.into_iter().map(|(id, words)| (id.to_string(), words))),
        )
        .field(Field::new("starts_on", "First day", Entry::Date).width(12).value(date_shown(visit.at.date())))
        .field(Field::new("ends_on", "Last day", Entry::Date).width(12))
        .field(Field::new("reference", "Training record or comparison test", Entry::Text)))
}

const NEW_LEAD: &str =
    "Outside the two days the bench refuses this person's readings by this method version.";

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Qualify a person", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Qualify a person",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (account, version) = (typed.record("account"), typed.record("method_version"));
            let (starts_on, ends_on) = (typed.date("starts_on"), typed.date("ends_on"));
            let reference = typed.text("reference", 200);
            Some(NewQualification {
                account: account?,
                method_version: version?,
                starts_on: starts_on?,
                ends_on: ends_on?,
                reference: reference?,
            })
        },
        |actor, new| acts::qualification::add(visit.db(), actor, &new),
        |_| "/qualifications".to_string(),
    )
}
