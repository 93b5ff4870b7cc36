//! Racks of development lots, and what was seen of them.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Exact, Reader, new_uuid};
use crate::domain::rack::{Look, NewRack};

/// A rack as lists and its page show it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Rack {
    pub id: i64,
    pub code: String,
    pub title: String,
    pub started_on: NaiveDate,
    pub lots: i64,
    pub put_up_by: String,
}

/// A lot on a rack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RackLot {
    pub lot: i64,
    pub number: String,
    pub formulation: String,
    pub formulation_version: i64,
    pub position: i64,
}

const SELECT: &str = "select r.id, r.code, r.title, r.started_on,
        (select count(*) from rack_lot where rack = r.id), a.full_name
    from rack r join trail_act a on a.id = r.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Rack> {
    Ok(Rack {
        id: row.get(0)?,
        code: row.get(1)?,
        title: row.get(2)?,
        started_on: row.get::<_, Day>(3)?.0,
        lots: row.get(4)?,
        put_up_by: row.get(5)?,
    })
}

pub fn all(reader: &Reader<'_>) -> Answer<Vec<Rack>> {
    reader.all(&format!("{SELECT} order by r.started_on desc, r.id desc"), [], from_row)
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Rack> {
    let sql = format!("{SELECT} where r.id = :id");
    reader.one("rack with this number", &sql, named_params! { ":id": id }, from_row)
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from rack where code = :code", named_params! { ":code": code })
}

pub fn insert(change: &Change<'_>, new: &NewRack) -> Answer<i64> {
    change.insert(
        "insert into rack (uuid, code, title, started_on) values (:uuid, :code, :title, :started_on)",
        named_params! {
            ":uuid": new_uuid(),
            ":code": new.code,
            ":title": new.title,
            ":started_on": Day(new.started_on),
        },
    )
}

pub fn put(change: &Change<'_>, rack: i64, lot: i64, position: i64) -> Answer<i64> {
    change.insert(
        "insert into rack_lot (rack, lot, position) values (:rack, :lot, :position)",
        named_params! { ":rack": rack, ":lot": lot, ":position": position },
    )
}

/// The lots of a rack by their place.
pub fn lots(reader: &Reader<'_>, rack: i64) -> Answer<Vec<RackLot>> {
    reader.all(
        "select l.id, l.number, f.code || ' version ' || v.number, v.id, k.position
         from rack_lot k
         join lot l on l.id = k.lot
         join formulation_version v on v.id = l.formulation_version
         join formulation f on f.id = v.formulation
         where k.rack = :rack
         order by k.position",
        named_params! { ":rack": rack },
        |row| {
            Ok(RackLot {
                lot: row.get(0)?,
                number: row.get(1)?,
                formulation: row.get(2)?,
                formulation_version: row.get(3)?,
                position: row.get(4)?,
            })
        },
    )
}

/// The code of the rack a lot stands on.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Option<(i64, String)>> {
    reader.maybe(
        "select r.id, r.code from rack_lot k join rack r on r.id = k.rack where k.lot = :lot",
        named_params! { ":lot": lot },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

pub fn is_on_official_study(reader: &Reader<'_>, lot: i64) -> Answer<bool> {
    reader.exists(
        "select 1 from study where lot = :lot and programme <> 'development'",
        named_params! { ":lot": lot },
    )
}

/// Laboratory lots that stand on no rack: number of the record and of the lot, the newest first.
pub fn free_lots(reader: &Reader<'_>) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select l.id, l.number from lot l
         where l.scale = 'laboratory' and l.imported is null
             and not exists (select 1 from rack_lot k where k.lot = l.id)
         order by l.id desc limit 200",
        [],
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// What was seen of the lots of a rack: their development samples and the pulls of development studies, newest
/// results, by day since the rack's time zero.
pub fn looks(reader: &Reader<'_>, rack: i64) -> Answer<Vec<Look>> {
    let value = |test: &str, column: &str| {
        format!(
            "(select r.{column} from sample_test t join result r on r.sample_test = t.id
                 where t.sample = s.id and t.test = '{test}' and r.component = ''
                 and r.version = (select max(version) from result where sample_test = t.id))"
        )
    };
    let sql = format!(
        "select s.lot, s.id,
             cast(julianday(coalesce(s.received_on,
                 (select e.happened_on from pull_event e where e.pull = s.pull and e.kind = 'pulled' limit 1)))
                 - julianday(k.started_on) as integer),
             {}, (select r.typed from sample_test t join reading r on r.sample_test = t.id
                 where t.sample = s.id and r.field like 'clarity@%' and r.qualifier <> 'not read'
                 and not exists (select 1 from reading later where later.supersedes = r.id)
                 order by cast(substr(r.field, 9) as integer) desc limit 1),
             {}, {}, {}
         from rack_lot m
         join rack k on k.id = m.rack
         join sample s on s.lot = m.lot
         where m.rack = :rack and (s.purpose = 'development' or exists (
             select 1 from pull p join study_arm a on a.id = p.study_arm join study st on st.id = a.study
             where p.id = s.pull and st.programme = 'development'))
         order by s.id",
        value("sedimentation", "value"),
        value("redispersibility", "value"),
        value("redispersibility", "qualifier"),
        value("redispersibility", "shown")
    );
    let rows = reader.all(&sql, named_params! { ":rack": rack }, look)?;
    Ok(rows.into_iter().flatten().collect())
}

/// None where the sample has no day, or nothing of it was reported yet.
fn look(row: &Row<'_>) -> rusqlite::Result<Option<Look>> {
    let exact = |column: usize| -> rusqlite::Result<_> {
        Ok(row.get::<_, Option<Exact>>(column)?.map(|Exact(value)| value))
    };
    let Some(day) = row.get::<_, Option<i64>>(2)? else { return Ok(None) };
    let (ratio, inversions) = (exact(3)?, exact(5)?);
    if ratio.is_none() && inversions.is_none() {
        return Ok(None);
    }
    let clarity: Option<String> = row.get(4)?;
    Ok(Some(Look {
        lot: row.get(0)?,
        sample: row.get(1)?,
        day,
        ratio,
        clarity: clarity.and_then(|text| text.trim().parse().ok()).filter(|grade| *grade <= 3),
        inversions,
        is_beyond: row.get::<_, Option<String>>(6)?.as_deref() == Some(">"),
        inversions_shown: row.get::<_, Option<String>>(7)?.unwrap_or_default(),
    }))
}
