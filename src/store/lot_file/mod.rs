//! Loads everything about one lot: one query a kind of record, never one a row.

mod definition;
mod life;
mod making;
mod observation;
pub mod system;

use std::collections::BTreeSet;

use rusqlite::types::ValueRef;
use rusqlite::{Row, named_params};

use super::{Answer, Reader, lot, series, site};
use crate::domain::lot_file::{Cell, LotFile, Table};
use crate::domain::series::{ArmWords, SeriesPoint};

/// One kind of record: file name, title, numeric columns, and its query over the lot and the bulk lots it came from.
struct Query {
    name: &'static str,
    title: &'static str,
    numeric: &'static [&'static str],
    sql: &'static str,
}

/// The lot and the bulk lots it was filled from, whose history it inherits.
macro_rules! of_family {
    ($sql:literal) => {
        concat!(
            "with recursive family (id) as (
                 select :lot
                 union
                 select l.bulk_lot from lot l join family on family.id = l.id where l.bulk_lot is not null
             ) ",
            $sql
        )
    };
}
use of_family;

/// Everything about a lot. Missing where there is none.
pub fn load(reader: &Reader<'_>, id: i64) -> Answer<LotFile> {
    let found = lot::get(reader, id)?;
    let mut tables = Vec::new();
    for query in
        definition::QUERIES.iter().chain(making::QUERIES).chain(life::QUERIES).chain(observation::QUERIES)
    {
        tables.push(table(reader, id, query)?);
    }
    let acts = acts(reader, id, &tables)?;
    tables.push(entries(reader, &acts)?);
    tables.push(people(reader, &acts)?);
    let site = site::get(reader)?;
    Ok(LotFile {
        lot: id,
        number: found.number.clone(),
        about: format!(
            "{} {}, {}: {}",
            found.product_code,
            found.product_name,
            found.presentation_words,
            found.state().words()
        ),
        site: site.as_ref().map(|site| site.name.clone()).unwrap_or_default(),
        zone: site.map_or(chrono_tz::UTC, |site| site.zone),
        series: charted(reader, id)?,
        clarities: series::clarities_of_lot(reader, id)?,
        tables,
    })
}

fn table(reader: &Reader<'_>, lot: i64, query: &Query) -> Answer<Table> {
    let params = named_params! { ":lot": lot };
    filled(reader, query.name, query.title, query.numeric, query.sql, params)
}

fn filled(
    reader: &Reader<'_>,
    name: &'static str,
    title: &'static str,
    numeric: &'static [&'static str],
    sql: &str,
    params: impl rusqlite::Params,
) -> Answer<Table> {
    let columns = {
        let statement = reader.connection().prepare_cached(sql)?;
        statement.column_names().iter().map(|name| name.to_string()).collect()
    };
    let rows = reader.all(sql, params, cells)?;
    Ok(Table { name, title, columns, numeric, rows })
}

fn cells(row: &Row<'_>) -> rusqlite::Result<Vec<Cell>> {
    (0..row.as_ref().column_count())
        .map(|at| {
            Ok(match row.get_ref(at)? {
                ValueRef::Null => Cell::Missing,
                ValueRef::Integer(number) => Cell::Integer(number),
                ValueRef::Real(number) => Cell::Text(number.to_string()),
                ValueRef::Text(bytes) => Cell::Text(String::from_utf8_lossy(bytes).into_owned()),
                ValueRef::Blob(bytes) => Cell::Text(crate::domain::digest::hex(bytes)),
            })
        })
        .collect()
}

/// The acts behind all loaded records, and those listed in the histories of the lot, its studies and its samples.
/// An export of the lot file itself is left out: it says nothing about the lot.
fn acts(reader: &Reader<'_>, lot: i64, tables: &[Table]) -> Answer<String> {
    let mut acts: BTreeSet<i64> = BTreeSet::new();
    for table in tables {
        let Some(at) = table.column("act") else { continue };
        for row in &table.rows {
            if let Some(Cell::Integer(act)) = row.get(at) {
                acts.insert(*act);
            }
        }
    }
    let listed = reader.all(
        of_family!(
            "select t.act from trail_subject t join family on t.kind = 'lot' and t.subject = family.id
             union
             select t.act from trail_subject t
             join study s on t.kind = 'study' and t.subject = s.id where s.lot in (select id from family)
             union
             select t.act from trail_subject t
             join sample s on t.kind = 'sample' and t.subject = s.id where s.lot in (select id from family)
             union
             select t.act from trail_subject t
             join pull p on t.kind = 'pull' and t.subject = p.id
             join study_arm a on a.id = p.study_arm
             join study s on s.id = a.study where s.lot in (select id from family)"
        ),
        named_params! { ":lot": lot },
        |row| row.get::<_, i64>(0),
    )?;
    acts.extend(listed);
    Ok(serde_json::to_string(&acts)?)
}

fn entries(reader: &Reader<'_>, acts: &str) -> Answer<Table> {
    filled(
        reader,
        "entries",
        "Entries of the audit trail",
        &["offset_minutes"],
        "select a.id as act, a.at, a.offset_minutes, a.user_name, a.full_name, a.role, a.act as code, a.detail,
             a.reason, a.outcome, lower(hex(s.digest)) as seal
         from json_each(:acts) j
         join trail_act a on a.id = j.value
         join trail_seal s on s.act = a.id
         where a.act <> 'ExportLotFile'
         order by a.id",
        named_params! { ":acts": acts },
    )
}

/// Everybody who acted on the lot, with all role sets they ever held and from when.
fn people(reader: &Reader<'_>, acts: &str) -> Answer<Table> {
    filled(
        reader,
        "people",
        "People and their roles",
        &[],
        "select r.id, p.user_name, p.full_name, p.kind, p.identity_verified_by, r.roles, t.at as held_from, r.act
         from account p
         left join account_roles r on r.account = p.id
         left join trail_act t on t.id = r.act
         where p.id in (
             select a.account from json_each(:acts) j join trail_act a on a.id = j.value
             where a.act <> 'ExportLotFile')
         order by p.full_name, r.id",
        named_params! { ":acts": acts },
    )
}

/// The points of the lot's own studies, arm by arm.
fn charted(reader: &Reader<'_>, lot: i64) -> Answer<Vec<(ArmWords, Vec<SeriesPoint>)>> {
    let studies = reader.all(
        "select id from study where lot = :lot order by id",
        named_params! { ":lot": lot },
        |row| row.get::<_, i64>(0),
    )?;
    let mut charted = Vec::new();
    for study in studies {
        charted.extend(series::arms_of_study(reader, study)?);
    }
    Ok(charted)
}
