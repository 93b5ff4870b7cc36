//! Formulations: the list, one with its versions, writing and signing a version, comparing two.

pub mod compare;
pub mod draft;
pub mod version;

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::part::Trail;
use super::record::Record;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::formulation::NewFormulation;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::formulation::{Formulation, Lot};
use crate::store::version::Version;

pub const ROUTES: &[Route] = &[
    get("/formulations", list),
    get("/formulations/new", new_page),
    post("/formulations/new", &[Act::AddFormulation], add),
    get("/formulations/{id}", formulation),
    get("/formulations/{id}/compare", compare::compare),
    get("/formulations/{id}/draft", draft::new_page),
    post("/formulations/{id}/draft", &[Act::DraftFormulationVersion], draft::write),
    get("/formulation-versions/{id}", version::version),
    post("/formulation-versions/{id}/sign", &[Act::SignFormulationVersion], version::sign),
    get("/formulation-versions/{id}/edit", draft::edit_page),
    post("/formulation-versions/{id}/edit", &[Act::DraftFormulationVersion], draft::rewrite),
];

/// A formulation as a row of a list.
pub fn row(one: &Formulation) -> Vec<Cell> {
    vec![
        Cell::Link {
            path: format!("/formulations/{}", one.id),
            words: one.code.clone(),
            note: one.name.clone(),
        },
        Cell::number(one.versions.to_string()),
        Cell::or_missing(one.approved.map(|number| format!("version {number}")), "none yet"),
        Cell::number(one.lots.to_string()),
    ]
}

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::formulation::all)?;
    let approved = found.iter().filter(|one| one.approved.is_some()).count();
    let lead = format!(
        "{}, {approved} with an approved version.",
        show::counted(found.len(), "formulation", "formulations")
    );
    let empty =
        "No formulation is recorded yet. It belongs to a product: add the product, then its formulation.";
    let heads = ["Formulation", "Versions#", "Approved version", "Lots#", "Product"];
    let table = Table::new("By product and code", &heads, empty).rows(found.iter().map(|one| {
        let mut cells = row(one);
        cells.push(Cell::Link {
            path: format!("/products/{}", one.product),
            words: one.product_code.clone(),
            note: one.product_name.clone(),
        });
        cells
    }));
    Record::new(Shell::of(visit, "Formulations"), lead)
        .link_if(visit.may(Act::AddFormulation), "/formulations/new", "Add a formulation")
        .quiet_link_if(true, "/materials", "Materials")
        .quiet_link_if(true, "/rack", "Rack")
        .table("", table)
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let products = visit.read(store::product::all)?;
    let products =
        products.into_iter().map(|one| (one.id.to_string(), format!("{}, {}", one.code, one.name)));
    Ok(Form::new(visit, "/formulations/new", "Add the formulation")?
        .field(
            Field::new("product", "Product", Entry::Select)
                .choices(products)
                .value(visit.query.get("product").unwrap_or_default()),
        )
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Such as F-104-A. Never used twice."))
        .field(
            Field::new("name", "Name", Entry::Text)
                .hint("What sets it apart, such as its suspending system."),
        ))
}

const NEW_LEAD: &str =
    "A formulation has versions: written as a draft, signed by the author, approved by a second person.";

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["product"])?;
    form::show(visit, "Add a formulation", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a formulation",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (product, code, name) =
                (typed.record("product"), typed.text("code", 40), typed.text("name", 120));
            Some(NewFormulation { product: product?, code: code?, name: name? })
        },
        |actor, new| acts::formulation::add(visit.db(), actor, &new),
        |id| format!("/formulations/{id}"),
    )
}

#[derive(Template)]
#[template(path = "formulation/formulation.html")]
struct FormulationPage {
    shell: Shell,
    formulation: Formulation,
    rows: Vec<VersionRow>,
    /// Path and words of what a formulator does next.
    next: Option<(String, &'static str)>,
    trail: Trail,
}

struct VersionRow {
    id: i64,
    number: i64,
    reason: String,
    state: &'static str,
    by: String,
    at: String,
    lots: String,
    is_newest: bool,
    is_before: bool,
}

fn version_rows(versions: &[Version], lots: &[Lot], visit: &Visit) -> Vec<VersionRow> {
    versions
        .iter()
        .enumerate()
        .map(|(at, version)| {
            let count = lots.iter().filter(|lot| lot.formulation_version == version.id).count();
            VersionRow {
                id: version.id,
                number: version.number,
                reason: version.reason.clone(),
                state: version.state.words(),
                by: version.author_name.clone(),
                at: show::instant(&version.written_at, visit.at.zone),
                lots: if count == 0 { "no lot".to_string() } else { show::counted(count, "lot", "lots") },
                is_newest: at == 0,
                is_before: at == 1,
            }
        })
        .collect()
}

/// What a formulator does next with these versions.
fn next(visit: &Visit, id: i64, versions: &[Version]) -> Option<(String, &'static str)> {
    if !visit.may(Act::DraftFormulationVersion) {
        return None;
    }
    match versions.first() {
        None => Some((format!("/formulations/{id}/draft"), "Write version 1")),
        Some(newest) if newest.state == VersionState::Draft => {
            Some((format!("/formulation-versions/{}/edit", newest.id), "Change the draft"))
        }
        Some(newest) if newest.state == VersionState::SignedByAuthor => {
            Some((format!("/formulation-versions/{}", newest.id), "See the version that waits for approval"))
        }
        Some(_) => Some((format!("/formulations/{id}/draft"), "Write a new version")),
    }
}

fn formulation(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (formulation, versions, lots, lines) = visit.read(|reader| {
        Ok((
            store::formulation::get(reader, id)?,
            store::version::of_parent(reader, Versioned::Formulation, id)?,
            store::formulation::lots(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Formulation, id))?,
        ))
    })?;
    page(&FormulationPage {
        shell: Shell::of(visit, &formulation.code).crumb("/formulations", "Formulations"),
        rows: version_rows(&versions, &lots, visit),
        next: next(visit, id, &versions),
        formulation,
        trail: Trail::of(&lines, visit.at.zone),
    })
}
