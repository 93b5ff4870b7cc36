//! Instruments: calibration, daily checks, in and out of service. The newest event of a kind counts.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::instrument::{
    EventDetail, EventKind, InstrumentFacts, NewEvent, NewInstrument, Performed,
};
use crate::domain::stop::Stop;

pub fn insert(change: &Change<'_>, new: &NewInstrument) -> Answer<i64> {
    change.insert(
        "insert into instrument (uuid, code, name, kind, needs_daily_check)
         values (:uuid, :code, :name, :kind, :needs_daily_check)",
        named_params! {
            ":uuid": new_uuid(),
            ":code": new.code,
            ":name": new.name,
            ":kind": new.kind,
            ":needs_daily_check": new.needs_daily_check,
        },
    )
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from instrument where code = :code", named_params! { ":code": code })
}

const SELECT: &str = "select i.id, i.code, i.name, i.kind, i.needs_daily_check,
        s.kind = 'out of service', s.performed_on,
        c.performed_on, c.due_on, c.detail,
        d.performed_on, d.due_on, d.detail,
        (select group_concat(stop) from stop_override where instrument = i.id and valid_on = :today)
    from instrument i
    left join instrument_event s on s.id = (
        select max(id) from instrument_event
        where instrument = i.id and kind in ('out of service', 'in service'))
    left join instrument_event c on c.id = (
        select max(id) from instrument_event where instrument = i.id and kind = 'calibrated')
    left join instrument_event d on d.id = (
        select max(id) from instrument_event where instrument = i.id and kind = 'daily check')";

fn from_row(row: &Row<'_>) -> rusqlite::Result<InstrumentFacts> {
    let is_out: Option<bool> = row.get(5)?;
    let since: Option<Day> = row.get(6)?;
    let lifted: Option<String> = row.get(13)?;
    Ok(InstrumentFacts {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        kind: row.get(3)?,
        needs_daily_check: row.get(4)?,
        out_of_service_since: since.filter(|_| is_out == Some(true)).map(|day| day.0),
        calibration: performed(row, 7)?,
        daily_check: performed(row, 10)?,
        lifted: lifted.unwrap_or_default().split(',').filter_map(Stop::from_words).collect(),
    })
}

fn performed(row: &Row<'_>, first: usize) -> rusqlite::Result<Option<Performed>> {
    let Some(on) = row.get::<_, Option<Day>>(first)? else { return Ok(None) };
    let due_on = row.get::<_, Option<Day>>(first + 1)?.map(|day| day.0);
    Ok(Some(Performed { on: on.0, due_on, detail: detail(row, first + 2)? }))
}

fn detail(row: &Row<'_>, column: usize) -> rusqlite::Result<EventDetail> {
    let text: Option<String> = row.get(column)?;
    serde_json::from_str(&text.unwrap_or_else(|| "{}".to_string())).map_err(|error| {
        rusqlite::Error::FromSqlConversionFailure(column, rusqlite::types::Type::Text, Box::new(error))
    })
}

/// All that decides whether an instrument may be used today, with the overrides of the day.
pub fn facts(reader: &Reader<'_>, id: i64, today: NaiveDate) -> Answer<InstrumentFacts> {
    reader.one(
        "instrument with this number",
        &format!("{SELECT} where i.id = :id"),
        named_params! { ":id": id, ":today": Day(today) },
        from_row,
    )
}

/// All instruments of a kind by code, each with what stops it today: the choices of a bench page.
pub fn usable_kinds(reader: &Reader<'_>, kind: &str, today: NaiveDate) -> Answer<Vec<InstrumentFacts>> {
    reader.all(
        &format!("{SELECT} where i.kind = :kind order by i.code"),
        named_params! { ":kind": kind, ":today": Day(today) },
        from_row,
    )
}

/// The whole register, by kind and code.
pub fn all(reader: &Reader<'_>, today: NaiveDate) -> Answer<Vec<InstrumentFacts>> {
    reader.all(&format!("{SELECT} order by i.kind, i.code"), named_params! { ":today": Day(today) }, from_row)
}

pub fn insert_event(change: &Change<'_>, instrument: i64, new: &NewEvent) -> Answer<i64> {
    change.insert(
        "insert into instrument_event (instrument, kind, performed_on, due_on, detail)
         values (:instrument, :kind, :performed_on, :due_on, :detail)",
        named_params! {
            ":instrument": instrument,
            ":kind": new.kind.words(),
            ":performed_on": Day(new.performed_on),
            ":due_on": new.due_on.map(Day),
            ":detail": serde_json::to_string(&new.detail)?,
        },
    )
}

/// An event as the instrument's page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Event {
    pub kind: String,
    pub performed_on: NaiveDate,
    pub due_on: Option<NaiveDate>,
    pub detail: EventDetail,
    pub recorded_by: String,
}

impl Event {
    /// The details in one line.
    pub fn words(&self) -> String {
        let kind = EventKind::from_words(&self.kind).unwrap_or(EventKind::InService);
        self.detail.words(kind)
    }
}

/// The events of an instrument, newest first.
pub fn events(reader: &Reader<'_>, instrument: i64, limit: i64) -> Answer<Vec<Event>> {
    reader.all(
        "select e.kind, e.performed_on, e.due_on, e.detail, a.full_name
         from instrument_event e join trail_act a on a.id = e.act
         where e.instrument = :instrument
         order by e.id desc
         limit :limit",
        named_params! { ":instrument": instrument, ":limit": limit },
        |row| {
            Ok(Event {
                kind: row.get(0)?,
                performed_on: row.get::<_, Day>(1)?.0,
                due_on: row.get::<_, Option<Day>>(2)?.map(|day| day.0),
                detail: detail(row, 3)?,
                recorded_by: row.get(4)?,
            })
        },
    )
}
