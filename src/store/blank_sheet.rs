//! Blank sheets and what became of each.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::blank_sheet::{SheetEventKind, SheetFacts};

/// A sheet with what its list and page show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BlankSheet {
    pub id: i64,
    pub number: i64,
    pub purpose: String,
    pub lot: Option<(i64, String)>,
    pub holder: String,
    pub issued_by: String,
    /// As stored: UTC.
    pub issued_at: String,
    pub events: Vec<SheetEvent>,
}

/// What happened to a sheet.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SheetEvent {
    pub kind: SheetEventKind,
    pub text: String,
    pub account: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

impl BlankSheet {
    pub fn facts(&self) -> SheetFacts {
        let transcribed = self.events.iter().find(|one| one.kind == SheetEventKind::Transcribed);
        SheetFacts {
            number: self.number,
            events: self.events.iter().map(|one| one.kind).collect(),
            transcriber: transcribed.map(|one| one.account),
        }
    }
}

const SELECT: &str = "select s.id, s.number, s.purpose, l.id, l.number, p.full_name, a.full_name, a.at
    from blank_sheet s
    join account p on p.id = s.issued_to
    join trail_act a on a.id = s.act
    left join lot l on l.id = s.lot";

fn from_row(row: &Row<'_>) -> rusqlite::Result<BlankSheet> {
    let (lot, number): (Option<i64>, Option<String>) = (row.get(3)?, row.get(4)?);
    Ok(BlankSheet {
        id: row.get(0)?,
        number: row.get(1)?,
        purpose: row.get(2)?,
        lot: lot.zip(number),
        holder: row.get(5)?,
        issued_by: row.get(6)?,
        issued_at: row.get(7)?,
        events: Vec::new(),
    })
}

/// The events of the sheets from one on, oldest first, with the sheet of each.
fn events(reader: &Reader<'_>, first: i64, last: i64) -> Answer<Vec<(i64, SheetEvent)>> {
    reader.all(
        "select e.blank_sheet, e.kind, e.text, e.account, a.full_name, a.at
         from blank_sheet_event e join trail_act a on a.id = e.act
         where e.blank_sheet between :first and :last
         order by e.id",
        named_params! { ":first": first, ":last": last },
        |row| {
            let kind: String = row.get(1)?;
            let event = SheetEvent {
                kind: SheetEventKind::from_words(&kind).unwrap_or(SheetEventKind::Voided),
                text: row.get(2)?,
                account: row.get(3)?,
                by: row.get(4)?,
                at: row.get(5)?,
            };
            Ok((row.get(0)?, event))
        },
    )
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<BlankSheet> {
    let sql = format!("{SELECT} where s.id = :id");
    let mut found =
        reader.one("blank sheet with this number", &sql, named_params! { ":id": id }, from_row)?;
    found.events = events(reader, id, id)?.into_iter().map(|(_, event)| event).collect();
    Ok(found)
}

/// Sheets newest first, those issued before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<BlankSheet>> {
    let sql = format!("{SELECT} where s.id < :before order by s.id desc limit :limit");
    let params = named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit };
    let mut found = reader.all(&sql, params, from_row)?;
    let (Some(last), Some(first)) = (found.first().map(|one| one.id), found.last().map(|one| one.id)) else {
        return Ok(found);
    };
    for (sheet, event) in events(reader, first, last)? {
        if let Some(place) = found.iter_mut().find(|one| one.id == sheet) {
            place.events.push(event);
        }
    }
    Ok(found)
}

/// Issues a sheet with the next number; answers with its id and number.
pub fn insert(change: &Change<'_>, purpose: &str, lot: Option<i64>, issued_to: i64) -> Answer<(i64, i64)> {
    let number = change.one("number", "select coalesce(max(number), 0) + 1 from blank_sheet", [], |row| {
        row.get::<_, i64>(0)
    })?;
    let id = change.insert(
        "insert into blank_sheet (number, purpose, lot, issued_to) values (:number, :purpose, :lot, :to)",
        named_params! { ":number": number, ":purpose": purpose, ":lot": lot, ":to": issued_to },
    )?;
    Ok((id, number))
}

pub fn insert_event(change: &Change<'_>, sheet: i64, kind: SheetEventKind, text: &str) -> Answer<i64> {
    change.insert(
        "insert into blank_sheet_event (blank_sheet, kind, text, account) values (:sheet, :kind, :text, :account)",
        named_params! {
            ":sheet": sheet,
            ":kind": kind.words(),
            ":text": text,
            ":account": change.actor().account,
        },
    )
}
