//! Retain samples: kept, looked at once a year, taken from, discarded after their day.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::deviation::NewDeviation;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::retain::{NewRetain, NewRetainEvent, RetainEventKind, may_keep, may_record};
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Records a retain of a lot. Refuses in the order of [`may_keep`].
pub fn keep(db: &Db, actor: &Actor, lot: i64, new: &NewRetain) -> Result<i64, Failure> {
    db.change(actor, Act::KeepRetain, &Reason::none(), |change| {
        let found = store::lot::get(change, lot)?;
        may_keep(new, found.made_on, found.imported.is_some(), actor.at.date())?;
        let (id, number) = store::retain::insert(change, lot, new)?;
        change.concerns(Kind::Lot, lot)?;
        change.tell(format!("{number}: {} {}, {}", new.quantity, new.unit, new.location));
        Ok(id)
    })
}

/// Records a look, what was taken, or that it was discarded. A look that finds a change opens a deviation in the
/// same act.
///
/// Refuses in the order of [`may_record`].
pub fn record_event(db: &Db, actor: &Actor, id: i64, new: &NewRetainEvent) -> Result<(), Failure> {
    db.change(actor, Act::RecordRetainEvent, &Reason::none(), |change| {
        let found = store::retain::get(change, id)?;
        may_record(new, &found.facts, actor.at.date())?;
        let number = &found.facts.number;
        let has_changed = new.kind == RetainEventKind::LookedAt && new.is_changed == Some(true);
        let deviation = match has_changed {
            false => None,
            true => {
                let opened = NewDeviation {
                    title: format!("Retain {number} has changed"),
                    described: format!("At the look on {}: {}", date_shown(new.happened_on), new.note),
                    occurred_on: new.happened_on,
                    lot: Some(found.lot),
                    step: None,
                    material_lot: None,
                    equipment: None,
                    study: None,
                };
                Some(super::deviation::open_inside(change, &opened)?.0)
            }
        };
        store::retain::insert_event(change, id, new, deviation)?;
        change.concerns(Kind::Lot, found.lot)?;
        let finding = match new.is_changed {
            Some(true) => ", changed",
            Some(false) => ", unchanged",
            None => "",
        };
        let on = date_shown(new.happened_on);
        change
            .tell(format!("{number} {} {on}{finding} {}", new.kind.words(), new.note).trim_end().to_string());
        Ok(())
    })
}
