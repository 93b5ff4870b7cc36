//! Studies, their arms, and what is made when one starts.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::age::Age;
use crate::domain::container::Purpose;
use crate::domain::protocol::{Arm, PlannedTest, Programme};
use crate::domain::study::{NewStudy, PlannedPull, RULE_SET};

/// A study with its lot and protocol.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Study {
    pub id: i64,
    pub number: String,
    pub lot: i64,
    pub lot_number: String,
    pub product_words: String,
    pub container_word: String,
    /// The version it follows: of its newest amendment, else the one it started on.
    pub protocol_version: Option<i64>,
    pub protocol_words: Option<String>,
    pub specification_version: Option<i64>,
    pub programme: String,
    pub started_on: Option<NaiveDate>,
    pub rule_set: String,
    pub is_imported: bool,
    pub arms: i64,
    pub pulls: i64,
    /// Pulls that still ask for work.
    pub open_pulls: i64,
}

const SELECT: &str = "select y.id, y.number, l.id, l.number, d.code || ' ' || d.name || ', ' || p.pack,
        p.container_word, coalesce(m.protocol_version, y.protocol_version),
        (select r.code || ' version ' || v.number
         from protocol_version v join protocol r on r.id = v.protocol
         where v.id = coalesce(m.protocol_version, y.protocol_version)),
        coalesce(m.specification_version, y.specification_version),
        y.programme, y.started_on, y.rule_set, y.imported is not null,
        (select count(*) from study_arm where study = y.id),
        (select count(*) from study_arm a join pull q on q.study_arm = a.id
         where a.study = y.id and not exists (select 1 from pull later where later.supersedes = q.id)),
        (select count(*) from study_arm a join pull q on q.study_arm = a.id join open_pull o on o.pull = q.id
         where a.study = y.id)
    from study y
    left join study_amendment m on m.id = (select max(id) from study_amendment where study = y.id)
    join lot l on l.id = y.lot
    join presentation p on p.id = l.presentation
    join product d on d.id = p.product";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Study> {
    Ok(Study {
        id: row.get(0)?,
        number: row.get(1)?,
        lot: row.get(2)?,
        lot_number: row.get(3)?,
        product_words: row.get(4)?,
        container_word: row.get(5)?,
        protocol_version: row.get(6)?,
        protocol_words: row.get(7)?,
        specification_version: row.get(8)?,
        programme: row.get(9)?,
        started_on: row.get::<_, Option<Day>>(10)?.map(|day| day.0),
        rule_set: row.get(11)?,
        is_imported: row.get(12)?,
        arms: row.get(13)?,
        pulls: row.get(14)?,
        open_pulls: row.get(15)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Study> {
    let sql = format!("{SELECT} where y.id = :id");
    reader.one("study with this number", &sql, named_params! { ":id": id }, from_row)
}

pub fn by_number(reader: &Reader<'_>, number: &str) -> Answer<Option<Study>> {
    let sql = format!("{SELECT} where y.number = :number");
    reader.maybe(&sql, named_params! { ":number": number }, from_row)
}

/// Studies newest first, those before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<Study>> {
    let sql = format!("{SELECT} where y.id < :before order by y.id desc limit :limit");
    let params = named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit };
    reader.all(&sql, params, from_row)
}

/// A number that no study has yet: `ST-001` on.
pub fn next_number(reader: &Reader<'_>) -> Answer<String> {
    let newest: i64 = reader.one("number", "select coalesce(max(id), 0) from study", [], |row| row.get(0))?;
    Ok(format!("ST-{:03}", newest + 1))
}

/// An arm of a study.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ArmLine {
    pub id: i64,
    pub position: i64,
    pub condition_name: String,
    pub orientation: String,
    pub chamber: Option<i64>,
    pub chamber_code: Option<String>,
    pub chamber_due_on: Option<NaiveDate>,
    pub limits_do: String,
    pub is_labelled_condition: bool,
    pub is_contingent: bool,
    pub is_triggered: bool,
    pub container_text: Option<String>,
    pub containers: i64,
    pub containers_left: i64,
}

const ARM: &str = "select a.id, a.position, c.name, a.orientation, a.chamber, h.code, h.qualification_due_on,
        a.limits_do, a.is_labelled_condition, a.is_contingent,
        exists (select 1 from arm_trigger where study_arm = a.id), a.container_text,
        (select count(*) from container where study_arm = a.id),
        (select count(*) from container k where k.study_arm = a.id
             and not exists (select 1 from container_event where container = k.id)),
        a.study
    from study_arm a
    join condition c on c.id = a.condition
    left join chamber h on h.id = a.chamber";

fn arm_from_row(row: &Row<'_>) -> rusqlite::Result<ArmLine> {
    Ok(ArmLine {
        id: row.get(0)?,
        position: row.get(1)?,
        condition_name: row.get(2)?,
        orientation: row.get(3)?,
        chamber: row.get(4)?,
        chamber_code: row.get(5)?,
        chamber_due_on: row.get::<_, Option<Day>>(6)?.map(|day| day.0),
        limits_do: row.get(7)?,
        is_labelled_condition: row.get(8)?,
        is_contingent: row.get(9)?,
        is_triggered: row.get(10)?,
        container_text: row.get(11)?,
        containers: row.get(12)?,
        containers_left: row.get(13)?,
    })
}

pub fn arms(reader: &Reader<'_>, study: i64) -> Answer<Vec<ArmLine>> {
    let sql = format!("{ARM} where a.study = :study order by a.position");
    reader.all(&sql, named_params! { ":study": study }, arm_from_row)
}

/// An arm with the study it belongs to.
pub fn arm(reader: &Reader<'_>, id: i64) -> Answer<(i64, ArmLine)> {
    let sql = format!("{ARM} where a.id = :id");
    reader.one("arm with this number", &sql, named_params! { ":id": id }, |row| {
        Ok((row.get(14)?, arm_from_row(row)?))
    })
}

pub fn insert(change: &Change<'_>, new: &NewStudy, programme: Programme, specification: i64) -> Answer<i64> {
    change.insert(
        "insert into study (uuid, number, lot, protocol_version, specification_version, programme, started_on,
             rule_set)
         values (:uuid, :number, :lot, :protocol_version, :specification_version, :programme, :started_on,
             :rule_set)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": new.number,
            ":lot": new.lot,
            ":protocol_version": new.protocol_version,
            ":specification_version": specification,
            ":programme": programme.words(),
            ":started_on": Day(new.started_on),
            ":rule_set": RULE_SET,
        },
    )
}

pub fn insert_arm(
    change: &Change<'_>,
    study: i64,
    position: i64,
    arm: &Arm,
    chamber: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into study_arm (study, position, condition, orientation, chamber, limits_do,
             is_labelled_condition, is_contingent)
         values (:study, :position, :condition, :orientation, :chamber, :limits_do, :labelled, :contingent)",
        named_params! {
            ":study": study,
            ":position": position,
            ":condition": arm.condition,
            ":orientation": arm.orientation.words(),
            ":chamber": chamber,
            ":limits_do": arm.limits_do.words(),
            ":labelled": arm.is_labelled_condition,
            ":contingent": arm.is_contingent,
        },
    )
}

pub fn insert_container(
    change: &Change<'_>,
    arm: i64,
    number: u32,
    purpose: Purpose,
    label: &str,
) -> Answer<i64> {
    change.insert(
        "insert into container (study_arm, number, label, purpose) values (:arm, :number, :label, :purpose)",
        named_params! { ":arm": arm, ":number": number, ":label": label, ":purpose": purpose.words() },
    )
}

/// Inserts a pull with its sample and the tests asked of it, in bench order.
pub fn insert_pull(
    change: &Change<'_>,
    arm: i64,
    pull: &PlannedPull,
    sample: &NewPullSample<'_>,
) -> Answer<i64> {
    let (months, days) = match pull.age {
        Age::Months(months) => (Some(months), None),
        Age::Days(days) => (None, Some(days)),
    };
    let id = change.insert(
        "insert into pull (uuid, study_arm, age_months, age_days, age_text, due_on, earliest_on, latest_on,
             test_within_days, containers_needed, is_last, supersedes)
         values (:uuid, :arm, :months, :days, :age_text, :due_on, :earliest_on, :latest_on, :test_within,
             :containers, :is_last, :supersedes)",
        named_params! {
            ":uuid": new_uuid(),
            ":arm": arm,
            ":months": months,
            ":days": days,
            ":age_text": pull.age.words(),
            ":due_on": Day(pull.due_on),
            ":earliest_on": Day(pull.window.earliest_on),
            ":latest_on": Day(pull.window.latest_on),
            ":test_within": pull.test_within_days,
            ":containers": pull.cost.containers,
            ":is_last": pull.is_last,
            ":supersedes": sample.supersedes,
        },
    )?;
    insert_sample(change, id, sample)?;
    Ok(id)
}

/// The sample that is made with its pull.
pub struct NewPullSample<'a> {
    pub number: &'a str,
    pub lot: i64,
    pub specification_version: i64,
    /// In bench order.
    pub tests: &'a [&'a PlannedTest],
    /// The pull in whose place this one is planned.
    pub supersedes: Option<i64>,
}

fn insert_sample(change: &Change<'_>, pull: i64, new: &NewPullSample<'_>) -> Answer<()> {
    let sample = change.insert(
        "insert into sample (uuid, number, purpose, lot, pull, specification_version, limit_set)
         values (:uuid, :number, 'stability pull', :lot, :pull, :specification_version, 'shelf-life')",
        named_params! {
            ":uuid": new_uuid(),
            ":number": new.number,
            ":lot": new.lot,
            ":pull": pull,
            ":specification_version": new.specification_version,
        },
    )?;
    for (position, test) in (1_i64..).zip(new.tests) {
        change.insert(
            "insert into sample_test (sample, position, test, title, method_version)
             values (:sample, :position, :test, :title, :method_version)",
            named_params! {
                ":sample": sample,
                ":position": position,
                ":test": test.test,
                ":title": test.title,
                ":method_version": test.method_version,
            },
        )?;
    }
    Ok(())
}

/// How many pulls a study has, to go on numbering.
pub fn pull_count(reader: &Reader<'_>, study: i64) -> Answer<usize> {
    let count: i64 = reader.one(
        "study with this number",
        "select count(*) from study_arm a join pull p on p.study_arm = a.id where a.study = :study",
        named_params! { ":study": study },
        |row| row.get(0),
    )?;
    Ok(usize::try_from(count).unwrap_or_default())
}

pub fn insert_trigger(change: &Change<'_>, arm: i64, why: &str) -> Answer<i64> {
    change.insert(
        "insert into arm_trigger (study_arm, why) values (:arm, :why)",
        named_params! { ":arm": arm, ":why": why },
    )
}
