//! Assigning a shelf life to a presentation, signed by QA.

use super::signature::{Approval, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::shelf_life::{NewShelfLife, may_assign};
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::Db;

/// Assigns a shelf life from a day on; earlier lots keep theirs. The signature stands under the assignment, over
/// [`NewShelfLife::canonical`]. Refuses in the order of [`may_assign`].
pub fn assign(db: &Db, actor: &Actor, new: &NewShelfLife, signed: &Signed<Approval>) -> Result<i64, Failure> {
    db.change(actor, Act::AssignShelfLife, &Reason::stated(&new.reference), |change| {
        let presentation = store::product::presentation(change, new.presentation)?;
        may_assign(new, actor.at.date())?;
        let id = store::shelf_life::insert(change, new)?;
        signed.put_under(change, Subject::new(Kind::ShelfLife, id), &new.canonical())?;
        change.concerns(Kind::Presentation, presentation.id)?;
        change.tell(format!(
            "{}, {}: {} months, {}, {}, from {}",
            presentation.code,
            new.market,
            new.months,
            new.storage_statement,
            new.basis,
            date_shown(new.effective_from)
        ));
        Ok(id)
    })
}
