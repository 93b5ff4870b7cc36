//! Equipment and what happened to it. The newest event of a kind counts.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::equipment::{Cleaning, EquipmentFacts, NewEquipment, NewEquipmentEvent, Use};

pub fn insert(change: &Change<'_>, new: &NewEquipment) -> Answer<i64> {
    change.insert(
        "insert into equipment (uuid, code, name, class, location, clean_hold_days, campaign_days,
             needs_clean_check, needs_calibration)
         values (:uuid, :code, :name, :class, :location, :hold, :campaign, :check, :calibration)",
        named_params! {
            ":uuid": new_uuid(),
            ":code": new.code,
            ":name": new.name,
            ":class": new.class,
            ":location": new.location,
            ":hold": new.clean_hold_days,
            ":campaign": new.campaign_days,
            ":check": new.needs_clean_check,
            ":calibration": new.needs_calibration,
        },
    )
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from equipment where code = :code", named_params! { ":code": code })
}

const SELECT: &str = "select q.id, q.code, q.name, q.class, q.location, q.clean_hold_days, q.campaign_days,
        q.needs_clean_check, q.needs_calibration,
        s.kind = 'out of service', s.happened_on, c.due_on, n.id, n.happened_on, n.account,
        exists (select 1 from equipment_event where equipment = q.id and kind = 'checked clean' and cleaning = n.id)
    from equipment q
    left join equipment_event s on s.id = (
        select max(id) from equipment_event
        where equipment = q.id and kind in ('out of service', 'in service'))
    left join equipment_event c on c.id = (
        select max(id) from equipment_event where equipment = q.id and kind = 'calibrated')
    left join equipment_event n on n.id = (
        select max(id) from equipment_event where equipment = q.id and kind = 'cleaned')";

fn from_row(row: &Row<'_>) -> rusqlite::Result<EquipmentFacts> {
    let is_out: Option<bool> = row.get(9)?;
    let day = |found: Option<Day>| found.map(|day| day.0);
    let cleaning = match row.get::<_, Option<i64>>(12)? {
        None => None,
        Some(event) => {
            Some(Cleaning { event, on: row.get::<_, Day>(13)?.0, by: row.get(14)?, is_checked: row.get(15)? })
        }
    };
    Ok(EquipmentFacts {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        class: row.get(3)?,
        location: row.get(4)?,
        clean_hold_days: row.get(5)?,
        campaign_days: row.get(6)?,
        needs_clean_check: row.get(7)?,
        needs_calibration: row.get(8)?,
        out_of_service_since: day(row.get(10)?).filter(|_| is_out == Some(true)),
        calibrated_until: day(row.get(11)?),
        cleaning,
        uses: Vec::new(),
    })
}

/// Uses since the newest cleaning, with the equipment of each, in the order they happened.
fn uses(reader: &Reader<'_>, equipment: Option<i64>) -> Answer<Vec<(i64, Use)>> {
    reader.all(
        "select e.equipment, l.id, l.number, p.product, e.happened_on
         from equipment_event e
         join lot l on l.id = e.lot
         join presentation p on p.id = l.presentation
         where e.kind = 'used'
             and (:equipment is null or e.equipment = :equipment)
             and e.id > coalesce((select max(id) from equipment_event
                 where equipment = e.equipment and kind = 'cleaned'), 0)
         order by e.id",
        named_params! { ":equipment": equipment },
        |row| {
            let used = Use {
                lot: row.get(1)?,
                lot_number: row.get(2)?,
                product: row.get(3)?,
                on: row.get::<_, Day>(4)?.0,
            };
            Ok((row.get(0)?, used))
        },
    )
}

fn with_uses(mut found: Vec<EquipmentFacts>, uses: Vec<(i64, Use)>) -> Vec<EquipmentFacts> {
    for (equipment, used) in uses {
        if let Some(facts) = found.iter_mut().find(|one| one.id == equipment) {
            facts.uses.push(used);
        }
    }
    found
}

/// All that decides whether it may be used.
pub fn facts(reader: &Reader<'_>, id: i64) -> Answer<EquipmentFacts> {
    let sql = format!("{SELECT} where q.id = :id");
    let mut found = reader.one("equipment with this number", &sql, named_params! { ":id": id }, from_row)?;
    found.uses = uses(reader, Some(id))?.into_iter().map(|(_, used)| used).collect();
    Ok(found)
}

/// The equipment whose label was scanned or typed: its code, capitals aside.
pub fn by_scan(reader: &Reader<'_>, scanned: &str) -> Answer<Option<EquipmentFacts>> {
    let found = reader.maybe(
        "select id from equipment where code = :code",
        named_params! { ":code": scanned.trim() },
        |row| row.get::<_, i64>(0),
    )?;
    found.map(|id| facts(reader, id)).transpose()
}

/// The whole register, by class and code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<EquipmentFacts>> {
    let found = reader.all(&format!("{SELECT} order by q.class, q.code"), [], from_row)?;
    Ok(with_uses(found, uses(reader, None)?))
}

/// The equipment of a class, by code: the choices of a step.
pub fn of_class(reader: &Reader<'_>, class: &str) -> Answer<Vec<EquipmentFacts>> {
    Ok(all(reader)?.into_iter().filter(|one| one.class == class).collect())
}

/// Enters an event; a check names the cleaning it looked at.
pub fn insert_event(
    change: &Change<'_>,
    equipment: i64,
    new: &NewEquipmentEvent,
    cleaning: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into equipment_event (equipment, kind, happened_on, due_on, lot, cleaning, account, note)
         values (:equipment, :kind, :on, :due, :lot, :cleaning, :account, :note)",
        named_params! {
            ":equipment": equipment,
            ":kind": new.kind.words(),
            ":on": Day(new.happened_on),
            ":due": new.due_on.map(Day),
            ":lot": new.lot,
            ":cleaning": cleaning,
            ":account": change.actor().account,
            ":note": (!new.note.is_empty()).then_some(&new.note),
        },
    )
}

/// An event as the page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct EquipmentEvent {
    pub kind: String,
    pub happened_on: NaiveDate,
    pub due_on: Option<NaiveDate>,
    pub lot: Option<(i64, String)>,
    pub note: String,
    pub by: String,
}

/// The events of a piece of equipment, newest first, at most `limit`.
pub fn events(reader: &Reader<'_>, equipment: i64, limit: i64) -> Answer<Vec<EquipmentEvent>> {
    reader.all(
        "select e.kind, e.happened_on, e.due_on, l.id, l.number, coalesce(e.note, ''), p.full_name
         from equipment_event e
         join account p on p.id = e.account
         left join lot l on l.id = e.lot
         where e.equipment = :equipment
         order by e.id desc
         limit :limit",
        named_params! { ":equipment": equipment, ":limit": limit },
        |row| {
            let lot: Option<i64> = row.get(3)?;
            let number: Option<String> = row.get(4)?;
            Ok(EquipmentEvent {
                kind: row.get(0)?,
                happened_on: row.get::<_, Day>(1)?.0,
                due_on: row.get::<_, Option<Day>>(2)?.map(|day| day.0),
                lot: lot.zip(number),
                note: row.get(5)?,
                by: row.get(6)?,
            })
        },
    )
}

/// The equipment a lot was made in, in the order of its first use.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<(i64, String, String)>> {
    reader.all(
        "select q.id, q.code, q.name
         from equipment_event e join equipment q on q.id = e.equipment
         where e.lot = :lot and e.kind = 'used'
         group by q.id
         order by min(e.id)",
        named_params! { ":lot": lot },
        |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)),
    )
}
