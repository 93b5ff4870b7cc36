//! The records of lots: their copies of the master record, what was done, and the lists of those in the making.

pub mod entry;
pub mod yields;

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::batch::{Entry, PhaseYield, RecordContent};

/// A record with what a page needs to name it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BatchRecord {
    pub id: i64,
    pub number: String,
    pub lot: i64,
    pub lot_number: String,
    pub made_on: Option<NaiveDate>,
    pub content: RecordContent,
    /// As stored, for its digest.
    pub document: String,
    pub digest: String,
    pub is_closed: bool,
    /// The newest decision on the lot: released or rejected.
    pub lot_decision: Option<String>,
    pub started_by: String,
    /// As stored: UTC.
    pub started_at: String,
}

const SELECT: &str = "select r.id, r.number, r.lot, l.number, l.made_on, r.content, r.digest,
        coalesce((select kind from batch_event where record = r.id order by id desc limit 1), '') = 'closed',
        (select decision from lot_decision where lot = r.lot order by id desc limit 1),
        a.full_name, a.at
    from batch_record r
    join lot l on l.id = r.lot
    join trail_act a on a.id = r.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<BatchRecord> {
    let document: String = row.get(5)?;
    let content = serde_json::from_str(&document).map_err(|error| {
        rusqlite::Error::FromSqlConversionFailure(5, rusqlite::types::Type::Text, Box::new(error))
    })?;
    Ok(BatchRecord {
        id: row.get(0)?,
        number: row.get(1)?,
        lot: row.get(2)?,
        lot_number: row.get(3)?,
        made_on: row.get::<_, Option<Day>>(4)?.map(|day| day.0),
        content,
        document,
        digest: row.get(6)?,
        is_closed: row.get(7)?,
        lot_decision: row.get(8)?,
        started_by: row.get(9)?,
        started_at: row.get(10)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<BatchRecord> {
    let sql = format!("{SELECT} where r.id = :id");
    reader.one("batch record with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The record of a lot, where it was made here.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Option<BatchRecord>> {
    let sql = format!("{SELECT} where r.lot = :lot");
    reader.maybe(&sql, named_params! { ":lot": lot }, from_row)
}

/// The number of a lot's record, without its content.
pub fn id_of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Option<i64>> {
    reader.maybe("select id from batch_record where lot = :lot", named_params! { ":lot": lot }, |row| {
        row.get(0)
    })
}

pub fn insert(change: &Change<'_>, lot: i64, number: &str, document: &str, digest: &str) -> Answer<i64> {
    change.insert(
        "insert into batch_record (uuid, number, lot, content, digest)
         values (:uuid, :number, :lot, :content, :digest)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": number,
            ":lot": lot,
            ":content": document,
            ":digest": digest,
        },
    )
}

/// How many lots are in the making.
pub fn open_count(reader: &Reader<'_>) -> Answer<usize> {
    let count: u32 = reader.one("count", "select count(*) from open_batch", [], |row| row.get(0))?;
    Ok(count as usize)
}

/// A record in the making with all that says where it stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OpenBatch {
    pub record: BatchRecord,
    pub entries: Vec<Entry>,
    pub yields: Vec<PhaseYield>,
}

/// The records in the making, oldest first: three queries, however many there are.
pub fn open(reader: &Reader<'_>) -> Answer<Vec<OpenBatch>> {
    let sql = format!("{SELECT} join open_batch o on o.record = r.id order by r.id");
    let records = reader.all(&sql, [], from_row)?;
    if records.is_empty() {
        return Ok(Vec::new());
    }
    let (mut entries, mut yields) = (entry::of_open(reader)?, yields::of_open(reader)?);
    let of = |record: BatchRecord| OpenBatch {
        entries: entries.remove(&record.id).unwrap_or_default(),
        yields: yields.remove(&record.id).unwrap_or_default(),
        record,
    };
    Ok(records.into_iter().map(of).collect())
}

/// A record that is no longer in the making, for its list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BatchLine {
    pub id: i64,
    pub lot_number: String,
    pub product: String,
    pub made_on: Option<NaiveDate>,
    pub decision: Option<String>,
    pub deviations: i64,
}

/// Records not in the making, newest first, those before `before`: paging by key.
pub fn settled_before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<BatchLine>> {
    reader.all(
        "select r.id, l.number, d.code || ' ' || d.name, l.made_on,
             (select decision from lot_decision where lot = l.id order by id desc limit 1),
             (select count(*) from deviation where lot = l.id)
         from batch_record r
         join lot l on l.id = r.lot
         join presentation p on p.id = l.presentation
         join product d on d.id = p.product
         where r.id < :before and not exists (select 1 from open_batch where record = r.id)
         order by r.id desc
         limit :limit",
        named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit },
        |row| {
            Ok(BatchLine {
                id: row.get(0)?,
                lot_number: row.get(1)?,
                product: row.get(2)?,
                made_on: row.get::<_, Option<Day>>(3)?.map(|day| day.0),
                decision: row.get(4)?,
                deviations: row.get(5)?,
            })
        },
    )
}

/// The presentation of a product as a choice.
pub fn approved_masters(reader: &Reader<'_>) -> Answer<Vec<(i64, i64, String)>> {
    reader.all(
        "select v.id, f.product, f.code || ' version ' || v.number || ': ' || d.name
         from formulation_version v
         join formulation f on f.id = v.formulation
         join product d on d.id = f.product
         where v.imported is null and json_extract(v.content, '$.master') is not null and exists (
             select 1 from signature
             where kind = 'formulation_version' and subject = v.id and meaning = 'approval')
         order by f.code, v.number desc",
        [],
        |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)),
    )
}

/// Closing and opening again.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BatchEvent {
    pub kind: String,
    pub why: Option<String>,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

pub fn events(reader: &Reader<'_>, record: i64) -> Answer<Vec<BatchEvent>> {
    reader.all(
        "select e.kind, e.why, a.full_name, a.at
         from batch_event e join trail_act a on a.id = e.act
         where e.record = :record
         order by e.id",
        named_params! { ":record": record },
        |row| Ok(BatchEvent { kind: row.get(0)?, why: row.get(1)?, by: row.get(2)?, at: row.get(3)? }),
    )
}

pub fn insert_event(
    change: &Change<'_>,
    record: i64,
    kind: &str,
    why: Option<&str>,
    signature: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into batch_event (record, kind, why, signature, account)
         values (:record, :kind, :why, :signature, :account)",
        named_params! {
            ":record": record,
            ":kind": kind,
            ":why": why,
            ":signature": signature,
            ":account": change.actor().account,
        },
    )
}

/// The text that is signed when a record is closed: its copy of the master record, then every entry and yield in their
/// order, as of an act.
pub fn canonical(reader: &Reader<'_>, record: i64, up_to_act: Option<i64>) -> Answer<String> {
    let found = get(reader, record)?;
    let mut text = format!("record {} of lot {}\n{}\n", found.number, found.lot_number, found.document);
    for line in entry::lines(reader, record, up_to_act)? {
        text.push_str(&line);
        text.push('\n');
    }
    for line in yields::lines(reader, record, up_to_act)? {
        text.push_str(&line);
        text.push('\n');
    }
    Ok(text)
}
