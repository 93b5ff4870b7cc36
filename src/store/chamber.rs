//! Chambers.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::chamber::NewChamber;

/// A chamber with its condition and what stands in it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Chamber {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub condition: i64,
    pub condition_name: String,
    pub location: String,
    pub qualification_due_on: NaiveDate,
    pub containers: i64,
}

const SELECT: &str = "select c.id, c.code, c.name, c.condition, d.name, c.location, c.qualification_due_on,
        (select count(*) from container k
         join study_arm a on a.id = k.study_arm
         where a.chamber = c.id and not exists (select 1 from container_event where container = k.id))
    from chamber c
    join condition d on d.id = c.condition";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Chamber> {
    Ok(Chamber {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        condition: row.get(3)?,
        condition_name: row.get(4)?,
        location: row.get(5)?,
        qualification_due_on: row.get::<_, Day>(6)?.0,
        containers: row.get(7)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Chamber> {
    let sql = format!("{SELECT} where c.id = :id");
    reader.one("chamber with this number", &sql, named_params! { ":id": id }, from_row)
}

pub fn by_code(reader: &Reader<'_>, code: &str) -> Answer<Option<Chamber>> {
    reader.maybe(&format!("{SELECT} where c.code = :code"), named_params! { ":code": code }, from_row)
}

/// All chambers, by code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Chamber>> {
    reader.all(&format!("{SELECT} order by c.code"), [], from_row)
}

pub fn insert(change: &Change<'_>, new: &NewChamber) -> Answer<i64> {
    change.insert(
        "insert into chamber (code, name, condition, location, qualification_due_on)
         values (:code, :name, :condition, :location, :due_on)",
        named_params! {
            ":code": new.code,
            ":name": new.name,
            ":condition": new.condition,
            ":location": new.location,
            ":due_on": Day(new.qualification_due_on),
        },
    )
}
