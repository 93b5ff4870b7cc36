//! Certificates of analysis: what they are made from, and the signed versions.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader, new_uuid};

/// A release result with what a certificate says beside it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Certified {
    pub sample: String,
    pub test: String,
    pub title: String,
    pub component: String,
    pub method: String,
    pub method_content: String,
    pub specification: Option<String>,
    pub specification_content: Option<String>,
    pub shown: String,
    pub unit: String,
    pub verdict: String,
}

/// The latest release results of a lot, in the order of their samples and tests.
pub fn results(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Certified>> {
    reader.all(
        "select s.number, t.test, t.title, r.component, m.code || ' version ' || v.number, v.content,
             p.code || ' version ' || w.number, w.content, r.shown, r.unit, r.verdict
         from sample s
         join sample_test t on t.sample = s.id
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         join result r on r.sample_test = t.id
         left join specification_version w on w.id = s.specification_version
         left join specification p on p.id = w.specification
         where s.lot = :lot and s.purpose = 'release'
             and r.version = (select max(version) from result where sample_test = t.id)
         order by s.id, t.position, r.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(Certified {
                sample: row.get(0)?,
                test: row.get(1)?,
                title: row.get(2)?,
                component: row.get(3)?,
                method: row.get(4)?,
                method_content: row.get(5)?,
                specification: row.get(6)?,
                specification_content: row.get(7)?,
                shown: row.get(8)?,
                unit: row.get(9)?,
                verdict: row.get(10)?,
            })
        },
    )
}

/// A release sample with its newest review.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReviewedSample {
    pub number: String,
    /// As stored: a calendar date.
    pub received_on: Option<String>,
    pub reviewed_by: String,
    /// As stored: UTC; empty where nobody has reviewed it.
    pub reviewed_at: String,
}

/// The release samples of a lot, oldest first.
pub fn samples(reader: &Reader<'_>, lot: i64) -> Answer<Vec<ReviewedSample>> {
    reader.all(
        "select s.number, s.received_on, coalesce(g.signer_name, ''), coalesce(a.at, '')
         from sample s
         left join signature g on g.id = (select max(id) from signature
             where kind = 'sample' and subject = s.id and meaning = 'review')
         left join trail_act a on a.id = g.act
         where s.lot = :lot and s.purpose = 'release'
         order by s.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(ReviewedSample {
                number: row.get(0)?,
                received_on: row.get(1)?,
                reviewed_by: row.get(2)?,
                reviewed_at: row.get(3)?,
            })
        },
    )
}

/// A signed version.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Certificate {
    pub id: i64,
    pub lot: i64,
    pub lot_number: String,
    pub version: i64,
    pub why: String,
    pub content: String,
    pub signature: i64,
    /// The newest version of its lot.
    pub newest: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

const SELECT: &str = "select c.id, c.lot, l.number, c.version, coalesce(c.why, ''), c.content, c.signature,
        (select max(version) from certificate where lot = c.lot), a.full_name, a.at
    from certificate c
    join lot l on l.id = c.lot
    join trail_act a on a.id = c.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Certificate> {
    Ok(Certificate {
        id: row.get(0)?,
        lot: row.get(1)?,
        lot_number: row.get(2)?,
        version: row.get(3)?,
        why: row.get(4)?,
        content: row.get(5)?,
        signature: row.get(6)?,
        newest: row.get(7)?,
        by: row.get(8)?,
        at: row.get(9)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Certificate> {
    let sql = format!("{SELECT} where c.id = :id");
    reader.one("certificate with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The certificates of a lot, newest first.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Certificate>> {
    let sql = format!("{SELECT} where c.lot = :lot order by c.version desc");
    reader.all(&sql, named_params! { ":lot": lot }, from_row)
}

pub fn insert(
    change: &Change<'_>,
    lot: i64,
    version: i64,
    why: Option<&str>,
    content: &str,
    signature: i64,
) -> Answer<i64> {
    change.insert(
        "insert into certificate (uuid, lot, version, why, content, signature)
         values (:uuid, :lot, :version, :why, :content, :signature)",
        named_params! {
            ":uuid": new_uuid(),
            ":lot": lot,
            ":version": version,
            ":why": why,
            ":content": content,
            ":signature": signature,
        },
    )
}

/// The text that a signature under a lot went over, where it is one of a certificate.
pub fn canonical_of_signature(reader: &Reader<'_>, signature: i64) -> Answer<Option<String>> {
    reader.maybe(
        "select version, coalesce(why, ''), content from certificate where signature = :signature",
        named_params! { ":signature": signature },
        |row| Ok(canonical(row.get(0)?, &row.get::<_, String>(1)?, &row.get::<_, String>(2)?)),
    )
}

/// The text that is signed.
pub fn canonical(version: i64, why: &str, content: &str) -> String {
    format!("certificate version {version}\n{why}\n{content}\n")
}
