//! Instruments: calibration, daily checks, in and out of service.

use rust_decimal::Decimal;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
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
use crate::domain::failure::Failure;
use crate::domain::instrument::{
    EventDetail, EventKind, InstrumentFacts, KINDS, NewEvent, NewInstrument, PH_METER, may_use,
};
use crate::domain::moment::date_shown;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/instruments", list),
    get("/instruments/new", new_page),
    post("/instruments/new", &[Act::AddInstrument], add),
    get("/instruments/{id}", instrument),
    get("/instruments/{id}/{event}", event_page),
    post("/instruments/{id}/{event}", &[Act::RecordInstrumentEvent], record_event),
];

/// What stops the instrument today, or that nothing does.
fn today_words(facts: &InstrumentFacts, visit: &Visit) -> String {
    match may_use(facts, visit.at.date()) {
        Ok(()) if facts.lifted.is_empty() => "may be used".to_string(),
        Ok(()) => "may be used today: QA lifted a stop".to_string(),
        Err(refusal) => refusal.to_string(),
    }
}

/// The same for the register: the first sentence alone, without what to do at the bench.
fn state_words(facts: &InstrumentFacts, visit: &Visit) -> String {
    let words = today_words(facts, visit);
    words.split(". ").next().map(|first| first.trim_end_matches('.').to_string()).unwrap_or(words)
}

fn due_words(facts: &InstrumentFacts) -> Option<String> {
    facts.calibration.as_ref().and_then(|calibration| calibration.due_on).map(date_shown)
}

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(|reader| store::instrument::all(reader, visit.at.date()))?;
    let usable = found.iter().filter(|facts| may_use(facts, visit.at.date()).is_ok()).count();
    let lead = format!(
        "{}, {usable} of them may be used today.",
        show::counted(found.len(), "instrument", "instruments")
    );
    let table = Table::new(
        "By kind and code",
        &["Instrument", "Kind", "Today", "Calibration due"],
        "No instrument is in the register yet. Readings of pH, viscosity and weight name one; add it first.",
    )
    .rows(found.iter().map(|facts| {
        let path = format!("/instruments/{}", facts.id);
        vec![
            Cell::Link { path, words: facts.code.clone(), note: facts.name.clone() },
            Cell::text(&facts.kind),
            Cell::text(state_words(facts, visit)),
            Cell::or_missing(due_words(facts), "not calibrated yet"),
        ]
    }));
    Record::new(Shell::of(visit, "Instruments").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddInstrument), "/instruments/new", "Add an instrument")
        .quiet_link_if(visit.may(Act::OverrideStop), "/overrides/new", "Lift a stop for a day")
        .table("", table)
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/instruments/new", "Add the instrument")?
        .field(
            Field::new("code", "Code, as on its label", Entry::Text)
                .width(12)
                .hint("Such as PH-02. Never used twice."),
        )
        .field(Field::new("name", "What it is and where it stands", Entry::Text))
        .field(Field::new("kind", "Kind", Entry::Select).choices(KINDS.map(|kind| (kind, kind))))
        .field(
            Field::new("needs_daily_check", "Needs a check on each day of use", Entry::Tick)
                .hint("Readings are refused on a day without its check."),
        ))
}

const NEW_LEAD: &str = "An instrument can be used once its first calibration is on record.";

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Add an instrument", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add an instrument",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (code, name, kind) = (typed.text("code", 40), typed.text("name", 120), typed.choice("kind"));
            let needs_daily_check = typed.tick("needs_daily_check");
            Some(NewInstrument { code: code?, name: name?, kind: kind?, needs_daily_check })
        },
        |actor, new| acts::instrument::add(visit.db(), actor, &new),
        |id| format!("/instruments/{id}"),
    )
}

/// The page of each event, by the end of its address.
const EVENTS: [(&str, EventKind, &str); 4] = [
    ("daily-check", EventKind::DailyCheck, "Record a daily check"),
    ("calibration", EventKind::Calibrated, "Record a calibration"),
    ("out-of-service", EventKind::OutOfService, "Take out of service"),
    ("in-service", EventKind::InService, "Put back into service"),
];

/// Events that the page shows at first, and in its list of all.
const NEWEST_EVENTS: i64 = 20;
const MOST_EVENTS: i64 = 2000;

fn instrument(visit: &Visit) -> Outcome {
    visit.knows_query(&["events"])?;
    let id = visit.id("id")?;
    let shows_all = visit.query.get("events") == Some("all");
    let (facts, mut events, overrides, lines) = visit.read(|reader| {
        Ok((
            store::instrument::facts(reader, id, visit.at.date())?,
            store::instrument::events(reader, id, if shows_all { MOST_EVENTS } else { NEWEST_EVENTS } + 1)?,
            store::stop::of_instrument(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Instrument, id))?,
        ))
    })?;
    let shell = Shell::of(visit, &facts.code).crumb("/instruments", "Instruments");
    let mut record = Record::new(shell, format!("{}: {}", facts.name, today_words(&facts, visit)))
        .fact("Kind", &facts.kind)
        .fact("Daily check", if facts.needs_daily_check { "on each day of use" } else { "not needed" })
        .fact("Calibration due", due_words(&facts).unwrap_or_else(|| "not calibrated yet".to_string()));
    for (slug, kind, words) in EVENTS {
        let fits = match kind {
            EventKind::OutOfService => facts.out_of_service_since.is_none(),
            EventKind::InService => facts.out_of_service_since.is_some(),
            EventKind::DailyCheck => facts.needs_daily_check,
            EventKind::Calibrated => true,
        };
        let may = fits && visit.may(Act::RecordInstrumentEvent);
        record = record.link_if(may, format!("/instruments/{id}/{slug}"), words);
    }
    let path = format!("/overrides/new?instrument={id}");
    let is_cut = events.len() as i64 > NEWEST_EVENTS && !shows_all;
    events.truncate(if shows_all { MOST_EVENTS } else { NEWEST_EVENTS } as usize);
    let caption = format!("The newest {} events", events.len());
    let table = Table::new(
        if is_cut { &caption } else { "Newest first" },
        &["Event", "On", "Due", "What was recorded", "By"],
        "Nothing is recorded yet. Record its calibration, so that readings can name it.",
    )
    .rows(events.iter().map(|event| {
        vec![
            Cell::text(&event.kind),
            Cell::text(date_shown(event.performed_on)),
            Cell::or_missing(event.due_on.map(date_shown), "no due date"),
            Cell::text(event.words()),
            Cell::text(&event.recorded_by),
        ]
    }));
    record
        .quiet_link_if(visit.may(Act::OverrideStop), path, "Lift a stop for a day")
        .quiet_link_if(is_cut, format!("/instruments/{id}?events=all"), "All calibrations and checks")
        .table("Calibrations and checks", table)
        .table("Stops lifted by QA", super::stop::table(&overrides, visit))
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}

fn event_of(visit: &Visit) -> Result<(EventKind, &'static str), Failure> {
    let slug = visit.param("event")?;
    let found = EVENTS.iter().find(|(known, _, _)| *known == slug);
    found.map(|(_, kind, words)| (*kind, *words)).ok_or_else(|| Failure::missing("page"))
}

fn event_form(visit: &Visit, facts: &InstrumentFacts, kind: EventKind) -> Result<Form, Failure> {
    let (words, slug) =
        EVENTS.iter().find(|(_, known, _)| *known == kind).map_or(("", ""), |event| (event.2, event.0));
    let mut form = Form::new(visit, &format!("/instruments/{}/{slug}", facts.id), words)?
        .field(Field::new("performed_on", "Day", Entry::Date).width(12).value(date_shown(visit.at.date())));
    if kind == EventKind::Calibrated {
        form = form.field(Field::new("due_on", "Next calibration due", Entry::Date).width(12));
    }
    if kind == EventKind::DailyCheck && facts.kind == PH_METER {
        let buffer = |number: u8| {
            Field::new(&format!("buffer.{number}"), &format!("Buffer {number}, pH units"), Entry::Decimal)
                .width(8)
        };
        form =
            form.heading("Buffers and slope", "Nominal values of the buffers used, such as 4.01 and 7.00.");
        form = form.field(buffer(1)).field(buffer(2)).field(buffer(3).hint("Only where a third was used."));
        form = form.field(Field::new("slope_percent", "Slope, %", Entry::Decimal).width(8));
    }
    if matches!(kind, EventKind::Calibrated | EventKind::DailyCheck) {
        form = form
            .field(
                Field::new("outcome", "Outcome", Entry::Radios)
                    .choices([("within", "within its limits"), ("outside", "outside its limits")]),
            )
            .field(Field::new("reference", "Certificate, buffer lots or weight set", Entry::Text));
        return Ok(form.field(Field::new("note", "Note, where there is one", Entry::Text)));
    }
    Ok(form.field(Field::new("note", "Why", Entry::Text).hint("At least ten characters.")))
}

fn typed_event(typed: &mut Typed<'_>, kind: EventKind, is_ph_check: bool) -> Option<NewEvent> {
    let performed_on = typed.date("performed_on");
    let due_on = if kind == EventKind::Calibrated { typed.date("due_on").map(Some) } else { Some(None) };
    let (buffers, slope) =
        if is_ph_check { (typed_buffers(typed), typed_slope(typed)) } else { (Some(vec![]), Some(None)) };
    let is_measured = matches!(kind, EventKind::Calibrated | EventKind::DailyCheck);
    let outcome = if is_measured { typed.choice("outcome") } else { Some("within".to_string()) };
    let reference = if is_measured { typed.text("reference", 200) } else { Some(String::new()) };
    let note = typed.maybe_text("note", 400);
    Some(NewEvent {
        kind,
        performed_on: performed_on?,
        due_on: due_on?,
        detail: EventDetail {
            is_within_limits: outcome? == "within",
            buffers: buffers?,
            slope_percent: slope?,
            reference: reference?,
            note: note?.unwrap_or_default(),
        },
    })
}

fn typed_buffers(typed: &mut Typed<'_>) -> Option<Vec<Decimal>> {
    let read: Vec<_> = (1..=3)
        .map(|number| {
            let rule = NumberRule::between(&format!("Buffer {number}"), 0, 14).unit("pH units");
            typed.maybe_decimal(&format!("buffer.{number}"), &rule)
        })
        .collect();
    let values = read.into_iter().collect::<Option<Vec<_>>>()?;
    Some(values.into_iter().flatten().map(|number| number.value).collect())
}

fn typed_slope(typed: &mut Typed<'_>) -> Option<Option<Decimal>> {
    let rule = NumberRule::between("Slope", 0, 200).unit("%");
    typed.maybe_decimal("slope_percent", &rule).map(|slope| slope.map(|slope| slope.value))
}

fn event_page(visit: &Visit) -> Outcome {
    let (kind, words) = event_of(visit)?;
    let id = visit.id("id")?;
    let facts = visit.read(|reader| store::instrument::facts(reader, id, visit.at.date()))?;
    form::show(
        visit,
        &format!("{}: {}", facts.code, words.to_lowercase()),
        &facts.name,
        event_form(visit, &facts, kind)?,
    )
}

fn record_event(visit: &Visit) -> Outcome {
    let (kind, words) = event_of(visit)?;
    let id = visit.id("id")?;
    let facts = visit.read(|reader| store::instrument::facts(reader, id, visit.at.date()))?;
    let is_ph_check = kind == EventKind::DailyCheck && facts.kind == PH_METER;
    form::submit_page(
        visit,
        &format!("{}: {}", facts.code, words.to_lowercase()),
        &facts.name,
        event_form(visit, &facts, kind)?,
        |typed| typed_event(typed, kind, is_ph_check),
        |actor, new| acts::instrument::record_event(visit.db(), actor, id, &new),
        |_| format!("/instruments/{id}"),
    )
}
