//! What was done in the steps of a record.

use std::collections::BTreeMap;

use rusqlite::{Row, named_params};

use crate::domain::batch::{Entry, EntryKind, NewEntry, Verdict};
use crate::store::door::Change;
use crate::store::{Answer, Exact, Reader};

const SELECT: &str = "select e.id, e.step, e.run, e.kind, e.name, e.point, e.typed, e.value, e.unit, e.verdict,
        e.limits, e.detail, e.material_lot, e.stock_entry, e.equipment, q.code, e.instrument, i.code, e.deviation,
        d.number, e.answers, e.happened_at, e.supersedes, e.account, a.full_name, a.at, a.reason, e.record
    from step_entry e
    join trail_act a on a.id = e.act
    left join equipment q on q.id = e.equipment
    left join instrument i on i.id = e.instrument
    left join deviation d on d.id = e.deviation";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Entry> {
    let (kind, verdict, detail): (String, String, String) = (row.get(3)?, row.get(9)?, row.get(11)?);
    let weighed = serde_json::from_str(&detail).map_err(|error| {
        rusqlite::Error::FromSqlConversionFailure(11, rusqlite::types::Type::Text, Box::new(error))
    })?;
    Ok(Entry {
        id: row.get(0)?,
        step: usize::try_from(row.get::<_, i64>(1)?).unwrap_or_default(),
        run: row.get(2)?,
        kind: EntryKind::from_words(&kind).unwrap_or(EntryKind::Note),
        name: row.get(4)?,
        point: row.get(5)?,
        typed: row.get(6)?,
        value: row.get::<_, Option<Exact>>(7)?.map(|exact| exact.0),
        unit: row.get(8)?,
        verdict: Verdict::from_words(&verdict),
        limits: row.get(10)?,
        weighed,
        material_lot: row.get(12)?,
        stock_entry: row.get(13)?,
        equipment: row.get(14)?,
        equipment_code: row.get(15)?,
        instrument: row.get(16)?,
        instrument_code: row.get(17)?,
        deviation: row.get(18)?,
        deviation_number: row.get(19)?,
        answers: row.get(20)?,
        happened_at: row.get(21)?,
        supersedes: row.get(22)?,
        account: row.get(23)?,
        by: row.get(24)?,
        at: row.get(25)?,
        reason: row.get(26)?,
    })
}

/// Everything done in a record, oldest first.
pub fn of_record(reader: &Reader<'_>, record: i64) -> Answer<Vec<Entry>> {
    let sql = format!("{SELECT} where e.record = :record order by e.id");
    reader.all(&sql, named_params! { ":record": record }, from_row)
}

/// Everything done in the records in the making, by record.
pub fn of_open(reader: &Reader<'_>) -> Answer<BTreeMap<i64, Vec<Entry>>> {
    let sql = format!("{SELECT} where e.record in (select record from open_batch) order by e.id");
    let rows = reader.all(&sql, [], |row| Ok((row.get::<_, i64>(27)?, from_row(row)?)))?;
    let mut found: BTreeMap<i64, Vec<Entry>> = BTreeMap::new();
    for (record, entry) in rows {
        found.entry(record).or_default().push(entry);
    }
    Ok(found)
}

pub fn insert(change: &Change<'_>, record: i64, new: &NewEntry) -> Answer<i64> {
    change.insert(
        "insert into step_entry (record, step, run, kind, name, point, typed, value, unit, verdict, limits, detail,
             material_lot, stock_entry, equipment, instrument, deviation, answers, happened_at, supersedes, account)
         values (:record, :step, :run, :kind, :name, :point, :typed, :value, :unit, :verdict, :limits, :detail,
             :material_lot, :stock_entry, :equipment, :instrument, :deviation, :answers, :happened_at, :supersedes,
             :account)",
        named_params! {
            ":record": record,
            ":step": new.step as i64,
            ":run": new.run,
            ":kind": new.kind.words(),
            ":name": new.name,
            ":point": new.point,
            ":typed": new.typed,
            ":value": new.value.map(Exact),
            ":unit": new.unit,
            ":verdict": new.verdict.words(),
            ":limits": new.limits,
            ":detail": serde_json::to_string(&new.weighed)?,
            ":material_lot": new.material_lot,
            ":stock_entry": new.stock_entry,
            ":equipment": new.equipment,
            ":instrument": new.instrument,
            ":deviation": new.deviation,
            ":answers": new.answers,
            ":happened_at": new.happened_at,
            ":supersedes": new.supersedes,
            ":account": change.actor().account,
        },
    )
}

/// The entries of a record as they are signed, one line each, as of an act.
pub fn lines(reader: &Reader<'_>, record: i64, up_to_act: Option<i64>) -> Answer<Vec<String>> {
    reader.all(
        "select json_array(id, step, run, kind, name, point, typed, value, unit, verdict, limits, detail, material_lot,
             equipment, instrument, deviation, answers, happened_at, supersedes, account, act)
         from step_entry
         where record = :record and act <= :act
         order by id",
        named_params! { ":record": record, ":act": up_to_act.unwrap_or(i64::MAX) },
        |row| row.get(0),
    )
}
