//! Flags: what a judgement found, as rows with their numbers.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::judgement::NewFlag;

/// A flag as stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Flag {
    pub id: i64,
    pub result: i64,
    pub version: i64,
    pub component: String,
    pub kind: String,
    /// `exception`, `mark` or `context`.
    pub level: String,
    pub sentence: String,
    pub numbers: String,
}

fn from_row(row: &Row<'_>) -> rusqlite::Result<Flag> {
    Ok(Flag {
        id: row.get(0)?,
        result: row.get(1)?,
        version: row.get(2)?,
        component: row.get(3)?,
        kind: row.get(4)?,
        level: row.get(5)?,
        sentence: row.get(6)?,
        numbers: row.get(7)?,
    })
}

pub fn insert(change: &Change<'_>, result: i64, flag: &NewFlag) -> Answer<i64> {
    change.insert(
        "insert into flag (result, kind, level, sentence, numbers)
         values (:result, :kind, :level, :sentence, :numbers)",
        named_params! {
            ":result": result,
            ":kind": flag.kind,
            ":level": flag.level.code(),
            ":sentence": flag.sentence,
            ":numbers": flag.numbers.to_string(),
        },
    )
}

/// The flags of all versions of a test, in the order they were raised.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Flag>> {
    reader.all(
        "select f.id, f.result, r.version, r.component, f.kind, f.level, f.sentence, f.numbers
         from flag f join result r on r.id = f.result
         where r.sample_test = :test
         order by f.id",
        named_params! { ":test": sample_test },
        from_row,
    )
}
