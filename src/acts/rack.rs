//! Putting up a rack and lots on it.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::rack::{NewRack, PutFacts, may_put, may_start};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Puts up an empty rack. Refuses in the order of [`may_start`].
pub fn start(db: &Db, actor: &Actor, new: &NewRack) -> Result<i64, Failure> {
    db.change(actor, Act::StartRack, &Reason::none(), |change| {
        may_start(new, store::rack::is_code_taken(change, &new.code)?, actor.at.date())?;
        let id = store::rack::insert(change, new)?;
        change.concerns(Kind::Rack, id)?;
        change.tell(format!("rack {}, {}, time zero {}", new.code, new.title, date_shown(new.started_on)));
        Ok(id)
    })
}

/// Puts a lot in the next free place. Refuses in the order of [`may_put`].
pub fn put(db: &Db, actor: &Actor, rack: i64, lot: i64) -> Result<(), Failure> {
    db.change(actor, Act::PutOnRack, &Reason::none(), |change| {
        let (found, of_lot) = (store::rack::get(change, rack)?, store::lot::get(change, lot)?);
        let lots = store::rack::lots(change, rack)?;
        may_put(&PutFacts {
            lot: of_lot.number.clone(),
            lots_on_rack: lots.len(),
            stands_on: store::rack::of_lot(change, lot)?.map(|(_, code)| code),
            is_imported: of_lot.imported.is_some(),
            scale: of_lot.scale.clone(),
            made_on: of_lot.made_on,
            started_on: found.started_on,
            is_on_official_study: store::rack::is_on_official_study(change, lot)?,
        })?;
        let position = lots.iter().map(|one| one.position).max().unwrap_or(0) + 1;
        store::rack::put(change, rack, lot, position)?;
        change.concerns(Kind::Rack, rack)?;
        change.concerns(Kind::Lot, lot)?;
        change.tell(format!("{} on rack {}, place {position}", of_lot.number, found.code));
        Ok(())
    })
}
