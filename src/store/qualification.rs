//! Qualifications of people for method versions.

use chrono::NaiveDate;
use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::qualification::{NewQualification, QualificationFacts};

pub fn insert(change: &Change<'_>, new: &NewQualification) -> Answer<i64> {
    change.insert(
        "insert into qualification (account, method_version, starts_on, ends_on, reference)
         values (:account, :method_version, :starts_on, :ends_on, :reference)",
        named_params! {
            ":account": new.account,
            ":method_version": new.method_version,
            ":starts_on": Day(new.starts_on),
            ":ends_on": Day(new.ends_on),
            ":reference": new.reference,
        },
    )
}

/// All that decides whether a person may test by a method version today, with the overrides of the day.
pub fn facts(
    reader: &Reader<'_>,
    account: i64,
    method_version: i64,
    today: NaiveDate,
) -> Answer<QualificationFacts> {
    let spans = reader.all(
        "select starts_on, ends_on from qualification
         where account = :account and method_version = :method_version
         order by id",
        named_params! { ":account": account, ":method_version": method_version },
        |row| Ok((row.get::<_, Day>(0)?.0, row.get::<_, Day>(1)?.0)),
    )?;
    reader.one(
        "person or method version with this number",
        "select p.full_name, m.code, v.number, exists (
             select 1 from stop_override
             where stop = 'qualification' and account = p.id and method_version = v.id and valid_on = :today)
         from account p, method_version v join method m on m.id = v.method
         where p.id = :account and v.id = :method_version",
        named_params! { ":account": account, ":method_version": method_version, ":today": Day(today) },
        |row| {
            Ok(QualificationFacts {
                full_name: row.get(0)?,
                method: format!("{} version {}", row.get::<_, String>(1)?, row.get::<_, i64>(2)?),
                spans,
                is_lifted: row.get(3)?,
            })
        },
    )
}

/// A qualification as the register lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Qualification {
    pub account: i64,
    pub full_name: String,
    pub method: i64,
    pub method_code: String,
    pub method_name: String,
    pub number: i64,
    pub starts_on: NaiveDate,
    pub ends_on: NaiveDate,
    pub reference: String,
    pub recorded_by: String,
}

/// The register, by person and method, the newest first within each.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Qualification>> {
    reader.all(
        "select q.account, p.full_name, m.id, m.code, m.name, v.number, q.starts_on, q.ends_on, q.reference,
             a.full_name
         from qualification q
         join account p on p.id = q.account
         join method_version v on v.id = q.method_version
         join method m on m.id = v.method
         join trail_act a on a.id = q.act
         order by p.full_name, m.code, v.number desc, q.id desc",
        [],
        |row| {
            Ok(Qualification {
                account: row.get(0)?,
                full_name: row.get(1)?,
                method: row.get(2)?,
                method_code: row.get(3)?,
                method_name: row.get(4)?,
                number: row.get(5)?,
                starts_on: row.get::<_, Day>(6)?.0,
                ends_on: row.get::<_, Day>(7)?.0,
                reference: row.get(8)?,
                recorded_by: row.get(9)?,
            })
        },
    )
}

/// Approved method versions as choices: number and `PH-01 version 2, pH of suspensions`.
pub fn method_choices(reader: &Reader<'_>) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select v.id, m.code, v.number, m.name
         from method_version v join method m on m.id = v.method
         where exists (
             select 1 from signature
             where kind = 'method_version' and subject = v.id and meaning = 'approval')
         order by m.code, v.number desc",
        [],
        |row| {
            let (code, number, name): (String, i64, String) = (row.get(1)?, row.get(2)?, row.get(3)?);
            Ok((row.get(0)?, format!("{code} version {number}, {name}")))
        },
    )
}
