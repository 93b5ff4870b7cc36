//! What a person states on an item of a lot's record, or on where the whole record is kept.

use super::{AnswerKind, Evidence, ITEMS, ItemState, from_rows};
use crate::domain::refusal::NamedReason;

/// Items on which a person may state where they stand: rows of the program cannot show all of them.
const STATED: [u8; 4] = [6, 8, 10, 13];
/// Items that apply to every lot.
const ALWAYS: [u8; 5] = [1, 5, 9, 11, 12];

/// An answer about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewAnswer {
    pub item: u8,
    pub kind: AnswerKind,
    pub text: String,
}

/// A stated reference to a record kept elsewhere.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewElsewhere {
    pub reference: String,
    pub place: String,
    pub why: String,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum CompletenessRefusal {
    #[error("{0} was imported, not made here. Its record is not kept here.")]
    RecordOfImported(String),
    #[error("{0} is decided on. What is stated on its record cannot change any more.")]
    RecordDecided(String),
    #[error("Choose one of the thirteen items.")]
    NoSuchItem,
    #[error("Item {0} applies to every lot. It is present, or missing.")]
    AppliesAlways(u8),
    #[error("Item {0} is read from what was recorded here. Record it where it belongs.")]
    NotStated(u8),
    #[error("Item {0} is open in its own record. Settle it there; a statement does not replace it.")]
    OpenInItsRecord(u8),
    #[error("Say where it stands, or why it does not apply, in at least ten characters.")]
    StatementTooShort,
    #[error("{lot} has its executed record {record} here. There is none elsewhere to refer to.")]
    RecordIsHere { lot: String, record: String },
}

impl NamedReason for CompletenessRefusal {
    fn field(&self) -> Option<String> {
        use CompletenessRefusal::*;
        let name = match self {
            NoSuchItem | NotStated(_) | OpenInItsRecord(_) => "item",
            AppliesAlways(_) => "answer",
            StatementTooShort => "text",
            _ => return None,
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: imported, decided on, no such item, an item that always applies, an item that nobody
/// states, one that is open in its own record, the text.
pub fn may_answer(new: &NewAnswer, evidence: &Evidence) -> Result<(), CompletenessRefusal> {
    undecided(evidence)?;
    if !(1..=ITEMS.len() as u8).contains(&new.item) {
        return Err(CompletenessRefusal::NoSuchItem);
    }
    match new.kind {
        AnswerKind::NotApplicable if ALWAYS.contains(&new.item) => {
            return Err(CompletenessRefusal::AppliesAlways(new.item));
        }
        AnswerKind::Present if !STATED.contains(&new.item) => {
            return Err(CompletenessRefusal::NotStated(new.item));
        }
        _ => {}
    }
    if let ItemState::Missing { may_be_answered: false, .. } = from_rows(new.item, evidence) {
        return Err(CompletenessRefusal::OpenInItsRecord(new.item));
    }
    if new.text.trim().chars().count() < 10 {
        return Err(CompletenessRefusal::StatementTooShort);
    }
    Ok(())
}

/// Refuses in this order: imported, decided on, an executed record here.
pub fn may_refer(evidence: &Evidence) -> Result<(), CompletenessRefusal> {
    undecided(evidence)?;
    match &evidence.record {
        Some(record) => Err(CompletenessRefusal::RecordIsHere {
            lot: evidence.lot_number.clone(),
            record: record.number.clone(),
        }),
        None => Ok(()),
    }
}

fn undecided(evidence: &Evidence) -> Result<(), CompletenessRefusal> {
    if evidence.is_imported {
        return Err(CompletenessRefusal::RecordOfImported(evidence.lot_number.clone()));
    }
    if evidence.is_decided {
        return Err(CompletenessRefusal::RecordDecided(evidence.lot_number.clone()));
    }
    Ok(())
}
