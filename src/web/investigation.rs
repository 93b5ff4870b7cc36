//! Investigations: the list, and the working record of one.

use askama::Template;

use super::attachment::Files;
use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::{Signatures, Trail};
use super::reply::{Outcome, page, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::acts::signature::{Conclusion, authenticate};
use crate::domain::act::Act;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::investigation::WRITTEN;
use crate::domain::moment::{date_shown, until_shown};
use crate::domain::role::Role;
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::investigation::{Investigation, InvestigationEntry, NewEntry};

pub const ROUTES: &[Route] = &[
    get("/investigations", list),
    get("/investigations/{id}", investigation),
    post("/investigations/{id}/entries", &[Act::RecordInvestigationEntry], write),
    post("/investigations/{id}/steering", &[Act::RecordInvestigationEntry], steer),
    post("/investigations/{id}/conclusion", &[Act::ConcludeInvestigation], conclude),
];

struct Row {
    found: Investigation,
    known: String,
    clock: String,
}

fn row(found: Investigation, visit: &Visit) -> Row {
    let known = show::instant(&found.first_known_at, visit.at.zone);
    let due = found.clock_due_on.filter(|_| !found.is_concluded);
    let clock = due.map(|day| format!("{}, {}", date_shown(day), until_shown(visit.at.date(), day)));
    Row { known, clock: clock.unwrap_or_else(|| "no clock runs".to_string()), found }
}

#[derive(Template)]
#[template(path = "investigation/list.html")]
struct ListPage {
    shell: Shell,
    rows: Vec<Row>,
}

fn list(visit: &Visit) -> Outcome {
    let rows = visit.read(store::investigation::all)?.into_iter().map(|found| row(found, visit)).collect();
    page(&ListPage { shell: Shell::of(visit, "Investigations"), rows })
}

struct Line {
    kind: String,
    text: String,
    by: String,
    at: String,
}

#[derive(Template)]
#[template(path = "investigation/investigation.html")]
struct InvestigationPage {
    shell: Shell,
    row: Row,
    lines: Vec<Line>,
    forms: Vec<(&'static str, Form)>,
    signatures: Signatures,
    files: Files,
    trail: Trail,
}

fn investigation(visit: &Visit) -> Outcome {
    investigation_page(200, visit, visit.id("id")?, None)
}

fn investigation_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let subject = Subject::new(Kind::Investigation, id);
    let (found, entries, text, signed, trail) = visit.read(|reader| {
        Ok((
            store::investigation::get(reader, id)?,
            store::investigation::entries(reader, id)?,
            store::investigation::canonical_of(reader, id)?,
            store::signature::of(reader, Kind::Investigation, id)?,
            store::trail::of_subject(reader, subject)?,
        ))
    })?;
    let title = format!("Investigation {}", found.number);
    let mut shell = Shell::of(visit, &title).crumb("/investigations", "Investigations");
    let mut forms = if found.is_concluded { Vec::new() } else { forms(visit, id)? };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        if let Some(place) = forms.iter_mut().find(|(_, form)| form.action == failed.action) {
            place.1 = failed;
        }
    }
    let digest = sha256_hex(text.unwrap_or_default().as_bytes());
    let page = InvestigationPage {
        shell,
        lines: entries.into_iter().map(|entry| line(entry, visit)).collect(),
        forms,
        signatures: Signatures::of(&signed, &digest, visit.at.zone),
        files: Files::of(visit, subject)?,
        trail: Trail::of(&trail, visit.at.zone),
        row: row(found, visit),
    };
    page_with(status, &page)
}

fn line(entry: InvestigationEntry, visit: &Visit) -> Line {
    let lot = entry.other_lot.map(|lot| format!(" (lot {lot})")).unwrap_or_default();
    Line {
        kind: entry.kind,
        text: format!("{}{lot}", entry.text),
        by: entry.by,
        at: show::instant(&entry.at, visit.at.zone),
    }
}

fn forms(visit: &Visit, id: i64) -> Result<Vec<(&'static str, Form)>, Failure> {
    let mut forms = Vec::new();
    if visit.may(Act::RecordInvestigationEntry) {
        forms.push(("Write in it", entry_form(visit, id)?));
        forms.push(("Who steers", steering_form(visit, id)?));
    }
    if visit.may(Act::ConcludeInvestigation) {
        forms.push(("Conclude", conclusion_form(visit, id)?));
    }
    Ok(forms)
}

fn entry_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let kinds = WRITTEN.map(|kind| (kind, super::failure::capital(kind)));
    Ok(Form::new(visit, &format!("/investigations/{id}/entries"), "Write it down")?
        .field(Field::new("kind", "Kind", Entry::Radios).choices(kinds))
        .field(Field::new("text", "What was found, seen or considered", Entry::Long))
        .field(
            Field::new("other_lot", "Other lot, if one was considered", Entry::Text)
                .width(20)
                .hint("Its number, as on the label."),
        )
        .quiet())
}

fn steering_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let people = visit.read(store::account::people)?;
    let may = people.into_iter().filter(|person| {
        person.is_enabled
            && person.roles.iter().any(|role| [Role::LabManager, Role::QaReviewer].contains(role))
    });
    let choices = may.map(|person| (person.id.to_string(), person.full_name));
    Ok(Form::new(visit, &format!("/investigations/{id}/steering"), "Name who steers")?
        .field(Field::new("account", "Person", Entry::Select).choices(choices))
        .quiet())
}

fn conclusion_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/investigations/{id}/conclusion"), "Sign the conclusion")?
        .field(
            Field::new("conclusion", "Conclusion", Entry::Long)
                .hint("Cause, as far as it was found; what it means for this lot and for others."),
        )
        .signature(Meaning::Conclusion.words()))
}

fn write(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        entry_form(visit, id)?,
        typed_entry,
        |actor, new| acts::investigation::write(visit.db(), actor, id, &new),
        |()| format!("/investigations/{id}"),
        |status, form| investigation_page(status, visit, id, Some(form)),
    )
}

fn typed_entry(typed: &mut Typed<'_>) -> Option<NewEntry> {
    let kind = typed.choice("kind");
    let text = typed.text("text", 4000);
    let number = typed.maybe_text("other_lot", 60)?;
    let visit = typed.visit;
    let other_lot = match number {
        None => None,
        Some(number) => {
            let found = visit.read(|reader| store::lot::by_number(reader, &number)).ok()?;
            if found.is_none() {
                typed.fault("other_lot", format!("There is no lot {number}. Check its number."));
            }
            Some(found?.id)
        }
    };
    Some(NewEntry { kind: kind?, text: text?, other_lot, ..NewEntry::default() })
}

fn steer(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        steering_form(visit, id)?,
        |typed| typed.record("account"),
        |actor, account| acts::investigation::steer(visit.db(), actor, id, account),
        |()| format!("/investigations/{id}"),
        |status, form| investigation_page(status, visit, id, Some(form)),
    )
}

fn conclude(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        conclusion_form(visit, id)?,
        |typed| {
            let conclusion = typed.text("conclusion", 4000);
            let password = visit.form.get("password").unwrap_or_default().to_string();
            Some((conclusion?, typed.raw("user_name"), password))
        },
        |actor, (conclusion, user_name, password)| {
            let secrets = &visit.app.secrets;
            let signed = authenticate::<Conclusion>(visit.db(), secrets, actor, &user_name, &password)?;
            acts::investigation::conclude(visit.db(), actor, id, &conclusion, &signed)
        },
        |()| format!("/investigations/{id}"),
        |status, form| investigation_page(status, visit, id, Some(form)),
    )
}
