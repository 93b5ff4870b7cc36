//! The condition catalogue, and conditions outside it.

use super::signature::{Approval, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::condition::{self, NewCondition};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::Db;

/// Puts the rows of the published guidelines into a new data folder; once, at set-up.
pub fn make_catalogue(db: &Db, console: &Actor) -> Result<(), Failure> {
    db.change(console, Act::AddCondition, &Reason::none(), |change| {
        let rows = condition::catalogue();
        for row in &rows {
            let is_taken = store::condition::by_code(change, &row.code)?.is_some();
            condition::may_add(row, is_taken)?;
            let id = store::condition::insert(change, row, true)?;
            change.concerns(Kind::Condition, id)?;
        }
        change.tell(format!("the catalogue of {} conditions of the published guidelines", rows.len()));
        Ok(())
    })
}

/// Adds a condition outside the catalogue: with a reason and the signature of QA (requirement A1).
///
/// Refuses in the order of [`condition::may_add`].
pub fn add(
    db: &Db,
    actor: &Actor,
    new: &NewCondition,
    reason: &Reason,
    signed: &Signed<Approval>,
) -> Result<i64, Failure> {
    db.change(actor, Act::AddCondition, reason, |change| {
        let is_taken = store::condition::by_code(change, &new.code)?.is_some();
        condition::may_add(new, is_taken)?;
        let id = store::condition::insert(change, new, false)?;
        let why = reason.text().unwrap_or_default();
        let canonical = condition::canonical(new, why, actor.at.date());
        signed.put_under(change, Subject::new(Kind::Condition, id), &canonical)?;
        change.tell(format!("{} outside the catalogue", new.name()));
        Ok(id)
    })
}
