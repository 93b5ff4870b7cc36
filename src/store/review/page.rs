//! The lines of a sample's review page: results, readings, checks.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use crate::domain::act::Act;
use crate::store::{Answer, Exact, Reader};

/// A result of any version with who completed it and when.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ResultLine {
    pub id: i64,
    pub sample_test: i64,
    pub test: String,
    pub title: String,
    pub version: i64,
    pub is_latest: bool,
    pub component: String,
    pub value: Option<Decimal>,
    pub qualifier: String,
    pub shown: String,
    pub unit: String,
    pub verdict: String,
    /// JSON of the judgement.
    pub detail: String,
    pub by: String,
    pub at: String,
    pub reason: Option<String>,
    /// The version came with a correction.
    pub is_correction: bool,
    pub method: String,
}

/// All results of a sample, tests in bench order, oldest version first.
pub fn results(reader: &Reader<'_>, sample: i64) -> Answer<Vec<ResultLine>> {
    reader.all(
        "select r.id, t.id, t.test, t.title, r.version,
             r.version = (select max(version) from result where sample_test = t.id),
             r.component, r.value, r.qualifier, r.shown, r.unit, r.verdict, r.detail, a.full_name, a.at, a.reason,
             a.act, m.code || ' version ' || v.number
         from sample_test t
         join result r on r.sample_test = t.id
         join trail_act a on a.id = r.act
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         where t.sample = :sample
         order by t.position, r.version, r.id",
        named_params! { ":sample": sample },
        result_from_row,
    )
}

fn result_from_row(row: &Row<'_>) -> rusqlite::Result<ResultLine> {
    let act: String = row.get(16)?;
    Ok(ResultLine {
        id: row.get(0)?,
        sample_test: row.get(1)?,
        test: row.get(2)?,
        title: row.get(3)?,
        version: row.get(4)?,
        is_latest: row.get(5)?,
        component: row.get(6)?,
        value: row.get::<_, Option<Exact>>(7)?.map(|Exact(value)| value),
        qualifier: row.get(8)?,
        shown: row.get(9)?,
        unit: row.get(10)?,
        verdict: row.get(11)?,
        detail: row.get(12)?,
        by: row.get(13)?,
        at: row.get(14)?,
        reason: row.get(15)?,
        is_correction: act == Act::CorrectReading.code(),
        method: row.get(17)?,
    })
}

/// A reading with who, when, and what it replaced.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReadingLine {
    pub id: i64,
    pub sample_test: i64,
    pub container: String,
    pub replicate: i64,
    pub field: String,
    pub typed: String,
    pub qualifier: String,
    pub read_at: Option<String>,
    pub due_at: Option<String>,
    pub inspected_every: Option<u32>,
    pub instrument: String,
    /// JSON of the questions it drew.
    pub hints: Option<String>,
    pub hint_answer: Option<String>,
    /// What was recorded before, where this row corrects it: text and qualifier.
    pub was: Option<(String, String)>,
    pub is_standing: bool,
    pub by: String,
    pub at: String,
    pub reason: Option<String>,
}

/// All readings of a sample in the order of recording.
pub fn readings(reader: &Reader<'_>, sample: i64) -> Answer<Vec<ReadingLine>> {
    reader.all(
        "select r.id, t.id, coalesce(c.label, ''), r.replicate, r.field, r.typed, r.qualifier, r.read_at, r.due_at,
             coalesce(i.code, ''), r.hints, r.hint_answer, old.typed, old.qualifier,
             not exists (select 1 from reading later where later.supersedes = r.id),
             a.full_name, a.at, a.reason, r.inspected_every
         from sample_test t
         join reading r on r.sample_test = t.id
         join trail_act a on a.id = r.act
         left join container c on c.id = r.container
         left join instrument i on i.id = r.instrument
         left join reading old on old.id = r.supersedes
         where t.sample = :sample
         order by t.position, r.id",
        named_params! { ":sample": sample },
        reading_from_row,
    )
}

fn reading_from_row(row: &Row<'_>) -> rusqlite::Result<ReadingLine> {
    let (typed, qualifier): (String, String) = (row.get(5)?, row.get(6)?);
    let was: Option<String> = row.get(12)?;
    let was_qualifier: Option<String> = row.get(13)?;
    let was = was.zip(was_qualifier).filter(|(text, kind)| *text != typed || *kind != qualifier);
    Ok(ReadingLine {
        id: row.get(0)?,
        sample_test: row.get(1)?,
        container: row.get(2)?,
        replicate: row.get(3)?,
        field: row.get(4)?,
        typed,
        qualifier,
        read_at: row.get(7)?,
        due_at: row.get(8)?,
        inspected_every: row.get(18)?,
        instrument: row.get(9)?,
        hints: row.get(10)?,
        hint_answer: row.get(11)?,
        was,
        is_standing: row.get(14)?,
        by: row.get(15)?,
        at: row.get(16)?,
        reason: row.get(17)?,
    })
}

/// What was said of a test's version: checked, or sent back with a reason.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CheckLine {
    pub sample_test: i64,
    pub version: i64,
    pub is_checked: bool,
    pub why: Option<String>,
    pub by: String,
    pub at: String,
}

pub fn checks(reader: &Reader<'_>, sample: i64) -> Answer<Vec<CheckLine>> {
    reader.all(
        "select t.id, k.version, k.verdict = 'checked', k.why, a.full_name, a.at
         from sample_test t
         join result_check k on k.sample_test = t.id
         join trail_act a on a.id = k.act
         where t.sample = :sample
         order by k.id",
        named_params! { ":sample": sample },
        |row| {
            Ok(CheckLine {
                sample_test: row.get(0)?,
                version: row.get(1)?,
                is_checked: row.get(2)?,
                why: row.get(3)?,
                by: row.get(4)?,
                at: row.get(5)?,
            })
        },
    )
}

/// The specification content a sample is judged by, as stored.
pub fn specification(reader: &Reader<'_>, version: i64) -> Answer<Option<String>> {
    reader.maybe(
        "select content from specification_version where id = :id",
        named_params! { ":id": version },
        |row| row.get(0),
    )
}

/// The investigations opened over a sample's results: number as people call it, and record number.
pub fn investigations(reader: &Reader<'_>, sample: i64) -> Answer<Vec<(i64, i64)>> {
    reader.all(
        "select distinct i.number, i.id
         from sample_test t
         join result r on r.sample_test = t.id
         join investigation i on i.result = r.id
         where t.sample = :sample
         order by i.number",
        named_params! { ":sample": sample },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}
