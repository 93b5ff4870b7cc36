//! Retain samples and what happened to them.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Exact, Reader, new_uuid};
use crate::domain::retain::{NewRetain, NewRetainEvent, RetainFacts};

/// A retain with what its list and page show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Retain {
    pub id: i64,
    pub lot: i64,
    pub lot_number: String,
    pub product: String,
    pub container_word: String,
    pub facts: RetainFacts,
    pub containers: i64,
    pub quantity: String,
    pub unit: String,
    pub test_quantity: String,
    pub location: String,
}

const SELECT: &str = "select r.id, r.lot, l.number, d.code || ' ' || d.name, p.container_word, r.number,
        r.containers - coalesce((select sum(containers) from retain_event where retain = r.id and kind = 'taken'), 0),
        r.stored_on,
        (select happened_on from retain_event where retain = r.id and kind = 'looked at' order by id desc limit 1),
        (select expires_on from lot_decision where lot = l.id order by id desc limit 1),
        exists (select 1 from retain_event where retain = r.id and kind = 'discarded'),
        r.containers, r.quantity, r.unit, r.test_quantity, r.location
    from retain r
    join lot l on l.id = r.lot
    join presentation p on p.id = l.presentation
    join product d on d.id = p.product";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Retain> {
    let day = |found: Option<Day>| found.map(|day| day.0);
    Ok(Retain {
        id: row.get(0)?,
        lot: row.get(1)?,
        lot_number: row.get(2)?,
        product: row.get(3)?,
        container_word: row.get(4)?,
        facts: RetainFacts {
            number: row.get(5)?,
            containers_left: row.get(6)?,
            stored_on: row.get::<_, Day>(7)?.0,
            last_look_on: day(row.get(8)?),
            expires_on: day(row.get(9)?),
            is_discarded: row.get(10)?,
        },
        containers: row.get(11)?,
        quantity: row.get(12)?,
        unit: row.get(13)?,
        test_quantity: row.get(14)?,
        location: row.get(15)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Retain> {
    let sql = format!("{SELECT} where r.id = :id");
    reader.one("retain with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The retains of a lot, oldest first.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Retain>> {
    let sql = format!("{SELECT} where r.lot = :lot order by r.id");
    reader.all(&sql, named_params! { ":lot": lot }, from_row)
}

/// Retains newest first, those recorded before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<Retain>> {
    let sql = format!("{SELECT} where r.id < :before order by r.id desc limit :limit");
    reader.all(&sql, named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit }, from_row)
}

/// Records a retain with the next number of its lot: `TW-104-0640-K1`.
pub fn insert(change: &Change<'_>, lot: i64, new: &NewRetain) -> Answer<(i64, String)> {
    let number = change.one(
        "lot with this number",
        "select number || '-K' || ((select count(*) from retain where lot = :lot) + 1) from lot where id = :lot",
        named_params! { ":lot": lot },
        |row| row.get::<_, String>(0),
    )?;
    let id = change.insert(
        "insert into retain (uuid, lot, number, containers, quantity, unit, test_quantity, location, stored_on)
         values (:uuid, :lot, :number, :containers, :quantity, :unit, :test_quantity, :location, :stored_on)",
        named_params! {
            ":uuid": new_uuid(),
            ":lot": lot,
            ":number": number,
            ":containers": new.containers,
            ":quantity": Exact(new.quantity),
            ":unit": new.unit,
            ":test_quantity": Exact(new.test_quantity),
            ":location": new.location,
            ":stored_on": Day(new.stored_on),
        },
    )?;
    Ok((id, number))
}

pub fn insert_event(
    change: &Change<'_>,
    retain: i64,
    new: &NewRetainEvent,
    deviation: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into retain_event (retain, kind, happened_on, is_changed, containers, note, deviation)
         values (:retain, :kind, :on, :is_changed, :containers, :note, :deviation)",
        named_params! {
            ":retain": retain,
            ":kind": new.kind.words(),
            ":on": Day(new.happened_on),
            ":is_changed": new.is_changed,
            ":containers": new.containers,
            ":note": (!new.note.is_empty()).then_some(&new.note),
            ":deviation": deviation,
        },
    )
}

/// An event as the page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RetainEvent {
    pub kind: String,
    pub happened_on: NaiveDate,
    pub is_changed: Option<bool>,
    pub containers: Option<i64>,
    pub note: String,
    pub deviation: Option<(i64, i64)>,
    pub by: String,
}

/// The events of a retain, newest first.
pub fn events(reader: &Reader<'_>, retain: i64) -> Answer<Vec<RetainEvent>> {
    reader.all(
        "select e.kind, e.happened_on, e.is_changed, e.containers, coalesce(e.note, ''), d.id, d.number, a.full_name
         from retain_event e
         join trail_act a on a.id = e.act
         left join deviation d on d.id = e.deviation
         where e.retain = :retain
         order by e.id desc",
        named_params! { ":retain": retain },
        |row| {
            let (id, number): (Option<i64>, Option<i64>) = (row.get(5)?, row.get(6)?);
            Ok(RetainEvent {
                kind: row.get(0)?,
                happened_on: row.get::<_, Day>(1)?.0,
                is_changed: row.get(2)?,
                containers: row.get(3)?,
                note: row.get(4)?,
                deviation: id.zip(number),
                by: row.get(7)?,
            })
        },
    )
}
