//! Stating where an item of a lot's record stands, or where its whole record is kept.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::completeness::statement::{NewAnswer, NewElsewhere, may_answer, may_refer};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// States that an item is present elsewhere, does not apply, or takes such a statement back.
///
/// Refuses in the order of [`may_answer`].
pub fn answer(db: &Db, actor: &Actor, lot: i64, new: &NewAnswer) -> Result<(), Failure> {
    db.change(actor, Act::StateCompleteness, &Reason::none(), |change| {
        let evidence = store::completeness::evidence(change, lot)?;
        may_answer(new, &evidence)?;
        store::completeness::insert_answer(change, lot, new)?;
        change.concerns(Kind::Lot, lot)?;
        change.tell(format!("{}, item {} {}: {}", evidence.lot_number, new.item, new.kind.words(), new.text));
        Ok(())
    })
}

/// States where the executed record of a lot is kept that was not carried out here.
///
/// Refuses in the order of [`may_refer`].
pub fn refer(db: &Db, actor: &Actor, lot: i64, new: &NewElsewhere) -> Result<(), Failure> {
    db.change(actor, Act::StateRecordElsewhere, &Reason::stated(&new.why), |change| {
        let evidence = store::completeness::evidence(change, lot)?;
        may_refer(&evidence)?;
        store::completeness::insert_elsewhere(change, lot, new)?;
        change.concerns(Kind::Lot, lot)?;
        change.tell(format!("{}: executed record {}, {}", evidence.lot_number, new.reference, new.place));
        Ok(())
    })
}
