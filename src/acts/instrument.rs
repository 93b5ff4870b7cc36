//! Instruments: adding to the register, calibration, daily checks, in and out of service.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::instrument::{NewEvent, NewInstrument, may_add, may_record};
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Adds an instrument to the register. Without a calibration on record it cannot be used.
pub fn add(db: &Db, actor: &Actor, new: &NewInstrument) -> Result<i64, Failure> {
    db.change(actor, Act::AddInstrument, &Reason::none(), |change| {
        may_add(new, store::instrument::is_code_taken(change, &new.code)?)?;
        let id = store::instrument::insert(change, new)?;
        change.concerns(Kind::Instrument, id)?;
        change.tell(format!("{}, {} ({})", new.code, new.name, new.kind));
        Ok(id)
    })
}

/// Records a calibration, a daily check, or that the instrument goes out of or back into service.
///
/// Refuses in the order of [`may_record`].
pub fn record_event(db: &Db, actor: &Actor, instrument: i64, new: &NewEvent) -> Result<i64, Failure> {
    let today = actor.at.date();
    db.change(actor, Act::RecordInstrumentEvent, &Reason::none(), |change| {
        let facts = store::instrument::facts(change, instrument, today)?;
        may_record(new, &facts, today)?;
        let id = store::instrument::insert_event(change, instrument, new)?;
        change.concerns(Kind::Instrument, instrument)?;
        let due = new.due_on.map(|due| format!(", due {}", date_shown(due))).unwrap_or_default();
        let (kind, on) = (new.kind.words(), date_shown(new.performed_on));
        change.tell(format!("{} {kind} {on}{due}: {}", facts.code, new.detail.words(new.kind)));
        Ok(id)
    })
}
