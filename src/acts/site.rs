//! Setting up a data folder.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;
use crate::store::site::Site;

/// Names the site and its zone, and makes the condition catalogue, once per data folder.
pub fn set_up(db: &Db, console: &Actor, site: &Site) -> Result<(), Failure> {
    db.change(console, Act::SetUpSite, &Reason::none(), |change| {
        store::site::insert(change, site)?;
        change.concerns(Kind::Site, 1)?;
        change.tell(format!("{}, zone {}", site.name, site.zone.name()));
        Ok(())
    })?;
    super::condition::make_catalogue(db, console)
}
