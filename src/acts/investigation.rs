//! The working record of an investigation.

use super::reading::concerns;
use super::signature::{Conclusion, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::investigation::{ConcludeFacts, InvestigationRefusal, may_conclude, may_write};
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::investigation::{Investigation, NewEntry};

/// Writes a finding, evidence or another lot that was considered.
pub fn write(db: &Db, actor: &Actor, id: i64, new: &NewEntry) -> Result<(), Failure> {
    db.change(actor, Act::RecordInvestigationEntry, &Reason::none(), |change| {
        let found = store::investigation::get(change, id)?;
        may_write(found.is_concluded, &new.kind, new.other_lot, found.lot)?;
        store::investigation::insert_entry(change, id, new)?;
        told(change, &found, &format!("{}: {}", new.kind, new.text))
    })
}

/// Names who steers; the newest name counts.
pub fn steer(db: &Db, actor: &Actor, id: i64, account: i64) -> Result<(), Failure> {
    db.change(actor, Act::RecordInvestigationEntry, &Reason::none(), |change| {
        let found = store::investigation::get(change, id)?;
        may_write(found.is_concluded, "steered by", None, found.lot)?;
        let person = store::account::get(change, account)?;
        if !person.roles.iter().any(|role| [Role::LabManager, Role::QaReviewer].contains(role)) {
            return Err(InvestigationRefusal::CannotSteer(person.full_name).into());
        }
        let text = format!("{} steers", person.full_name);
        let new = NewEntry {
            kind: "steered by".to_string(),
            text: text.clone(),
            account: Some(account),
            ..NewEntry::default()
        };
        store::investigation::insert_entry(change, id, &new)?;
        told(change, &found, &text)
    })
}

/// QA concludes by signature over the whole working record.
///
/// Refuses in the order of [`may_conclude`].
pub fn conclude(
    db: &Db,
    actor: &Actor,
    id: i64,
    text: &str,
    signed: &Signed<Conclusion>,
) -> Result<(), Failure> {
    db.change(actor, Act::ConcludeInvestigation, &Reason::none(), |change| {
        let found = store::investigation::get(change, id)?;
        let entries = store::investigation::entries(change, id)?;
        change.concerns(Kind::Investigation, id)?;
        let readings = store::reading::of_test(change, found.sample_test)?;
        may_conclude(ConcludeFacts {
            is_concluded: found.is_concluded,
            is_steered: entries.iter().any(|entry| entry.kind == "steered by"),
            findings: entries.iter().filter(|entry| entry.kind == "finding").count(),
            readers: readings.iter().map(|reading| reading.account).collect(),
            concluder: actor.account,
        })?;
        let canonical = store::investigation::canonical(&found, &entries, text);
        let signature = signed.put_under(change, Subject::new(Kind::Investigation, id), &canonical)?;
        let new = NewEntry {
            kind: "conclusion".to_string(),
            text: text.to_string(),
            signature: Some(signature),
            ..NewEntry::default()
        };
        store::investigation::insert_entry(change, id, &new)?;
        told(change, &found, &format!("conclusion: {text}"))
    })
}

fn told(change: &mut Change<'_>, found: &Investigation, text: &str) -> Result<(), Failure> {
    change.concerns(Kind::Investigation, found.id)?;
    concerns(change, &store::bench::sample(change, found.sample)?)?;
    change.tell(format!("investigation {}, {text}", found.number));
    Ok(())
}
