//! Settings of the site, as rows: the newest of a name counts.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::setting::WINDOWS;
use crate::domain::window::Defaults;

pub fn set(change: &Change<'_>, name: &str, value: &str) -> Answer<()> {
    change.insert(
        "insert into setting (name, value) values (:name, :value)",
        named_params! { ":name": name, ":value": value },
    )?;
    Ok(())
}

/// The site's default windows that hold now.
pub fn windows(reader: &Reader<'_>) -> Answer<Defaults> {
    let mut stored = [const { None }; 5];
    for (place, setting) in WINDOWS.iter().enumerate() {
        stored[place] = get(reader, setting.name)?;
    }
    Ok(Defaults::of_stored(stored))
}

pub fn get(reader: &Reader<'_>, name: &str) -> Answer<Option<String>> {
    reader.maybe(
        "select value from setting where name = :name order by id desc limit 1",
        named_params! { ":name": name },
        |row| row.get(0),
    )
}
