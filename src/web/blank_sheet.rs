//! Blank sheets: the list with what is still out, issuing one, and one to print and to account for.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::material_lot::typed_lot;
use super::page::Shell;
use super::record::Record;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::acts::blank_sheet::NewSheet;
use crate::domain::act::Act;
use crate::domain::blank_sheet::SheetEventKind;
use crate::domain::failure::Failure;
use crate::store;
use crate::store::blank_sheet::BlankSheet;

pub const ROUTES: &[Route] = &[
    get("/blank-sheets", list),
    get("/blank-sheets/new", new_page),
    post("/blank-sheets/new", &[Act::IssueBlankSheet], issue),
    get("/blank-sheets/{id}", one),
    post("/blank-sheets/{id}/events", &[Act::RecordBlankSheet], record),
];

const PAGE: i64 = 50;

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let found = visit.read(|reader| store::blank_sheet::before(reader, before, PAGE + 1))?;
    let has_older = found.len() as i64 > PAGE;
    let shown: Vec<BlankSheet> = found.into_iter().take(PAGE as usize).collect();
    let older = shown.last().map(|one| format!("/blank-sheets?before={}", one.id)).filter(|_| has_older);
    let open = shown.iter().filter(|one| !one.facts().is_settled()).count();
    let lead = match (shown.len(), open) {
        (0, _) => "No sheet was given out.".to_string(),
        (count, 0) => format!("All {count} are accounted for: verified or voided."),
        (count, open) => format!("{open} of {count} are not accounted for yet."),
    };
    let heads = ["Sheet#", "For", "Lot", "Given to", "At", "State"];
    let empty =
        "A blank sheet is given out when the network is down; what is written on it is entered later.";
    let table = Table::new("Newest first", &heads, empty).rows(shown.iter().map(|one| {
        vec![
            Cell::link(format!("/blank-sheets/{}", one.id), one.number.to_string()),
            Cell::text(&one.purpose),
            match &one.lot {
                Some((lot, number)) => Cell::link(format!("/lots/{lot}"), number),
                None => Cell::text(""),
            },
            Cell::text(&one.holder),
            Cell::text(show::instant(&one.issued_at, visit.at.zone)),
            Cell::text(one.facts().state()),
        ]
    }));
    Record::new(Shell::of(visit, "Blank sheets"), lead)
        .link_if(visit.may(Act::IssueBlankSheet), "/blank-sheets/new", "Give out a sheet")
        .table("", table)
        .quiet_link_if(older.is_some(), older.unwrap_or_default(), "Older sheets")
        .show()
}

const NEW_LEAD: &str =
    "For a network failure. Each sheet has its own number, goes to one person and comes back.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let people = visit.read(store::account::people)?;
    let people = people.into_iter().filter(|person| person.is_enabled);
    Ok(Form::new(visit, "/blank-sheets/new", "Give it out")?
        .field(
            Field::new("purpose", "What it is for", Entry::Text)
                .hint("Which record, which step or test. It is printed on the sheet."),
        )
        .field(Field::new("lot", "Lot", Entry::Text).width(20).hint("Scan or type it; may be left empty."))
        .field(
            Field::new("issued_to", "Given to", Entry::Select)
                .choices(people.map(|person| (person.id.to_string(), person.full_name))),
        ))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Give out a blank sheet", NEW_LEAD, new_form(visit)?)
}

fn issue(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Give out a blank sheet",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (purpose, lot) = (typed.text("purpose", 200), typed_lot(typed, "lot"));
            let issued_to = typed.record("issued_to");
            Some(NewSheet { purpose: purpose?, lot: lot?, issued_to: issued_to? })
        },
        |actor, new| acts::blank_sheet::issue(visit.db(), actor, &new),
        |id| format!("/blank-sheets/{id}"),
    )
}

#[derive(Template)]
#[template(path = "blank_sheet/blank_sheet.html")]
struct SheetPage {
    shell: Shell,
    sheet: BlankSheet,
    issued_at: String,
    state: &'static str,
    events: Table,
    /// Empty rows to write in.
    rows: Vec<u8>,
    form: Option<Form>,
}

fn one(visit: &Visit) -> Outcome {
    sheet_page(200, visit, None)
}

fn sheet_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let sheet = visit.read(|reader| store::blank_sheet::get(reader, id))?;
    let facts = sheet.facts();
    let title = format!("Blank sheet {}", sheet.number);
    let mut shell = Shell::of(visit, &title).crumb("/blank-sheets", "Blank sheets");
    shell.print_state = format!("Blank sheet {}, {}", sheet.number, facts.state());
    let may = !facts.is_settled() && visit.may(Act::RecordBlankSheet);
    let form = match failed {
        Some(failed) => {
            shell = shell.with_errors(&failed);
            Some(failed)
        }
        None if may => Some(event_form(visit, id, facts.next())?),
        None => None,
    };
    let heads = ["What", "Words", "By", "When"];
    let empty = "It was given out and has not come back.";
    let events = Table::new("Oldest first", &heads, empty).rows(sheet.events.iter().map(|event| {
        vec![
            Cell::text(event.kind.words()),
            Cell::text(&event.text),
            Cell::text(&event.by),
            Cell::text(show::instant(&event.at, visit.at.zone)),
        ]
    }));
    let page = SheetPage {
        shell,
        issued_at: show::instant(&sheet.issued_at, visit.at.zone),
        state: facts.state(),
        events,
        rows: (1..=12).collect(),
        form,
        sheet,
    };
    page_with(status, &page)
}

fn event_form(visit: &Visit, id: i64, next: &[SheetEventKind]) -> Result<Form, Failure> {
    let words = |kind: SheetEventKind| match kind {
        SheetEventKind::Returned => "It came back, written on",
        SheetEventKind::Voided => "It is voided",
        SheetEventKind::Transcribed => "It was entered into the record",
        SheetEventKind::Verified => "I compared it with what was entered, line by line",
    };
    let choices = next.iter().map(|kind| (kind.words(), words(*kind)));
    Ok(Form::new(visit, &format!("/blank-sheets/{id}/events"), "Record it")?
        .field(Field::new("kind", "What became of it", Entry::Radios).choices(choices))
        .field(
            Field::new(
                "text",
                "Where it is kept, why it is voided, where it was entered, what was compared",
                Entry::Long,
            )
            .hint("At least ten characters."),
        ))
}

fn record(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        event_form(visit, id, &SheetEventKind::ALL)?,
        |typed| {
            let (kind, text) = (typed.choice("kind"), typed.text("text", 1000));
            Some((SheetEventKind::from_words(&kind?)?, text?))
        },
        |actor, (kind, text)| acts::blank_sheet::record(visit.db(), actor, id, kind, &text),
        |()| format!("/blank-sheets/{id}"),
        |status, form| sheet_page(status, visit, Some(form)),
    )
}
