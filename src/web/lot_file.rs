//! The lot file on the screen, by section or by time, and its export.

use askama::Template;

use super::form::{self, Form};
use super::page::Shell;
use super::reply::{Outcome, Reply, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::report::lot_file::{Document, Place, by_section, by_time};
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/lots/{id}/file", file),
    post("/lots/{id}/file", &[Act::ExportLotFile], export),
    get("/lots/{id}/file/{digest}", fetch),
];

#[derive(Template)]
#[template(path = "lot_file/page.html")]
struct LotFilePage {
    shell: Shell,
    lot: i64,
    about: String,
    is_by_time: bool,
    /// User name, full name, whether it is the asked one.
    people: Vec<(String, String, bool)>,
    day: String,
    document: Document,
    /// The system behind the records, under the sections.
    systems: Vec<(String, String)>,
    form: Option<Form>,
    /// Digest and name of a lot file that was just made.
    made: Option<(String, String)>,
}

fn file(visit: &Visit) -> Outcome {
    visit.knows_query(&["order", "person", "day", "made"])?;
    let form = if visit.may(Act::ExportLotFile) { Some(export_form(visit)?) } else { None };
    file_page(200, visit, form)
}

fn export_form(visit: &Visit) -> Result<Form, Failure> {
    let action = format!("/lots/{}/file", visit.id("id")?);
    Form::new(visit, &action, "Export the lot file")
}

fn file_page(status: u16, visit: &Visit, form: Option<Form>) -> Outcome {
    let lot = visit.id("id")?;
    let asked = |name: &str| visit.query.get(name).map(str::trim).filter(|text| !text.is_empty());
    let is_by_time = asked("order") == Some("time");
    let day = asked("day").and_then(|text| crate::domain::typed::date(text, "Day").ok());
    let (file, head, systems) = visit.read(|reader| {
        let systems = store::lot_file::system::facts_at_hand(reader, visit.at.zone)?;
        Ok((store::lot_file::load(reader, lot)?, store::trail::head(reader)?, systems))
    })?;
    let document = if is_by_time {
        by_time(&file, Place::Page, asked("person"), day.map(|day| day.to_string()).as_deref())
    } else {
        by_section(&file, Place::Page)
    };
    let digest = head.map(|(_, seal)| seal).unwrap_or_default();
    let shell = Shell::of(visit, &format!("Lot file {}", file.number))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{lot}"), file.number.clone())
        .print("Lot file from the present records", &digest);
    let shell = match &form {
        Some(form) => shell.with_errors(form),
        None => shell,
    };
    let made = asked("made").filter(|digest| acts::lot_file::held(&visit.app.folder, digest).is_some());
    page_with(
        status,
        &LotFilePage {
            shell,
            lot,
            about: file.about.clone(),
            is_by_time,
            people: people(&file, asked("person")),
            day: day.map(crate::domain::moment::date_shown).unwrap_or_default(),
            document,
            systems: if is_by_time { Vec::new() } else { systems },
            form,
            made: made.map(|digest| (digest.to_string(), show::digest(digest))),
        },
    )
}

/// Those who acted on the lot, for the choice of a person.
fn people(file: &crate::domain::lot_file::LotFile, asked: Option<&str>) -> Vec<(String, String, bool)> {
    let Some(table) = file.table("entries") else { return Vec::new() };
    let mut people: Vec<(String, String, bool)> = Vec::new();
    for row in &table.rows {
        let name = table.text(row, "user_name");
        if !people.iter().any(|(known, _, _)| *known == name) {
            let is_asked = asked == Some(name.as_str());
            people.push((name, table.text(row, "full_name"), is_asked));
        }
    }
    people.sort_by(|one, other| one.1.cmp(&other.1));
    people
}

fn export(visit: &Visit) -> Outcome {
    let lot = visit.id("id")?;
    form::submit(
        visit,
        export_form(visit)?,
        |_| Some(()),
        |actor, ()| {
            let made = acts::lot_file::make(visit.db(), actor, lot, &visit.app.folder, false)?;
            acts::lot_file::hold(&visit.app.folder, &made)?;
            Ok(made.digest)
        },
        |digest| format!("/lots/{lot}/file?made={digest}"),
        |status, form| file_page(status, visit, Some(form)),
    )
}

/// A made lot file, for those who may export one.
fn fetch(visit: &Visit) -> Outcome {
    let actor = visit.actor()?;
    if Act::ExportLotFile.role_for(&actor.roles).is_none() {
        return Err(Failure::Denied(Act::ExportLotFile));
    }
    let lot = visit.id("id")?;
    let number = visit.read(|reader| store::lot::get(reader, lot))?.number;
    let bytes = acts::lot_file::held(&visit.app.folder, visit.param("digest")?)
        .ok_or_else(|| Failure::missing("exported lot file with this digest"))?;
    Ok(Reply::File {
        media_type: "application/zip",
        name: acts::lot_file::name(&number),
        bytes,
        is_attachment: true,
    })
}
