//! Changing a setting of the site.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Changes one setting; the history shows was and is.
pub fn change(db: &Db, actor: &Actor, name: &str, value: &str, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::ChangeSetting, reason, |change| {
        let was = store::setting::get(change, name)?.unwrap_or_else(|| "not set".to_string());
        store::setting::set(change, name, value)?;
        change.concerns(Kind::Site, 1)?;
        change.tell(format!("{name}: was {was}, is {value}"));
        Ok(())
    })
}
