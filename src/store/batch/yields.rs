//! The yields of the phases of a record, and their checks.

use std::collections::BTreeMap;

use rusqlite::{Row, named_params};

use crate::domain::batch::yields::{Computed, NewYield};
use crate::domain::batch::{PhaseYield, Verdict};
use crate::store::door::Change;
use crate::store::{Answer, Exact, Reader};

const SELECT: &str = "select y.id, y.phase, y.actual, y.samples, y.rejects, y.waste, y.unit, y.theoretical, y.percent,
        y.accountable_percent, y.verdict, y.limits, y.deviation, d.number, y.account, a.full_name, a.at, b.full_name,
        b.at, y.record
    from phase_yield y
    join trail_act a on a.id = y.act
    left join deviation d on d.id = y.deviation
    left join phase_yield_check c on c.phase_yield = y.id
    left join trail_act b on b.id = c.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<PhaseYield> {
    let exact = |place: usize| row.get::<_, Exact>(place).map(|found| found.0);
    let (by, at): (Option<String>, Option<String>) = (row.get(17)?, row.get(18)?);
    Ok(PhaseYield {
        id: row.get(0)?,
        phase: usize::try_from(row.get::<_, i64>(1)? - 1).unwrap_or_default(),
        actual: exact(2)?,
        samples: exact(3)?,
        rejects: exact(4)?,
        waste: exact(5)?,
        unit: row.get(6)?,
        theoretical: exact(7)?,
        percent: exact(8)?,
        accountable_percent: exact(9)?,
        verdict: Verdict::from_words(&row.get::<_, String>(10)?),
        limits: row.get(11)?,
        deviation: row.get(12)?,
        deviation_number: row.get(13)?,
        account: row.get(14)?,
        by: row.get(15)?,
        at: row.get(16)?,
        checked: by.zip(at),
    })
}

/// The yields of a record, oldest first; the newest of a phase counts.
pub fn of_record(reader: &Reader<'_>, record: i64) -> Answer<Vec<PhaseYield>> {
    let sql = format!("{SELECT} where y.record = :record order by y.id");
    reader.all(&sql, named_params! { ":record": record }, from_row)
}

/// The yields of the records in the making, by record.
pub fn of_open(reader: &Reader<'_>) -> Answer<BTreeMap<i64, Vec<PhaseYield>>> {
    let sql = format!("{SELECT} where y.record in (select record from open_batch) order by y.id");
    let rows = reader.all(&sql, [], |row| Ok((row.get::<_, i64>(19)?, from_row(row)?)))?;
    let mut found: BTreeMap<i64, Vec<PhaseYield>> = BTreeMap::new();
    for (record, one) in rows {
        found.entry(record).or_default().push(one);
    }
    Ok(found)
}

/// Inserts the yield of a phase, counted from 0.
pub fn insert(
    change: &Change<'_>,
    record: i64,
    phase: usize,
    unit: &str,
    (new, computed): (&NewYield, &Computed),
    deviation: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into phase_yield (record, phase, actual, samples, rejects, waste, unit, theoretical, percent,
             accountable_percent, verdict, limits, deviation, account)
         values (:record, :phase, :actual, :samples, :rejects, :waste, :unit, :theoretical, :percent, :accountable,
             :verdict, :limits, :deviation, :account)",
        named_params! {
            ":record": record,
            ":phase": phase as i64 + 1,
            ":actual": Exact(new.actual),
            ":samples": Exact(new.samples),
            ":rejects": Exact(new.rejects),
            ":waste": Exact(new.waste),
            ":unit": unit,
            ":theoretical": Exact(computed.theoretical),
            ":percent": Exact(computed.percent),
            ":accountable": Exact(computed.accountable_percent),
            ":verdict": computed.verdict.words(),
            ":limits": computed.limits,
            ":deviation": deviation,
            ":account": change.actor().account,
        },
    )
}

pub fn insert_check(change: &Change<'_>, phase_yield: i64) -> Answer<i64> {
    change.insert(
        "insert into phase_yield_check (phase_yield, account) values (:phase_yield, :account)",
        named_params! { ":phase_yield": phase_yield, ":account": change.actor().account },
    )
}

/// The yields of a record with their checks as they are signed, one line each, as of an act.
pub fn lines(reader: &Reader<'_>, record: i64, up_to_act: Option<i64>) -> Answer<Vec<String>> {
    reader.all(
        "select json_array(y.id, y.phase, y.actual, y.samples, y.rejects, y.waste, y.unit, y.theoretical, y.percent,
             y.accountable_percent, y.verdict, y.limits, y.deviation, y.account, y.act, c.account, c.act)
         from phase_yield y left join phase_yield_check c on c.phase_yield = y.id and c.act <= :act
         where y.record = :record and y.act <= :act
         order by y.id",
        named_params! { ":record": record, ":act": up_to_act.unwrap_or(i64::MAX) },
        |row| row.get(0),
    )
}
