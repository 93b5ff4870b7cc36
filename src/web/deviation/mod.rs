//! Deviations: the list, opening one, and the working record of one.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::material_lot::{typed_label, typed_lot};
use super::page::Shell;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::deviation::{DeviationClass, DeviationFacts, NewDeviation};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::store;
use crate::store::deviation::Deviation;
use askama::Template;

mod one;

pub const ROUTES: &[Route] = &[
    get("/deviations", list),
    get("/deviations/new", new_page),
    post("/deviations/new", &[Act::OpenDeviation], open),
    get("/deviations/{id}", one::one),
    post("/deviations/{id}/entries", &[Act::WriteDeviation], one::write),
    post("/deviations/{id}/continuation", &[Act::CloseDeviation], one::go_on),
    post("/deviations/{id}/closure", &[Act::CloseDeviation], one::close),
];

const PAGE: i64 = 50;

struct Row {
    id: i64,
    number: i64,
    title: String,
    concerns: String,
    class: &'static str,
    occurred_on: String,
    state: &'static str,
}

#[derive(Template)]
#[template(path = "deviation/list.html")]
struct ListPage {
    shell: Shell,
    rows: Vec<Row>,
    open: usize,
    older: Option<i64>,
    may_open: bool,
}

/// What a deviation concerns, in the words of its records.
fn concerns(found: &Deviation) -> String {
    let parts = [
        found.lot_number.as_ref().map(|number| format!("lot {number}")),
        found.step_words.clone(),
        found.material_lot.as_ref().map(|(_, number)| format!("material lot {number}")),
        found.equipment.as_ref().map(|(_, code)| format!("equipment {code}")),
        found.study.as_ref().map(|(_, number)| format!("study {number}")),
    ];
    parts.into_iter().flatten().collect::<Vec<_>>().join(", ")
}

fn state(facts: &DeviationFacts) -> &'static str {
    match (facts.is_closed, facts.is_continued) {
        (true, _) => "closed",
        (false, true) => "open, work goes on",
        (false, false) => "open",
    }
}

fn class_words(facts: &DeviationFacts) -> &'static str {
    facts.class.map_or("not classified yet", DeviationClass::words)
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let found = visit.read(|reader| store::deviation::before(reader, before, PAGE + 1))?;
    let has_older = found.len() as i64 > PAGE;
    let row = |one: Deviation| Row {
        id: one.id,
        number: one.facts.number,
        concerns: concerns(&one),
        class: class_words(&one.facts),
        occurred_on: date_shown(one.occurred_on),
        state: state(&one.facts),
        title: one.title,
    };
    let rows: Vec<Row> = found.into_iter().take(PAGE as usize).map(row).collect();
    page(&ListPage {
        open: rows.iter().filter(|row| row.state != "closed").count(),
        older: rows.last().map(|row| row.id).filter(|_| has_older),
        rows,
        may_open: visit.may(Act::OpenDeviation),
        shell: Shell::of(visit, "Deviations"),
    })
}

const NEW_LEAD: &str = "What went otherwise than planned, written down when it is seen. An open one blocks the release \
    of its lot.";

/// What the address says it concerns: `?lot=7`, `?material_lot=3`, `?equipment=2`.
fn asked(visit: &Visit) -> Result<[String; 3], Failure> {
    let id = |name: &str| visit.query.get(name).and_then(|text| text.parse::<i64>().ok());
    visit.read(|reader| {
        let lot = id("lot").map(|lot| store::lot::get(reader, lot)).transpose()?;
        let material = id("material_lot").map(|lot| store::material_lot::get(reader, lot)).transpose()?;
        let equipment = id("equipment").map(|one| store::equipment::facts(reader, one)).transpose()?;
        Ok([
            lot.map(|lot| lot.number).unwrap_or_default(),
            material.map(|lot| lot.facts.number).unwrap_or_default(),
            equipment.map(|one| one.code).unwrap_or_default(),
        ])
    })
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let [lot, material_lot, equipment] = asked(visit)?;
    let scanned = "Scan or type it; may be left empty.";
    Ok(Form::new(visit, "/deviations/new", "Open the deviation")?
        .field(
            Field::new("title", "In a few words", Entry::Text).hint("Such as: mixer stopped at hydration."),
        )
        .field(
            Field::new("described", "What happened, where and when", Entry::Long)
                .hint("What was planned, what was seen, what was done at once."),
        )
        .field(
            Field::new("occurred_on", "Day it happened", Entry::Date)
                .width(12)
                .value(date_shown(visit.at.date())),
        )
        .field(Field::new("lot", "Lot", Entry::Text).width(20).hint(scanned).value(lot))
        .field(Field::new("step", "Step of its record, where there is one", Entry::Text))
        .field(
            Field::new("material_lot", "Material lot", Entry::Text)
                .width(20)
                .hint(scanned)
                .value(material_lot),
        )
        .field(Field::new("equipment", "Equipment", Entry::Text).width(20).hint(scanned).value(equipment)))
}

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["lot", "material_lot", "equipment"])?;
    form::show(visit, "Open a deviation", NEW_LEAD, new_form(visit)?)
}

fn typed_new(typed: &mut Typed<'_>) -> Option<NewDeviation> {
    let (title, described) = (typed.text("title", 120), typed.text("described", 4000));
    let occurred_on = typed.date("occurred_on");
    let lot = typed_lot(typed, "lot");
    let step = typed.maybe_text("step", 120);
    let material_lot = typed_label(typed, "material_lot", "material lot", store::material_lot::by_scan);
    let equipment = typed_label(typed, "equipment", "equipment", store::equipment::by_scan);
    Some(NewDeviation {
        title: title?,
        described: described?,
        occurred_on: occurred_on?,
        lot: lot?,
        step: step?.map(|words| (None, words)),
        material_lot: material_lot?.map(|one| one.facts.id),
        equipment: equipment?.map(|one| one.id),
        study: None,
    })
}

fn open(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Open a deviation",
        NEW_LEAD,
        new_form(visit)?,
        typed_new,
        |actor, new| acts::deviation::open(visit.db(), actor, &new),
        |id| format!("/deviations/{id}"),
    )
}
