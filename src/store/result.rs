//! Results: what is reported of a completed test. A correction makes the next version.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Day, Exact, Reader};
use crate::domain::age::actual_months;
use crate::domain::judgement::Judged;

/// A result as stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StoredResult {
    pub id: i64,
    pub version: i64,
    pub component: String,
    pub value: Option<Decimal>,
    pub qualifier: String,
    pub shown: String,
    pub unit: String,
    pub verdict: String,
    /// JSON: replicates used, mean, spread, limits, way of comparing.
    pub detail: String,
    pub act: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

const SELECT: &str =
    "select r.id, r.version, r.component, r.value, r.qualifier, r.shown, r.unit, r.verdict, r.detail,
        r.act, coalesce(a.full_name, ''), coalesce(a.at, '')
    from result r left join trail_act a on a.id = r.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<StoredResult> {
    Ok(StoredResult {
        id: row.get(0)?,
        version: row.get(1)?,
        component: row.get(2)?,
        value: row.get::<_, Option<Exact>>(3)?.map(|exact| exact.0),
        qualifier: row.get(4)?,
        shown: row.get(5)?,
        unit: row.get(6)?,
        verdict: row.get(7)?,
        detail: row.get(8)?,
        act: row.get(9)?,
        by: row.get(10)?,
        at: row.get(11)?,
    })
}

/// All versions of a test's results, newest version first.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<StoredResult>> {
    reader.all(
        &format!("{SELECT} where r.sample_test = :test order by r.version desc, r.id"),
        named_params! { ":test": sample_test },
        from_row,
    )
}

pub fn insert(change: &Change<'_>, sample_test: i64, version: i64, judged: &Judged) -> Answer<i64> {
    change.insert(
        "insert into result (sample_test, version, component, value, qualifier, shown, unit, verdict, detail)
         values (:test, :version, :component, :value, :qualifier, :shown, :unit, :verdict, :detail)",
        named_params! {
            ":test": sample_test,
            ":version": version,
            ":component": judged.component,
            ":value": judged.value.map(Exact),
            ":qualifier": judged.qualifier.code(),
            ":shown": judged.shown,
            ":unit": judged.unit,
            ":verdict": judged.verdict.words(),
            ":detail": judged.detail.to_string(),
        },
    )
}

/// A value of an earlier pull of the same lot, condition and orientation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Earlier {
    pub component: String,
    pub age_months: Decimal,
    pub value: Decimal,
    pub pull: i64,
}

/// The newest versions of a test's exact values at earlier pulls of an arm, oldest first. Imported values and
/// censored ones are left out.
pub fn earlier(reader: &Reader<'_>, study_arm: i64, test: &str, before_pull: i64) -> Answer<Vec<Earlier>> {
    let rows = reader.all(
        "select r.component, r.value, y.started_on,
             (select e.happened_on from pull_event e where e.pull = p.id order by e.id desc limit 1), p.id
         from pull p
         join study_arm a on a.id = p.study_arm
         join study y on y.id = a.study
         join sample s on s.pull = p.id
         join sample_test t on t.sample = s.id and t.test = :test
         join result r on r.sample_test = t.id
         where p.study_arm = :arm
             and p.due_on < (select due_on from pull where id = :before)
             and r.imported is null
             and r.qualifier = '='
             and r.value is not null
             and r.version = (select max(version) from result where sample_test = t.id)
         order by p.due_on, r.id",
        named_params! { ":arm": study_arm, ":test": test, ":before": before_pull },
        |row| {
            Ok((
                row.get::<_, String>(0)?,
                row.get::<_, Exact>(1)?.0,
                row.get::<_, Option<Day>>(2)?,
                row.get::<_, Option<Day>>(3)?,
                row.get::<_, i64>(4)?,
            ))
        },
    )?;
    let dated = rows.into_iter().filter_map(|(component, value, started, pulled, pull)| {
        let age_months = actual_months(started?.0, pulled?.0);
        Some(Earlier { component, age_months, value, pull })
    });
    Ok(dated.collect())
}
