//! Equipment: the register, and one piece with its cleaning state, events and history.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::material_lot::typed_lot;
use super::page::Shell;
use super::part::Trail;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::equipment::{
    CLASSES, EquipmentEventKind, EquipmentFacts, NewEquipment, NewEquipmentEvent, may_use, state_words,
};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::equipment::EquipmentEvent;

pub const ROUTES: &[Route] = &[
    get("/equipment", list),
    get("/equipment/new", new_page),
    post("/equipment/new", &[Act::AddEquipment], add),
    get("/equipment/{id}", one),
    get("/equipment/{id}/{event}", event_page),
    post("/equipment/{id}/{event}", &[Act::RecordEquipmentEvent], record_event),
];

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::equipment::all)?;
    let today = visit.at.date();
    let usable = found.iter().filter(|facts| may_use(facts, None, today).is_ok()).count();
    let lead = format!(
        "{}, {usable} of them clean and ready today.",
        show::counted(found.len(), "piece of equipment", "pieces of equipment")
    );
    let empty =
        "No equipment is in the register yet. Steps of a batch record choose from it; add the first vessel.";
    let heads = ["Equipment", "Class", "Where", "State", "Calibrated until"];
    let table = Table::new("By class and code", &heads, empty).rows(found.iter().map(|facts| {
        vec![
            Cell::Link {
                path: format!("/equipment/{}", facts.id),
                words: facts.code.clone(),
                note: facts.name.clone(),
            },
            Cell::text(&facts.class),
            Cell::text(&facts.location),
            Cell::text(state_words(facts, today)),
            Cell::text(calibration_words(facts)),
        ]
    }));
    Record::new(Shell::of(visit, "Equipment").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddEquipment), "/equipment/new", "Add a piece of equipment")
        .table("", table)
        .show()
}

fn calibration_words(facts: &EquipmentFacts) -> String {
    match (facts.needs_calibration, facts.calibrated_until) {
        (false, _) => "not needed".to_string(),
        (true, None) => "not calibrated yet".to_string(),
        (true, Some(until)) => date_shown(until),
    }
}

const NEW_LEAD: &str = "A piece of equipment can be used once its first cleaning is on record.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/equipment/new", "Add it")?
        .field(
            Field::new("code", "Code, as on its label", Entry::Text)
                .width(12)
                .hint("Such as V-03. Never used twice."),
        )
        .field(Field::new("name", "What it is, with its size", Entry::Text))
        .field(Field::new("class", "Class", Entry::Select).choices(CLASSES.map(|class| (class, class))))
        .field(Field::new("location", "Where it stands", Entry::Text).width(20))
        .field(
            Field::new("clean_hold_days", "Stays clean unused, days", Entry::Count)
                .width(4)
                .value("7")
                .hint("As your cleaning validation shows. After that it is cleaned again."),
        )
        .field(
            Field::new("campaign_days", "Campaign of one product, days", Entry::Count)
                .width(4)
                .value("0")
                .hint("Over so many days lots of one product follow without cleaning. 0: cleaned after each lot."),
        )
        .field(Field::new("needs_clean_check", "A second person checks each cleaning", Entry::Tick).value("yes"))
        .field(Field::new("needs_calibration", "It measures, so it needs calibration", Entry::Tick)))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Add a piece of equipment", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a piece of equipment",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (code, name) = (typed.text("code", 40), typed.text("name", 120));
            let (class, location) = (typed.choice("class"), typed.text("location", 80));
            let clean_hold_days = typed.count("clean_hold_days", 0, 365);
            let campaign_days = typed.count("campaign_days", 0, 60);
            Some(NewEquipment {
                code: code?,
                name: name?,
                class: class?,
                location: location?,
                clean_hold_days: clean_hold_days?,
                campaign_days: campaign_days?,
                needs_clean_check: typed.tick("needs_clean_check"),
                needs_calibration: typed.tick("needs_calibration"),
            })
        },
        |actor, new| acts::equipment::add(visit.db(), actor, &new),
        |id| format!("/equipment/{id}"),
    )
}

/// The page of each event, by the end of its address.
const EVENTS: [(&str, EquipmentEventKind, &str); 6] = [
    ("cleaned", EquipmentEventKind::Cleaned, "Record a cleaning"),
    ("checked-clean", EquipmentEventKind::CheckedClean, "Record the check of the cleaning"),
    ("used", EquipmentEventKind::Used, "Record a use in a lot"),
    ("calibrated", EquipmentEventKind::Calibrated, "Record a calibration"),
    ("out-of-service", EquipmentEventKind::OutOfService, "Take out of service"),
    ("in-service", EquipmentEventKind::InService, "Put back into service"),
];

/// Whether the page offers an event now.
fn fits(kind: EquipmentEventKind, facts: &EquipmentFacts) -> bool {
    match kind {
        EquipmentEventKind::Cleaned => true,
        EquipmentEventKind::CheckedClean => {
            facts.uses.is_empty() && facts.cleaning.as_ref().is_some_and(|cleaning| !cleaning.is_checked)
        }
        EquipmentEventKind::Used => facts.cleaning.is_some(),
        EquipmentEventKind::Calibrated => facts.needs_calibration,
        EquipmentEventKind::OutOfService => facts.out_of_service_since.is_none(),
        EquipmentEventKind::InService => facts.out_of_service_since.is_some(),
    }
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (facts, events, trail) = visit.read(|reader| {
        Ok((
            store::equipment::facts(reader, id)?,
            store::equipment::events(reader, id, 100)?,
            store::trail::of_subject(reader, Subject::new(Kind::Equipment, id))?,
        ))
    })?;
    let shell = Shell::of(visit, &facts.code).crumb("/equipment", "Equipment");
    let lead = format!("{}: {}.", facts.name, state_words(&facts, visit.at.date()));
    let campaign = match facts.campaign_days {
        0 => "cleaned after each lot".to_string(),
        days => format!("lots of one product may follow over {days} days"),
    };
    let mut record = Record::new(shell, lead)
        .fact("Class", &facts.class)
        .fact("Where it stands", &facts.location)
        .fact("Stays clean unused", show::counted(facts.clean_hold_days as usize, "day", "days"))
        .fact("Campaign", campaign)
        .fact("Cleaning is checked", if facts.needs_clean_check { "by a second person" } else { "not asked" })
        .fact("Calibrated until", calibration_words(&facts));
    for (slug, kind, words) in EVENTS {
        let may = fits(kind, &facts) && visit.may(Act::RecordEquipmentEvent);
        record = record.link_if(may, format!("/equipment/{id}/{slug}"), words);
    }
    record
        .quiet_link_if(true, format!("/equipment/{id}/label"), "Label")
        .quiet_link_if(
            visit.may(Act::OpenDeviation),
            format!("/deviations/new?equipment={id}"),
            "Open a deviation",
        )
        .table("Events", events_table(&events))
        .trail(Trail::of(&trail, visit.at.zone))
        .show()
}

fn events_table(events: &[EquipmentEvent]) -> Table {
    let heads = ["Event", "On", "Holds until", "Lot", "Note", "By"];
    let empty = "Nothing is recorded yet. Record its first cleaning, so that a step can use it.";
    Table::new("Newest first", &heads, empty).rows(events.iter().map(|event| {
        vec![
            Cell::text(&event.kind),
            Cell::text(date_shown(event.happened_on)),
            Cell::or_missing(event.due_on.map(date_shown), "no end"),
            match &event.lot {
                Some((lot, number)) => Cell::link(format!("/lots/{lot}"), number),
                None => Cell::text(""),
            },
            Cell::text(&event.note),
            Cell::text(&event.by),
        ]
    }))
}

fn event_of(visit: &Visit) -> Result<(EquipmentEventKind, &'static str), Failure> {
    let slug = visit.param("event")?;
    let found = EVENTS.iter().find(|(known, _, _)| *known == slug);
    found.map(|(_, kind, words)| (*kind, *words)).ok_or_else(|| Failure::missing("page"))
}

fn event_form(visit: &Visit, id: i64, kind: EquipmentEventKind) -> Result<Form, Failure> {
    let slug = EVENTS.iter().find(|(_, known, _)| *known == kind).map_or("", |(slug, _, _)| *slug);
    let words = EVENTS.iter().find(|(_, known, _)| *known == kind).map_or("", |(_, _, words)| *words);
    let mut form = Form::new(visit, &format!("/equipment/{id}/{slug}"), words)?
        .field(Field::new("happened_on", "Day", Entry::Date).width(12).value(date_shown(visit.at.date())));
    if kind == EquipmentEventKind::Calibrated {
        form = form.field(Field::new("due_on", "Holds until", Entry::Date).width(12));
    }
    if kind == EquipmentEventKind::Used {
        form = form.field(
            Field::new("lot", "Lot it was used in", Entry::Text).width(20).hint("Scan or type its number."),
        );
    }
    let hint = match kind {
        EquipmentEventKind::Cleaned => "Procedure and agent.",
        EquipmentEventKind::CheckedClean => "What was looked at: dry, no residue, seals.",
        EquipmentEventKind::OutOfService | EquipmentEventKind::InService => "At least ten characters.",
        _ => "May be left empty.",
    };
    Ok(form.field(Field::new("note", "Note", Entry::Text).hint(hint)))
}

fn typed_event(typed: &mut Typed<'_>, kind: EquipmentEventKind) -> Option<NewEquipmentEvent> {
    let happened_on = typed.date("happened_on");
    let due_on = match kind {
        EquipmentEventKind::Calibrated => typed.date("due_on").map(Some),
        _ => Some(None),
    };
    let lot = match kind {
        EquipmentEventKind::Used => typed_lot(typed, "lot"),
        _ => Some(None),
    };
    let note = typed.maybe_text("note", 400);
    Some(NewEquipmentEvent {
        kind,
        happened_on: happened_on?,
        due_on: due_on?,
        lot: lot?,
        note: note?.unwrap_or_default(),
    })
}

fn event_page(visit: &Visit) -> Outcome {
    let (kind, words) = event_of(visit)?;
    let id = visit.id("id")?;
    let facts = visit.read(|reader| store::equipment::facts(reader, id))?;
    let lead = format!("{}: {}.", facts.name, state_words(&facts, visit.at.date()));
    let title = format!("{}: {}", facts.code, words.to_lowercase());
    form::show(visit, &title, &lead, event_form(visit, id, kind)?)
}

fn record_event(visit: &Visit) -> Outcome {
    let (kind, words) = event_of(visit)?;
    let id = visit.id("id")?;
    let facts = visit.read(|reader| store::equipment::facts(reader, id))?;
    form::submit_page(
        visit,
        &format!("{}: {}", facts.code, words.to_lowercase()),
        &format!("{}: {}.", facts.name, state_words(&facts, visit.at.date())),
        event_form(visit, id, kind)?,
        |typed| typed_event(typed, kind),
        |actor, new| acts::equipment::record_event(visit.db(), actor, id, &new),
        |()| format!("/equipment/{id}"),
    )
}
