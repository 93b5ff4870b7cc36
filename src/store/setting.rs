//! Settings of the site, as rows: the newest of a name counts.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};

pub fn set(change: &Change<'_>, name: &str, value: &str) -> Answer<()> {
    change.insert(
        "insert into setting (name, value) values (:name, :value)",
        named_params! { ":name": name, ":value": value },
    )?;
    Ok(())
}

pub fn get(reader: &Reader<'_>, name: &str) -> Answer<Option<String>> {
    reader.maybe(
        "select value from setting where name = :name order by id desc limit 1",
        named_params! { ":name": name },
        |row| row.get(0),
    )
}
