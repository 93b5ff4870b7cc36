//! What becomes of a container outside its pull.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::container::{self, ContainerFacts, Event};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Something that became of a container, as a person records it.
#[derive(Clone, Debug)]
pub struct NewEvent {
    pub event: Event,
    pub witness: Option<i64>,
    pub note: String,
}

/// Records what became of a container. Refuses in the order of [`container::may_record`].
pub fn record(db: &Db, actor: &Actor, id: i64, new: &NewEvent) -> Result<(), Failure> {
    db.change(actor, Act::RecordContainer, &Reason::none(), |change| {
        let found = store::container::get(change, id)?;
        let events = store::container::events(change, id)?;
        let is_destroyed = events.iter().any(|line| line.kind == Event::Destroyed.words());
        let facts = ContainerFacts { has_left: !events.is_empty(), is_destroyed };
        container::may_record(new.event, facts, new.witness, actor.account, &new.note)?;
        let witness = new.witness.filter(|_| new.event == Event::Destroyed);
        store::container::insert_event(change, id, new.event, None, witness, Some(new.note.trim()))?;
        change.concerns(Kind::Study, found.study)?;
        change.concerns(Kind::Lot, found.lot)?;
        change.tell(format!("{}: {}, {}", found.label, new.event.words(), new.note.trim()));
        Ok(())
    })
}
