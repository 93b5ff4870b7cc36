//! Deviations: opening, working on, letting work go on, closing.

use super::signature::{Closure, Continuation, Means, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::deviation::{
    DeviationEntryKind, NewDeviation, NewDeviationEntry, may_close, may_continue, may_open, may_write,
};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::deviation::Deviation;
use crate::store::door::{Change, Db};

/// Opens a deviation; answers with its id. Refuses in the order of [`may_open`].
pub fn open(db: &Db, actor: &Actor, new: &NewDeviation) -> Result<i64, Failure> {
    db.change(actor, Act::OpenDeviation, &Reason::none(), |change| {
        let (id, number) = open_inside(change, new)?;
        change.tell(format!("deviation {number}: {}", new.title));
        Ok(id)
    })
}

/// Opens a deviation inside another act, such as a step or a yield outside its limits; answers with id and number.
///
/// Refuses in the order of [`may_open`].
pub fn open_inside(change: &mut Change<'_>, new: &NewDeviation) -> Result<(i64, i64), Failure> {
    may_open(new, change.actor().at.date())?;
    let (id, number) = store::deviation::insert(change, new)?;
    change.concerns(Kind::Deviation, id)?;
    let concerned = [
        (Kind::Lot, new.lot),
        (Kind::MaterialLot, new.material_lot),
        (Kind::Equipment, new.equipment),
        (Kind::Study, new.study),
    ];
    for (kind, record) in concerned {
        if let Some(record) = record {
            change.concerns(kind, record)?;
        }
    }
    Ok((id, number))
}

/// Writes a line: class, cause, action, other lots, the answer on stability. Refuses in the order of [`may_write`].
pub fn write(db: &Db, actor: &Actor, id: i64, new: &NewDeviationEntry) -> Result<(), Failure> {
    db.change(actor, Act::WriteDeviation, &Reason::none(), |change| {
        let found = store::deviation::get(change, id)?;
        let study_lot = match new.study {
            Some(study) => Some(store::study::get(change, study)?.lot),
            None => None,
        };
        may_write(new, &found.facts, study_lot)?;
        store::deviation::insert_entry(change, id, new, None)?;
        if let Some(lot) = new.other_lot {
            change.concerns(Kind::Lot, lot)?;
        }
        if let Some(study) = new.study {
            change.concerns(Kind::Study, study)?;
        }
        let class = new.class.map(|class| format!(" {}", class.words())).unwrap_or_default();
        told(change, &found, &format!("{}{class}: {}", new.kind.words(), new.text))
    })
}

/// QA signs that work goes on under an open deviation. Refuses in the order of [`may_continue`].
pub fn continue_under(
    db: &Db,
    actor: &Actor,
    id: i64,
    text: &str,
    signed: &Signed<Continuation>,
) -> Result<(), Failure> {
    db.change(actor, Act::CloseDeviation, &Reason::none(), |change| {
        let found = store::deviation::get(change, id)?;
        change.concerns(Kind::Deviation, id)?;
        may_continue(&found.facts, text, actor.account)?;
        sign(change, &found, DeviationEntryKind::Continued, text, signed)
    })
}

/// QA closes by signature over the whole working record. Refuses in the order of [`may_close`].
pub fn close(db: &Db, actor: &Actor, id: i64, text: &str, signed: &Signed<Closure>) -> Result<(), Failure> {
    db.change(actor, Act::CloseDeviation, &Reason::none(), |change| {
        let found = store::deviation::get(change, id)?;
        change.concerns(Kind::Deviation, id)?;
        may_close(&found.facts, text, actor.account)?;
        sign(change, &found, DeviationEntryKind::Closed, text, signed)
    })
}

fn sign<M: Means>(
    change: &mut Change<'_>,
    found: &Deviation,
    kind: DeviationEntryKind,
    text: &str,
    signed: &Signed<M>,
) -> Result<(), Failure> {
    let entries = store::deviation::entries(change, found.id)?;
    let canonical = store::deviation::canonical(found, &entries, kind.words(), text);
    let signature = signed.put_under(change, Subject::new(Kind::Deviation, found.id), &canonical)?;
    let new = NewDeviationEntry { kind, class: None, text: text.to_string(), other_lot: None, study: None };
    store::deviation::insert_entry(change, found.id, &new, Some(signature))?;
    told(change, found, &format!("{}: {text}", kind.words()))
}

fn told(change: &mut Change<'_>, found: &Deviation, text: &str) -> Result<(), Failure> {
    change.concerns(Kind::Deviation, found.id)?;
    if let Some(lot) = found.facts.lot {
        change.concerns(Kind::Lot, lot)?;
    }
    change.tell(format!("deviation {}, {text}", found.facts.number));
    Ok(())
}
