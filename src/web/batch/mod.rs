//! Batch records: those in the making, starting one, and one with its steps, yields and closing.

pub mod close;
pub mod correction;
pub mod entry;
pub mod forms;
pub mod late;
pub mod record;
pub mod start;
pub mod step;
pub mod whole;
pub mod yields;

use askama::Template;

use super::page::Shell;
use super::part::StatusMark;
use super::reply::{Outcome, page};
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::domain::act::Act;
use crate::domain::moment::date_shown;
use crate::domain::status::Status;
use crate::store;
use crate::store::batch::{BatchLine, OpenBatch};

pub const ROUTES: &[Route] = &[
    get("/batches", list),
    get("/batches/new", start::page),
    post("/batches/new", &[Act::StartBatchRecord], start::start),
    get("/batches/{id}", record::page).at_bench(),
    get("/batches/{id}/record", whole::page),
    get("/batches/{id}/steps/{step}", step::page).at_bench(),
    post("/batches/{id}/steps/{step}/start", &[Act::RecordStep], entry::start).at_bench(),
    post("/batches/{id}/steps/{step}/weighing", &[Act::RecordStep], entry::weigh).at_bench(),
    post("/batches/{id}/steps/{step}/values/{value}", &[Act::RecordStep], entry::value).at_bench(),
    post("/batches/{id}/steps/{step}/stop", &[Act::RecordStep], entry::stop).at_bench(),
    post("/batches/{id}/steps/{step}/resume", &[Act::RecordStep], entry::resume).at_bench(),
    post("/batches/{id}/steps/{step}/note", &[Act::RecordStep], entry::note).at_bench(),
    post("/batches/{id}/steps/{step}/answers/{entry}", &[Act::RecordStep], entry::answer).at_bench(),
    post("/batches/{id}/steps/{step}/end", &[Act::RecordStep], entry::end).at_bench(),
    post("/batches/{id}/steps/{step}/skip", &[Act::SkipStep], entry::skip).at_bench(),
    post("/batches/{id}/steps/{step}/repeat", &[Act::RepeatStep], entry::repeat).at_bench(),
    post("/batches/{id}/steps/{step}/check", &[Act::CheckStep], entry::check).at_bench(),
    post("/batches/{id}/steps/{step}/second/{entry}", &[Act::CheckStep], entry::weigh_again).at_bench(),
    get("/batches/{id}/steps/{step}/entries/{entry}", correction::page).at_bench(),
    post("/batches/{id}/steps/{step}/entries/{entry}", &[Act::CorrectStep], correction::correct).at_bench(),
    get("/batches/{id}/yields/{phase}", yields::page).at_bench(),
    post("/batches/{id}/yields/{phase}", &[Act::RecordYield], yields::record).at_bench(),
    post("/batches/{id}/yields/{phase}/check", &[Act::CheckYield], yields::check).at_bench(),
    post("/batches/{id}/close", &[Act::CloseBatchRecord], close::close).at_bench(),
    post("/batches/{id}/reopen", &[Act::ReopenBatchRecord], close::reopen).at_bench(),
];

const PAGE: i64 = 50;

struct Row {
    path: String,
    name: String,
    note: String,
    status: StatusMark,
}

#[derive(Template)]
#[template(path = "batch/list.html")]
struct BatchesPage {
    shell: Shell,
    lead: String,
    may_start: bool,
    open: Vec<Row>,
    settled: Table,
    older: Option<i64>,
}

fn open_row(one: &OpenBatch) -> Row {
    let record = &one.record;
    let next = record::next_words(&record.content, &one.entries, &one.yields);
    let steps = record.content.steps().len();
    let done = record::settled(&record.content, &one.entries, &one.yields);
    Row {
        path: format!("/batches/{}", record.id),
        name: format!(
            "{} · {} {} · {}",
            record.lot_number, record.content.size, record.content.size_unit, record.content.product
        ),
        note: next,
        status: StatusMark::counting(Status::InProgress, done, steps, "steps done"),
    }
}

fn settled_row(one: BatchLine) -> Vec<Cell> {
    vec![
        Cell::link(format!("/batches/{}", one.id), &one.lot_number),
        Cell::text(one.product),
        Cell::text(one.made_on.map(date_shown).unwrap_or_default()),
        Cell::number(one.deviations.to_string()),
        Cell::or_missing(one.decision, "not decided on"),
    ]
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let (open, mut settled) = visit.read(|reader| {
        Ok((store::batch::open(reader)?, store::batch::settled_before(reader, before, PAGE + 1)?))
    })?;
    let has_older = settled.len() as i64 > PAGE;
    settled.truncate(PAGE as usize);
    let older = settled.last().map(|one| one.id).filter(|_| has_older);
    let lead = match open.len() {
        0 => "No lot is in the making.".to_string(),
        count => format!("{} in the making.", show::counted(count, "lot is", "lots are")),
    };
    let heads = ["Record of lot", "Product", "Made on", "Deviations#", "Decision"];
    let empty =
        "No record is closed yet. One is started from an approved master record and closed when all is done.";
    page(&BatchesPage {
        shell: Shell::of(visit, "Batches"),
        lead,
        may_start: visit.may(Act::StartBatchRecord),
        open: open.iter().map(open_row).collect(),
        settled: Table::new("Newest first", &heads, empty).rows(settled.into_iter().map(settled_row)),
        older,
    })
}
