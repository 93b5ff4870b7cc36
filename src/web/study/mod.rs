//! Studies: the list, starting one, and one with its arms, ages, ledger and labels.

pub(in crate::web) mod one;
mod start;

use askama::Template;

use super::page::Shell;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::domain::act::Act;
use crate::domain::moment::date_shown;
use crate::store;
use crate::store::study::Study;

pub const ROUTES: &[Route] = &[
    get("/studies", list),
    get("/studies/new", start::choose_page),
    get("/studies/new/check", start::check_page),
    post("/studies/new/check", &[Act::StartStudy], start::start),
    get("/studies/{id}", one::one),
    get("/studies/{id}/labels", one::labels),
    post("/studies/{id}/trigger", &[Act::TriggerArm], one::trigger),
];

const PAGE: i64 = 50;

#[derive(Template)]
#[template(path = "study/list.html")]
struct StudiesPage {
    shell: Shell,
    rows: Vec<(Study, String)>,
    older: Option<i64>,
    may_start: bool,
}

fn started(study: &Study) -> String {
    study.started_on.map_or("not stated".to_string(), date_shown)
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let found = visit.read(|reader| store::study::before(reader, before, PAGE + 1))?;
    let has_older = found.len() as i64 > PAGE;
    let rows: Vec<(Study, String)> = found
        .into_iter()
        .take(PAGE as usize)
        .map(|study| {
            let on = started(&study);
            (study, on)
        })
        .collect();
    let older = rows.last().map(|(study, _)| study.id).filter(|_| has_older);
    let may_start = visit.may(Act::StartStudy);
    page(&StudiesPage { shell: Shell::of(visit, "Studies"), rows, older, may_start })
}
