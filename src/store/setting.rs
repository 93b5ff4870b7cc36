//! Settings of the site, as rows: the newest of a name counts.

use std::collections::BTreeMap;

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::setting::WINDOWS;
use crate::domain::window::Defaults;
use crate::domain::working_days::{CLOSED_DATES, CLOSED_WEEKDAYS, MINUTES_A_DAY, WorkingDays};

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

/// Closed days and stated bench time that hold now.
pub fn working_days(reader: &Reader<'_>) -> Answer<WorkingDays> {
    let weekdays = get(reader, CLOSED_WEEKDAYS)?.unwrap_or_default();
    let dates = get(reader, CLOSED_DATES)?.unwrap_or_default();
    // The newest row of a name wins: rows come oldest first.
    let rows: Vec<(String, String)> = reader.all(
        "select name, value from setting where name > :first and name < :last order by id",
        named_params! { ":first": MINUTES_A_DAY, ":last": format!("{MINUTES_A_DAY}~") },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )?;
    let mut minutes: BTreeMap<i64, Option<u32>> = BTreeMap::new();
    for (name, value) in rows {
        if let Some(account) = name.strip_prefix(MINUTES_A_DAY).and_then(|account| account.parse().ok()) {
            minutes.insert(account, value.parse().ok());
        }
    }
    let stated = minutes.into_iter().filter_map(|(account, minutes)| Some((account, minutes?)));
    Ok(WorkingDays::of_stored(&weekdays, &dates, stated.collect()))
}

/// The newest of every setting whose name begins so, as (name, value).
pub fn of_prefix(reader: &Reader<'_>, prefix: &str) -> Answer<Vec<(String, String)>> {
    reader.all(
        "select s.name, s.value
         from setting s
         where substr(s.name, 1, length(:prefix)) = :prefix
             and s.id = (select max(id) from setting newest where newest.name = s.name)",
        named_params! { ":prefix": prefix },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}
