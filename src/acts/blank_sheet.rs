//! Issuing blank sheets, and accounting for each.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::blank_sheet::{SheetEventKind, may_issue, may_record};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// A sheet about to be issued.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewSheet {
    pub purpose: String,
    pub lot: Option<i64>,
    pub issued_to: i64,
}

/// Gives a numbered sheet to a person. Refuses in the order of [`may_issue`].
pub fn issue(db: &Db, actor: &Actor, new: &NewSheet) -> Result<i64, Failure> {
    db.change(actor, Act::IssueBlankSheet, &Reason::none(), |change| {
        let holder = store::account::get(change, new.issued_to)?;
        may_issue(&new.purpose, &holder.full_name, holder.is_enabled)?;
        let (id, number) = store::blank_sheet::insert(change, &new.purpose, new.lot, new.issued_to)?;
        if let Some(lot) = new.lot {
            change.concerns(Kind::Lot, lot)?;
        }
        change.tell(format!("sheet {number} to {}: {}", holder.full_name, new.purpose));
        Ok(id)
    })
}

/// Records that a sheet came back, was voided, was transcribed, or that its transcription was verified by a second
/// person.
///
/// Refuses in the order of [`may_record`].
pub fn record(db: &Db, actor: &Actor, sheet: i64, kind: SheetEventKind, text: &str) -> Result<(), Failure> {
    db.change(actor, Act::RecordBlankSheet, &Reason::none(), |change| {
        let found = store::blank_sheet::get(change, sheet)?;
        if let Some((lot, _)) = &found.lot {
            change.concerns(Kind::Lot, *lot)?;
        }
        may_record(kind, text, &found.facts(), actor.account)?;
        store::blank_sheet::insert_event(change, sheet, kind, text)?;
        change.tell(format!("sheet {} {}: {text}", found.number, kind.words()));
        Ok(())
    })
}
