//! Overrides of a register's stop, signed by QA.

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
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::moment::{date_shown, plus_days};
use crate::domain::role::Role;
use crate::domain::signature::Meaning;
use crate::domain::stop::{NewOverride, Stop};
use crate::store;
use crate::store::stop::Override;

pub const ROUTES: &[Route] = &[
    get("/overrides", list),
    get("/overrides/new", new_page),
    post("/overrides/new", &[Act::OverrideStop], lift),
];

/// Overrides as a table, each with its signature.
pub fn table(overrides: &[Override], visit: &Visit) -> Table {
    Table::new(
        "Newest first; each holds for one day",
        &["Stop", "Day", "Why", "Signed by", "Signed at", "Digest"],
        "No stop was lifted.",
    )
    .rows(overrides.iter().map(|one| {
        let matches = sha256_hex(one.lifted.canonical().as_bytes()) == one.digest;
        let start: String = one.digest.chars().take(16).collect();
        let digest = if matches { show::digest(&start) } else { "does not match this content".to_string() };
        vec![
            Cell::text(&one.words),
            Cell::text(date_shown(one.lifted.valid_on)),
            Cell::text(&one.lifted.reason),
            Cell::noted(&one.signer_name, Meaning::Override.words()),
            Cell::text(show::instant(&one.signed_at, visit.at.zone)),
            Cell::text(digest),
        ]
    }))
}

fn list(visit: &Visit) -> Outcome {
    let since = plus_days(visit.at.date(), -365);
    let found = visit.read(|reader| store::stop::since(reader, since))?;
    let lead = format!(
        "{} in the last 365 days.",
        show::counted(found.len(), "stop was lifted by QA", "stops were lifted by QA")
    );
    Record::new(Shell::of(visit, "Lifted stops").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::OverrideStop), "/overrides/new", "Lift a stop for a day")
        .table("", table(&found, visit))
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::QaReviewer], Act::OverrideStop)?;
    let (instruments, people, methods) = visit.read(|reader| {
        Ok((
            store::instrument::all(reader, visit.at.date())?,
            store::account::people(reader)?,
            store::qualification::method_choices(reader)?,
        ))
    })?;
    let instruments = instruments
        .into_iter()
        .map(|facts| (facts.id.to_string(), format!("{}, {}", facts.code, facts.name)));
    let people = people
        .into_iter()
        .filter(|person| person.roles.iter().any(|role| matches!(role, Role::Analyst | Role::LabManager)))
        .map(|person| (person.id.to_string(), person.full_name));
    let methods = methods.into_iter().map(|(id, words)| (id.to_string(), words));
    Ok(Form::new(visit, "/overrides/new", "Sign and lift the stop")?
        .field(
            Field::new("stop", "Which stop", Entry::Radios)
                .choices(Stop::ALL.map(|stop| (stop.words(), stop.words()))),
        )
        .field(
            Field::new("instrument", "Instrument", Entry::Select)
                .hint("For calibration, daily check and out of service.")
                .choices(instruments)
                .value(visit.query.get("instrument").unwrap_or_default()),
        )
        .field(
            Field::new("account", "Person", Entry::Select)
                .hint("For a qualification, with the method version.")
                .choices(people),
        )
        .field(Field::new("method_version", "Method version", Entry::Select).choices(methods))
        .field(Field::new("valid_on", "Day", Entry::Date).width(12).value(date_shown(visit.at.date())))
        .field(
            Field::new("reason", "Why", Entry::Long)
                .hint("At least 20 characters: what makes the reading trustworthy all the same."),
        )
        .signature(Meaning::Override.words()))
}

const LEAD: &str =
    "One stop, for one instrument or person, for one day. It stands in the history and in the lot file.";

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["instrument"])?;
    form::show(visit, "Lift a stop for a day", LEAD, new_form(visit)?)
}

fn lift(visit: &Visit) -> Outcome {
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit_page(
        visit,
        "Lift a stop for a day",
        LEAD,
        new_form(visit)?,
        |typed| {
            let stop = typed.choice("stop").and_then(|words| Stop::from_words(&words));
            let (instrument, account) = (typed.maybe_record("instrument"), typed.maybe_record("account"));
            let version = typed.maybe_record("method_version");
            let (valid_on, reason) = (typed.date("valid_on"), typed.text("reason", 2000));
            let password = typed.visit.form.get("password")?.to_string();
            let stop = stop?;
            let of_instrument = stop.is_of_instrument();
            let new = NewOverride {
                stop,
                instrument: instrument?.filter(|_| of_instrument),
                account: account?.filter(|_| !of_instrument),
                method_version: version?.filter(|_| !of_instrument),
                valid_on: valid_on?,
                reason: reason?,
            };
            Some((new, typed.raw("user_name"), password))
        },
        |actor, (new, user_name, password)| {
            let signed = acts::signature::authenticate(db, secrets, actor, &user_name, &password)?;
            acts::stop::lift(db, actor, &new, signed)
        },
        |_| "/overrides".to_string(),
    )
}
