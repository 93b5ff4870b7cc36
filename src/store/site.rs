//! The site: its name, its zone, and whether it is an invented one.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader, new_uuid};

/// The one site of a data folder.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Site {
    pub name: String,
    pub zone: chrono_tz::Tz,
    pub is_demo: bool,
}

pub fn insert(change: &Change<'_>, site: &Site) -> Answer<()> {
    change.insert(
        "insert into site (id, uuid, name, zone, is_demo) values (1, :uuid, :name, :zone, :is_demo)",
        named_params! {
            ":uuid": new_uuid(),
            ":name": site.name,
            ":zone": site.zone.name(),
            ":is_demo": site.is_demo,
        },
    )?;
    Ok(())
}

/// The site, once it is set up.
pub fn get(reader: &Reader<'_>) -> Answer<Option<Site>> {
    reader.maybe("select name, zone, is_demo from site", [], |row| {
        let zone: String = row.get(1)?;
        Ok(Site { name: row.get(0)?, zone: zone.parse().unwrap_or(chrono_tz::UTC), is_demo: row.get(2)? })
    })
}
