//! Counting containers and labels of a lot, and the second person's check of the reconciliation.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::deviation::NewDeviation;
use crate::domain::failure::Failure;
use crate::domain::packaging::{NewCount, NewPackagingItem, may_add, may_check, may_count, words};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Says what will be counted of a lot, and within which limits. Refuses in the order of [`may_add`].
pub fn add(db: &Db, actor: &Actor, lot: i64, new: &NewPackagingItem) -> Result<i64, Failure> {
    db.change(actor, Act::CountPackaging, &Reason::none(), |change| {
        let found = store::lot::get(change, lot)?;
        may_add(new, &found.number, found.decision.is_some())?;
        let id = store::packaging::insert_item(change, lot, new)?;
        change.concerns(Kind::Lot, lot)?;
        let (least, most) = (new.least_percent, new.most_percent);
        change.tell(format!("{}: {} {} is counted, {least} to {most} %", found.number, new.kind, new.name));
        Ok(id)
    })
}

/// Records a count, or corrects one with its reason. Refuses in the order of [`may_count`].
pub fn count(db: &Db, actor: &Actor, item: i64, new: &NewCount) -> Result<i64, Failure> {
    let reason = if new.why.is_empty() { Reason::none() } else { Reason::stated(&new.why) };
    db.change(actor, Act::CountPackaging, &reason, |change| {
        let found = store::packaging::get(change, item)?;
        may_count(new, &found.facts)?;
        let id = store::packaging::insert_count(change, item, new)?;
        change.concerns(Kind::Lot, found.lot)?;
        let corrected = found.facts.counts.iter().find(|one| Some(one.id) == new.supersedes);
        let was = corrected.map(|one| format!(" (was {})", one.count)).unwrap_or_default();
        change.tell(format!(
            "{} {}: {} {}{was}",
            found.facts.lot_number,
            found.facts.name,
            new.kind.words(),
            new.count
        ));
        Ok(id)
    })
}

/// A second person checks the reconciliation; outside its limits it opens a deviation in the same act, and the
/// answer is that deviation.
///
/// Refuses in the order of [`may_check`].
pub fn check(db: &Db, actor: &Actor, item: i64) -> Result<Option<i64>, Failure> {
    db.change(actor, Act::CheckPackaging, &Reason::none(), |change| {
        let found = store::packaging::get(change, item)?;
        change.concerns(Kind::Lot, found.lot)?;
        let outcome = may_check(&found.facts, actor.account)?;
        let sentence = words(&found.facts, &outcome);
        let deviation = match outcome.is_within {
            true => None,
            false => {
                let new = NewDeviation {
                    title: format!("Reconciliation of {} outside its limits", found.facts.name),
                    described: sentence.clone(),
                    occurred_on: actor.at.date(),
                    lot: Some(found.lot),
                    step: None,
                    material_lot: found.material_lot.as_ref().map(|(id, _)| *id),
                    equipment: None,
                    study: None,
                };
                Some(super::deviation::open_inside(change, &new)?.0)
            }
        };
        store::packaging::insert_check(change, &found, &outcome, deviation)?;
        change.tell(sentence);
        Ok(deviation)
    })
}
