//! One container on study: where it stands, and what became of it.

use askama::Template;

use super::field::{Entry, Field};
use super::follow_through::{Followed, observe_form, typed};
use super::form::{self, Form};
use super::page::Shell;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::study::one::what_words;
use super::visit::Visit;
use crate::acts;
use crate::acts::container::NewEvent;
use crate::domain::act::Act;
use crate::domain::container::{Event, Purpose};
use crate::domain::failure::Failure;
use crate::store;
use crate::store::container::{Container, LedgerLine};

pub const ROUTES: &[Route] = &[
    get("/containers/{id}", one),
    post("/containers/{id}/events", &[Act::RecordContainer], record),
    post("/containers/{id}/observations", &[Act::RecordContainer], observe),
];

#[derive(Template)]
#[template(path = "container/container.html")]
struct ContainerPage {
    shell: Shell,
    container: Container,
    where_it_is: String,
    rows: Vec<(String, String, String, String, i64)>,
    form: Option<Form>,
    followed: Option<Followed>,
    observe: Option<Form>,
}

fn one(visit: &Visit) -> Outcome {
    container_page(200, visit, visit.id("id")?, None, None)
}

fn row(visit: &Visit, line: LedgerLine) -> (String, String, String, String, i64) {
    let what = what_words(&line);
    (show::instant(&line.at, visit.at.zone), line.who, what, line.note.unwrap_or_default(), line.act)
}

fn container_page(
    status: u16,
    visit: &Visit,
    id: i64,
    failed: Option<Form>,
    unobserved: Option<Form>,
) -> Outcome {
    let (container, events) = visit
        .read(|reader| Ok((store::container::get(reader, id)?, store::container::events(reader, id)?)))?;
    let is_destroyed = container.event.as_deref() == Some(Event::Destroyed.words());
    let form = match failed {
        Some(failed) => Some(failed),
        None if visit.may(Act::RecordContainer) && !is_destroyed => Some(event_form(visit, id)?),
        None => None,
    };
    let mut shell = Shell::of(visit, &format!("Container {}", container.label))
        .crumb("/studies", "Studies")
        .crumb(format!("/studies/{}", container.study), container.study_number.clone());
    let is_followed = container.purpose == Purpose::FollowThrough.words();
    let observe = match unobserved {
        Some(failed) => Some(failed),
        None if is_followed && container.event.is_none() => observe_form(visit, id)?,
        None => None,
    };
    for form in form.iter().chain(&observe).filter(|form| form.has_errors()) {
        shell = shell.with_errors(form);
    }
    let where_it_is = match (&container.event, &container.chamber_code) {
        (Some(event), _) => event.clone(),
        (None, Some(chamber)) => format!("in chamber {chamber}"),
        (None, None) => "kept by the user's conditions".to_string(),
    };
    let followed = if is_followed { Some(Followed::of(visit, id)?) } else { None };
    let rows = events.into_iter().map(|line| row(visit, line)).collect();
    page_with(status, &ContainerPage { shell, container, where_it_is, rows, form, followed, observe })
}

fn event_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let people = visit.read(store::account::people)?;
    let people = people.into_iter().filter(|person| person.is_enabled);
    let witnesses = people.map(|person| (person.id.to_string(), person.full_name));
    let kinds = Event::BY_HAND.map(|event| (event.words(), event.words()));
    Ok(Form::new(visit, &format!("/containers/{id}/events"), "Record it")?
        .field(Field::new("kind", "What became of it", Entry::Select).choices(kinds))
        .field(Field::new("note", "How it came about", Entry::Text).hint("At least ten characters."))
        .field(
            Field::new("witness", "Witness", Entry::Select)
                .choices(witnesses)
                .hint("For a destruction: another person who saw it."),
        ))
}

fn record(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        event_form(visit, id)?,
        |typed| {
            let event = typed.choice("kind").and_then(|words| Event::from_words(&words));
            let note = typed.text("note", 300);
            let witness = typed.maybe_record("witness");
            Some(NewEvent { event: event?, note: note?, witness: witness? })
        },
        |actor, new| acts::container::record(visit.db(), actor, id, &new),
        |()| format!("/containers/{id}"),
        |status, form| container_page(status, visit, id, Some(form), None),
    )
}

/// Weight, heights and photo of a container that is never opened.
fn observe(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    visit.read(|reader| store::container::get(reader, id))?;
    let Some(form) = observe_form(visit, id)? else { return Err(Failure::Denied(Act::RecordContainer)) };
    let upload = visit.uploads.iter().find(|upload| upload.field == "photo" && !upload.bytes.is_empty());
    let photo = upload.map(|upload| (upload.file_name.as_str(), upload.bytes.as_slice()));
    form::submit(
        visit,
        form,
        typed,
        |actor, new| acts::follow_through::observe(visit.db(), &visit.app.folder, actor, id, &new, photo),
        |()| format!("/containers/{id}"),
        |status, form| container_page(status, visit, id, None, Some(form)),
    )
}
