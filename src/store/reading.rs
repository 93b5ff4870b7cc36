//! Readings: insert-only rows; a later row supersedes an earlier one.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::reading::{Question, Reading, Said};
use crate::domain::slot::SlotKey;

/// The row of the act being written comes at its end, so within it a new reading has no person yet.
const SELECT: &str = "select r.sample_test, r.id, r.container, r.replicate, r.field, r.typed, r.value,
        r.qualifier, r.read_at, r.due_at, r.instrument, r.hints, r.hint_answer, r.supersedes, r.act,
        coalesce(a.account, 0), coalesce(a.full_name, ''), coalesce(a.at, ''), a.reason,
        coalesce(c.label, ''), json_extract(v.content, '$.level'), r.inspected_every, t.sample
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
        inspected_every: row.get(21)?,
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

/// All rows of all tests of these samples (a JSON list) with sample and test, oldest first.
pub fn of_samples(reader: &Reader<'_>, samples: &str) -> Answer<Vec<(i64, i64, Reading)>> {
    reader.all(
        &format!(
            "{SELECT} where r.sample_test in (select o.id from json_each(:samples) j
                 join sample_test o on o.sample = j.value)
             order by r.id"
        ),
        named_params! { ":samples": samples },
        |row| {
            let (test, reading) = from_row(row)?;
            Ok((row.get(22)?, test, reading))
        },
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
    pub inspected_every: Option<u32>,
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
        "insert into reading (sample_test, container, replicate, field, typed, value, qualifier, read_at,
             due_at, inspected_every, instrument, hints, hint_answer, supersedes)
         values (:test, :container, :replicate, :field, :typed, :value, :qualifier, :read_at, :due_at,
             :inspected_every, :instrument, :hints, :answer, :supersedes)",
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
            ":inspected_every": beside.inspected_every,
            ":instrument": beside.instrument,
            ":hints": hints,
            ":answer": beside.answer,
            ":supersedes": beside.supersedes,
        },
    )
}

/// A method version with open tests at the bench.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OpenMethod {
    pub method_version: i64,
    pub code: String,
    pub name: String,
    pub open: i64,
    pub is_qualified: bool,
}

/// The method versions with tests open at the bench, and whether a person is qualified for them today.
pub fn open_methods(reader: &Reader<'_>, account: i64, today: chrono::NaiveDate) -> Answer<Vec<OpenMethod>> {
    reader.all(
        "select v.id, m.code, m.name, count(*),
             exists (select 1 from qualification q where q.account = :account and q.method_version = v.id
                 and :today between q.starts_on and q.ends_on)
         from open_sample o
         cross join sample s on s.id = o.sample
         cross join sample_test t on t.sample = s.id
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         where v.imported is null
             and (s.pull is null or coalesce((select e.kind from pull_event e where e.pull = s.pull
                order by e.id desc limit 1), '') = 'pulled')
             and (not exists (select 1 from result r where r.sample_test = t.id)
                or (select k.verdict from result_check k where k.sample_test = t.id and k.version =
                        (select max(version) from result where sample_test = t.id)
                    order by k.id desc limit 1) = 'sent back')
         group by v.id
         order by m.code, v.number",
        named_params! { ":account": account, ":today": super::Day(today) },
        |row| {
            Ok(OpenMethod {
                method_version: row.get(0)?,
                code: row.get(1)?,
                name: row.get(2)?,
                open: row.get(3)?,
                is_qualified: row.get(4)?,
            })
        },
    )
}

/// The samples at the bench with an open test of a method version: (sample, test), the earliest window first.
pub fn open_tests(reader: &Reader<'_>, method_version: i64) -> Answer<Vec<(i64, i64)>> {
    reader.all(
        "select s.id, t.id
         from open_sample o
         cross join sample s on s.id = o.sample
         cross join sample_test t on t.sample = s.id
         left join pull p on p.id = s.pull
         where t.method_version = :version
             and (s.pull is null or coalesce((select e.kind from pull_event e where e.pull = s.pull
                order by e.id desc limit 1), '') = 'pulled')
             and (not exists (select 1 from result r where r.sample_test = t.id)
                or (select k.verdict from result_check k where k.sample_test = t.id and k.version =
                        (select max(version) from result where sample_test = t.id)
                    order by k.id desc limit 1) = 'sent back')
         order by p.latest_on is null, p.latest_on, s.id
         limit 200",
        named_params! { ":version": method_version },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// The single values of a field at another pull, as they stand, in their order.
pub fn values_of_pull(
    reader: &Reader<'_>,
    pull: i64,
    test: &str,
    field: &str,
) -> Answer<Vec<rust_decimal::Decimal>> {
    let rows = reader.all(
        "select r.value
         from sample s
         join sample_test t on t.sample = s.id and t.test = :test
         join reading r on r.sample_test = t.id
         where s.pull = :pull and r.field = :field and r.qualifier = '='
             and not exists (select 1 from reading n where n.supersedes = r.id)
         order by r.replicate, r.id",
        named_params! { ":pull": pull, ":test": test, ":field": field },
        |row| row.get::<_, Option<Exact>>(0),
    )?;
    Ok(rows.into_iter().flatten().map(|exact| exact.0).collect())
}

/// The newest reading an act made, if it made one.
pub fn newest_of_act(reader: &Reader<'_>, act: i64) -> Answer<Option<i64>> {
    reader.one(
        "reading",
        "select max(row) from trail_change where act = :act and record = 'reading'",
        named_params! { ":act": act },
        |row| row.get(0),
    )
}
