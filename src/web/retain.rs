//! Retain samples: the list by what is due, and one with its looks.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::{date_shown, until_shown};
use crate::domain::retain::{NewRetain, NewRetainEvent, RetainEventKind, RetainFacts};
use crate::domain::stock::UNITS;
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::lot::Lot;
use crate::store::retain::{Retain, RetainEvent};

pub const ROUTES: &[Route] = &[
    get("/retains", list),
    get("/lots/{id}/retains/new", new_page),
    post("/lots/{id}/retains/new", &[Act::KeepRetain], keep),
    get("/retains/{id}", one),
    post("/retains/{id}/events", &[Act::RecordRetainEvent], record_event),
];

const PAGE: i64 = 50;

fn next_look(facts: &RetainFacts, visit: &Visit) -> String {
    if facts.is_discarded {
        return "discarded".to_string();
    }
    let day = facts.next_look_on();
    format!("{}, {}", date_shown(day), until_shown(visit.at.date(), day).replace("closes", "due"))
}

fn kept_until(facts: &RetainFacts) -> String {
    facts.kept_until().map_or("no expiry yet".to_string(), date_shown)
}

/// The retains as a table, for the list and for the page of a lot.
pub fn table(found: &[Retain], visit: &Visit) -> Table {
    let heads = ["Retain", "Lot", "Left#", "Where", "Next look", "Kept until"];
    let empty = "No retain is recorded here. It is kept with the release samples, twice what all tests take.";
    Table::new("Retains", &heads, empty).rows(found.iter().map(|one| {
        vec![
            Cell::link(format!("/retains/{}", one.id), &one.facts.number),
            Cell::Link {
                path: format!("/lots/{}", one.lot),
                words: one.lot_number.clone(),
                note: one.product.clone(),
            },
            Cell::number(one.facts.containers_left.to_string()),
            Cell::text(&one.location),
            Cell::text(next_look(&one.facts, visit)),
            Cell::text(kept_until(&one.facts)),
        ]
    }))
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let found = visit.read(|reader| store::retain::before(reader, before, PAGE + 1))?;
    let has_older = found.len() as i64 > PAGE;
    let mut shown: Vec<Retain> = found.into_iter().take(PAGE as usize).collect();
    let older = shown.last().map(|one| format!("/retains?before={}", one.id)).filter(|_| has_older);
    shown.sort_by_key(|one| (one.facts.is_discarded, one.facts.next_look_on()));
    let today = visit.at.date();
    let late = shown.iter().filter(|one| !one.facts.is_discarded && one.facts.next_look_on() < today).count();
    let lead = match late {
        0 => "Retain samples, looked at once a year; none is late.".to_string(),
        late => format!("Retain samples, looked at once a year; {late} are late."),
    };
    Record::new(Shell::of(visit, "Retains"), lead)
        .table("", table(&shown, visit))
        .quiet_link_if(older.is_some(), older.unwrap_or_default(), "Older retains")
        .show()
}

const NEW_LEAD: &str =
    "In the pack it is sold in, under its label condition, at least twice what all tests take.";

fn new_form(visit: &Visit, lot: &Lot) -> Result<Form, Failure> {
    let number = |name: &str, label: &str| Field::new(name, label, Entry::Decimal).width(12);
    let containers = format!("How many containers ({})", lot.container_word);
    Ok(Form::new(visit, &format!("/lots/{}/retains/new", lot.id), "Record the retain")?
        .field(Field::new("containers", &containers, Entry::Count).width(4))
        .field(number("quantity", "Quantity in all of them"))
        .field(Field::new("unit", "Unit", Entry::Select).choices(UNITS.map(|unit| (unit, unit))).value("mL"))
        .field(number("test_quantity", "What all tests take once, in the same unit"))
        .field(Field::new("location", "Where it stands", Entry::Text).width(20))
        .field(
            Field::new("stored_on", "Stored on", Entry::Date).width(12).value(date_shown(visit.at.date())),
        ))
}

fn lot_of(visit: &Visit) -> Result<Lot, Failure> {
    let id = visit.id("id")?;
    visit.read(|reader| store::lot::get(reader, id))
}

fn new_page(visit: &Visit) -> Outcome {
    let lot = lot_of(visit)?;
    form::show(visit, &format!("Retain of {}", lot.number), NEW_LEAD, new_form(visit, &lot)?)
}

fn typed_new(typed: &mut Typed<'_>) -> Option<NewRetain> {
    let containers = typed.count("containers", 1, 10_000);
    let rule = |label: &str| NumberRule::between(label, 0, 1_000_000);
    let quantity = typed.decimal("quantity", &rule("Quantity"));
    let unit = typed.choice("unit");
    let test_quantity = typed.decimal("test_quantity", &rule("What all tests take once"));
    let (location, stored_on) = (typed.text("location", 80), typed.date("stored_on"));
    Some(NewRetain {
        containers: containers?,
        quantity: quantity?.value,
        unit: unit?,
        test_quantity: test_quantity?.value,
        location: location?,
        stored_on: stored_on?,
    })
}

fn keep(visit: &Visit) -> Outcome {
    let lot = lot_of(visit)?;
    form::submit_page(
        visit,
        &format!("Retain of {}", lot.number),
        NEW_LEAD,
        new_form(visit, &lot)?,
        typed_new,
        |actor, new| acts::retain::keep(visit.db(), actor, lot.id, &new),
        |id| format!("/retains/{id}"),
    )
}

fn one(visit: &Visit) -> Outcome {
    page(200, visit, None)
}

fn events_table(events: &[RetainEvent]) -> Table {
    let heads = ["Event", "On", "Finding", "Containers#", "Note", "Deviation", "By"];
    let empty = "Nobody has looked at it yet.";
    Table::new("Newest first", &heads, empty).rows(events.iter().map(|event| {
        let finding = match event.is_changed {
            Some(true) => "changed",
            Some(false) => "unchanged",
            None => "",
        };
        vec![
            Cell::text(&event.kind),
            Cell::text(date_shown(event.happened_on)),
            Cell::text(finding),
            Cell::number(event.containers.map(|count| count.to_string()).unwrap_or_default()),
            Cell::text(&event.note),
            match event.deviation {
                Some((id, number)) => Cell::link(format!("/deviations/{id}"), number.to_string()),
                None => Cell::text(""),
            },
            Cell::text(&event.by),
        ]
    }))
}

fn page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let (retain, events) =
        visit.read(|reader| Ok((store::retain::get(reader, id)?, store::retain::events(reader, id)?)))?;
    let facts = &retain.facts;
    let mut shell = Shell::of(visit, &facts.number).crumb("/retains", "Retains");
    let may = !facts.is_discarded && visit.may(Act::RecordRetainEvent);
    let form = match failed {
        Some(failed) => {
            shell = shell.with_errors(&failed);
            Some(failed)
        }
        None if may => Some(event_form(visit, id)?),
        None => None,
    };
    let lead = format!("Retain of lot {}, {}.", retain.lot_number, retain.product);
    Record::new(shell, lead)
        .fact("Next look", next_look(facts, visit))
        .fact("Kept until", kept_until(facts))
        .fact(
            "Left",
            format!("{} of {} ({})", facts.containers_left, retain.containers, retain.container_word),
        )
        .fact("Quantity", show::with_unit(&retain.quantity, &retain.unit))
        .fact("All tests take", show::with_unit(&retain.test_quantity, &retain.unit))
        .fact("Stored on", date_shown(facts.stored_on))
        .fact("Where it stands", &retain.location)
        .quiet_link_if(true, format!("/lots/{}", retain.lot), "Its lot")
        .table("Events", events_table(&events))
        .form("Record an event", "A look that finds a change opens a deviation.", form)
        .show_with(status)
}

fn event_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let kinds = [
        (RetainEventKind::LookedAt, "Looked at, through the container"),
        (RetainEventKind::Taken, "Containers taken"),
        (RetainEventKind::Discarded, "Discarded"),
    ];
    Ok(Form::new(visit, &format!("/retains/{id}/events"), "Record it")?
        .field(
            Field::new("kind", "What", Entry::Radios)
                .choices(kinds.map(|(kind, words)| (kind.words(), words))),
        )
        .field(Field::new("happened_on", "Day", Entry::Date).width(12).value(date_shown(visit.at.date())))
        .field(
            Field::new("is_changed", "Finding of a look", Entry::Radios)
                .choices([("unchanged", "Nothing has changed"), ("changed", "Something has changed")]),
        )
        .field(Field::new("containers", "How many were taken", Entry::Count).width(4))
        .field(Field::new("note", "Note", Entry::Text).hint("What has changed, or what it was taken for.")))
}

fn typed_event(typed: &mut Typed<'_>) -> Option<NewRetainEvent> {
    let (kind, happened_on) = (typed.choice("kind"), typed.date("happened_on"));
    let is_changed = typed.maybe_choice("is_changed");
    let containers = typed.maybe_count("containers", 0, 100_000);
    let note = typed.maybe_text("note", 400);
    let kind = RetainEventKind::from_words(&kind?)?;
    Some(NewRetainEvent {
        kind,
        happened_on: happened_on?,
        is_changed: is_changed?
            .filter(|_| kind == RetainEventKind::LookedAt)
            .map(|answer| answer == "changed"),
        containers: containers?.filter(|_| kind == RetainEventKind::Taken),
        note: note?.unwrap_or_default(),
    })
}

fn record_event(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        event_form(visit, id)?,
        typed_event,
        |actor, new| acts::retain::record_event(visit.db(), actor, id, &new),
        |()| format!("/retains/{id}"),
        |status, form| page(status, visit, Some(form)),
    )
}
