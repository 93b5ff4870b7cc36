//! Chambers: the list, adding one, and one with what stands in it.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::chamber::{NewChamber, qualification_warning};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::chamber::Chamber;

pub const ROUTES: &[Route] = &[
    get("/chambers", list),
    get("/chambers/new", new_page),
    post("/chambers/new", &[Act::AddChamber], add),
    get("/chambers/{id}", one),
];

#[derive(Template)]
#[template(path = "chamber/list.html")]
struct ChambersPage {
    shell: Shell,
    rows: Vec<Row>,
    may_add: bool,
}

struct Row {
    id: i64,
    code: String,
    name: String,
    condition: i64,
    condition_name: String,
    location: String,
    due_on: String,
    warning: Option<String>,
    containers: i64,
}

fn row(visit: &Visit, chamber: Chamber) -> Row {
    let due_on = chamber.qualification_due_on;
    Row {
        warning: qualification_warning(&chamber.code, due_on, visit.at.date()),
        id: chamber.id,
        code: chamber.code,
        name: chamber.name,
        condition: chamber.condition,
        condition_name: chamber.condition_name,
        location: chamber.location,
        due_on: date_shown(due_on),
        containers: chamber.containers,
    }
}

fn list(visit: &Visit) -> Outcome {
    let chambers = visit.read(store::chamber::all)?;
    let rows = chambers.into_iter().map(|chamber| row(visit, chamber)).collect();
    let shell = Shell::of(visit, "Chambers").crumb("/definitions", "Definitions");
    page(&ChambersPage { shell, rows, may_add: visit.may(Act::AddChamber) })
}

#[derive(Template)]
#[template(path = "chamber/chamber.html")]
struct ChamberPage {
    shell: Shell,
    row: Row,
    trail: Trail,
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (chamber, lines) = visit.read(|reader| {
        Ok((
            store::chamber::get(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Chamber, id))?,
        ))
    })?;
    let shell = Shell::of(visit, &format!("Chamber {}", chamber.code)).crumb("/chambers", "Chambers");
    page(&ChamberPage { shell, row: row(visit, chamber), trail: Trail::of(&lines, visit.at.zone) })
}

const LEAD: &str =
    "A chamber keeps one condition. Its containers are listed by the studies that stand in it.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::LabManager], Act::AddChamber)?;
    let conditions = visit.read(store::condition::all)?;
    let choices = conditions.into_iter().map(|condition| (condition.id.to_string(), condition.name));
    Ok(Form::new(visit, "/chambers/new", "Add the chamber")?
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Such as CH-04; never used twice."))
        .field(Field::new("name", "Name", Entry::Text))
        .field(Field::new("condition", "Condition", Entry::Select).choices(choices))
        .field(Field::new("location", "Where it stands", Entry::Text))
        .field(Field::new("qualification_due_on", "Next qualification due on", Entry::Date).width(12)))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "New chamber", LEAD, new_form(visit)?)
}

fn read(typed: &mut Typed<'_>) -> Option<NewChamber> {
    let code = typed.text("code", 20);
    let name = typed.text("name", 80);
    let condition = typed.record("condition");
    let location = typed.text("location", 80);
    let due_on = typed.date("qualification_due_on");
    Some(NewChamber {
        code: code?,
        name: name?,
        condition: condition?,
        location: location?,
        qualification_due_on: due_on?,
    })
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "New chamber",
        LEAD,
        new_form(visit)?,
        read,
        |actor, new| acts::chamber::add(visit.db(), actor, &new),
        |id| format!("/chambers/{id}"),
    )
}
