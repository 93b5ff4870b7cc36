//! Readings: insert-only rows; a later row supersedes an earlier one.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::reading::{Question, Reading, Said};
use crate::domain::slot::SlotKey;

/// The row of the act being written comes at its end, so within it a new reading has no person yet.
const SELECT: &str = "select r.sample_test, r.id, r.container, r.replicate, r.field, r.typed, r.value, r.qualifier,
        r.read_at, r.due_at, r.instrument, r.hints, r.hint_answer, r.supersedes, r.act,
        coalesce(a.account, 0), coalesce(a.full_name, ''), coalesce(a.at, ''), a.reason, coalesce(c.label, ''), json_extract(v.content, '$.level')
    from reading r
    left join trail_act a on a.id = r.act
    join sample_test t on t.id = r.sample_test
    join method_version v on v.id = t.method_version
    left join container c on c.id = r.container";

fn from_row(row: &Row<'_>) -> rusqlite::Result<(i64, Reading)> {
    let hints: Option<String> = row.get(11)?;
    let container: Option<i64> = row.get(2)?;
    let level: Option<String> = row.get(20)?;
    let of_slot = container.filter(|_| level.as_deref() == Some("container"));
    let reading = Reading {
        id: row.get(1)?,
        key: SlotKey { container: of_slot, replicate: row.get(3)?, field: row.get(4)? },
        container,
        container_label: row.get(19)?,
        typed: row.get(5)?,
        value: row.get::<_, Option<Exact>>(6)?.map(|exact| exact.0),
        qualifier: row.get(7)?,
        read_at: row.get(8)?,
        due_at: row.get(9)?,
        instrument: row.get(10)?,
        questions: hints.and_then(|text| serde_json::from_str(&text).ok()).unwrap_or_default(),
        answer: row.get(12)?,
        supersedes: row.get(13)?,
        act: row.get(14)?,
        account: row.get(15)?,
        by: row.get(16)?,
        at: row.get(17)?,
        reason: row.get(18)?,
    };
    Ok((row.get(0)?, reading))
}

/// All rows of all tests of a sample with their test, oldest first.
pub fn of_sample(reader: &Reader<'_>, sample: i64) -> Answer<Vec<(i64, Reading)>> {
    reader.all(
        &format!("{SELECT} where t.sample = :sample order by r.id"),
        named_params! { ":sample": sample },
        from_row,
    )
}

/// All rows of one test, oldest first.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Reading>> {
    let rows = reader.all(
        &format!("{SELECT} where r.sample_test = :test order by r.id"),
        named_params! { ":test": sample_test },
        from_row,
    )?;
    Ok(rows.into_iter().map(|(_, reading)| reading).collect())
}

/// What is written beside a reading's value.
#[derive(Clone, Debug, Default)]
pub struct Beside {
    pub container: Option<i64>,
    pub read_at: Option<String>,
    pub due_at: Option<String>,
    pub instrument: Option<i64>,
    pub questions: Vec<Question>,
    pub answer: Option<&'static str>,
    pub supersedes: Option<i64>,
}

pub fn insert(
    change: &Change<'_>,
    sample_test: i64,
    key: &SlotKey,
    said: &Said,
    beside: &Beside,
) -> Answer<i64> {
    let hints = match beside.questions.is_empty() {
        true => None,
        false => Some(serde_json::to_string(&beside.questions)?),
    };
    change.insert(
        "insert into reading (sample_test, container, replicate, field, typed, value, qualifier, read_at, due_at,
             instrument, hints, hint_answer, supersedes)
         values (:test, :container, :replicate, :field, :typed, :value, :qualifier, :read_at, :due_at,
             :instrument, :hints, :answer, :supersedes)",
        named_params! {
            ":test": sample_test,
            ":container": key.container.or(beside.container),
            ":replicate": key.replicate,
            ":field": key.field,
            ":typed": said.typed(),
            ":value": said.value().map(Exact),
            ":qualifier": said.qualifier(),
            ":read_at": beside.read_at,
            ":due_at": beside.due_at,
            ":instrument": beside.instrument,
            ":hints": hints,
            ":answer": beside.answer,
            ":supersedes": beside.supersedes,
        },
    )
}
