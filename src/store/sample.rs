//! Samples: every test hangs on one.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::sample::{NewSample, NewSampleTest};

/// A row of a list of samples.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SampleLine {
    pub id: i64,
    pub number: String,
    pub purpose: String,
    pub lot_number: String,
    /// Condition, orientation and age of a pull; empty without one.
    pub place: String,
    pub latest_on: Option<String>,
    pub tests: i64,
    pub completed: i64,
    pub assigned_to: Option<i64>,
}

/// The samples at the bench: received or pulled, not signed, with a test still open; the window that ends first
/// comes first.
pub fn at_bench(reader: &Reader<'_>) -> Answer<Vec<SampleLine>> {
    reader.all(
        "select s.id, s.number, s.purpose, l.number,
             coalesce(c.name || ' ' || a.orientation || ', ' || p.age_text, ''), p.latest_on,
             count(t.id),
             sum(exists (select 1 from result r where r.sample_test = t.id and coalesce(
                 (select k.verdict from result_check k where k.sample_test = t.id and k.version = r.version
                  order by k.id desc limit 1), '') <> 'sent back'
                 and r.version = (select max(version) from result where sample_test = t.id))),
             (select g.account from pull_assignment g where g.pull = p.id order by g.id desc limit 1)
         from open_sample o
         cross join sample s on s.id = o.sample
         join lot l on l.id = s.lot
         join sample_test t on t.sample = s.id
         left join pull p on p.id = s.pull
         left join study_arm a on a.id = p.study_arm
         left join condition c on c.id = a.condition
         where (s.pull is null or coalesce((select e.kind from pull_event e where e.pull = s.pull
                order by e.id desc limit 1), '') = 'pulled')
             and not exists (select 1 from signature g
                where g.kind = 'sample' and g.subject = s.id and g.meaning = 'review')
             and l.imported is null
         group by s.id
         having sum(exists (select 1 from result r where r.sample_test = t.id and coalesce(
                 (select k.verdict from result_check k where k.sample_test = t.id and k.version = r.version
                  order by k.id desc limit 1), '') <> 'sent back'
                 and r.version = (select max(version) from result where sample_test = t.id))) < count(t.id)
         order by p.latest_on is null, p.latest_on, s.id",
        [],
        |row| {
            Ok(SampleLine {
                id: row.get(0)?,
                number: row.get(1)?,
                purpose: row.get(2)?,
                lot_number: row.get(3)?,
                place: row.get(4)?,
                latest_on: row.get(5)?,
                tests: row.get(6)?,
                completed: row.get(7)?,
                assigned_to: row.get(8)?,
            })
        },
    )
}

/// The next number of a lot's samples with this letter: `TW-104-0640-R2`.
pub fn next_number(reader: &Reader<'_>, lot_number: &str, letter: char) -> Answer<String> {
    let stem = format!("{lot_number}-{letter}");
    let taken: i64 = reader.one(
        "number",
        "select count(*) from sample where substr(number, 1, length(:stem)) = :stem",
        named_params! { ":stem": stem },
        |row| row.get(0),
    )?;
    Ok(format!("{stem}{}", taken + 1))
}

/// Inserts a received sample. A stability pull's sample is made with its pull.
pub fn insert_received(
    change: &Change<'_>,
    number: &str,
    new: &NewSample,
    specification_version: i64,
) -> Answer<i64> {
    change.insert(
        "insert into sample (uuid, number, purpose, lot, specification_version, limit_set, containers,
             condition_on_receipt, handed_over_by, received_on)
         values (:uuid, :number, :purpose, :lot, :specification, :limit_set, :containers, :condition,
             :handed_over_by, :received_on)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": number,
            ":purpose": new.purpose.words(),
            ":lot": new.lot,
            ":specification": specification_version,
            ":limit_set": new.purpose.limit_set(),
            ":containers": new.containers,
            ":condition": new.condition_on_receipt,
            ":handed_over_by": new.handed_over_by,
            ":received_on": Day(new.received_on),
        },
    )
}

/// Asks a test of a sample; `position` is its place in bench order.
pub fn insert_test(change: &Change<'_>, sample: i64, position: usize, test: &NewSampleTest) -> Answer<i64> {
    change.insert(
        "insert into sample_test (sample, position, test, title, method_version)
         values (:sample, :position, :test, :title, :method_version)",
        named_params! {
            ":sample": sample,
            ":position": position as i64,
            ":test": test.test,
            ":title": test.title,
            ":method_version": test.method_version,
        },
    )
}

/// Receipt of a sample: count, condition, who handed it over, which day.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Receipt {
    pub containers: Option<i64>,
    pub condition: Option<String>,
    pub handed_over_by: Option<String>,
    pub received_on: Option<String>,
}

pub fn receipt(reader: &Reader<'_>, sample: i64) -> Answer<Receipt> {
    reader.one(
        "sample with this number",
        "select containers, condition_on_receipt, handed_over_by, received_on from sample where id = :id",
        named_params! { ":id": sample },
        |row| {
            Ok(Receipt {
                containers: row.get(0)?,
                condition: row.get(1)?,
                handed_over_by: row.get(2)?,
                received_on: row.get(3)?,
            })
        },
    )
}
