//! Adding a chamber.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::chamber::{self, NewChamber};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Refuses in the order of [`chamber::may_add`].
pub fn add(db: &Db, actor: &Actor, new: &NewChamber) -> Result<i64, Failure> {
    db.change(actor, Act::AddChamber, &Reason::none(), |change| {
        let is_taken = store::chamber::by_code(change, &new.code)?.is_some();
        chamber::may_add(new, is_taken)?;
        let condition = store::condition::get(change, new.condition)?;
        let id = store::chamber::insert(change, new)?;
        change.concerns(Kind::Chamber, id)?;
        change.tell(format!("{} at {}", new.code, condition.name));
        Ok(id)
    })
}
