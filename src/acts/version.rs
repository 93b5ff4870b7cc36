//! Writing, signing and approving a version of a definition: the same life for all four kinds.

use super::signature::{Approval, Authorship, Signed};
use crate::domain::actor::Actor;
use crate::domain::failure::{Failure, Stale};
use crate::domain::reason::Reason;
use crate::domain::refusal::Refusal;
use crate::domain::signature::SignatureRefusal;
use crate::domain::subject::Subject;
use crate::domain::version::{VersionRefusal, VersionState, Versioned, differences, may_approve, may_sign};
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::version::Version;

/// What is written into a version: why it exists and its canonical JSON.
#[derive(Clone, Debug)]
pub struct Written {
    pub reason: String,
    pub content: String,
}

/// Starts the next version of a definition as a draft. One draft at a time.
pub fn draft(db: &Db, actor: &Actor, of: Versioned, parent: i64, written: &Written) -> Result<i64, Failure> {
    db.change(actor, of.draft_act(), &Reason::stated(&written.reason), |change| {
        draft_inside(change, of, parent, written)
    })
}

/// [`draft`] as part of a larger act, such as adding the definition itself.
pub fn draft_inside(
    change: &mut Change<'_>,
    of: Versioned,
    parent: i64,
    written: &Written,
) -> Result<i64, Failure> {
    let versions = store::version::of_parent(change, of, parent)?;
    let is_open =
        |version: &&Version| matches!(version.state, VersionState::Draft | VersionState::SignedByAuthor);
    if let Some(open) = versions.iter().find(is_open) {
        return Err(VersionRefusal::DraftOpen(open.number).into());
    }
    let id = store::version::insert(change, of, parent, &written.reason, &written.content, None)?;
    concerns(change, of, id, parent)?;
    let number = versions.first().map_or(0, |version| version.number) + 1;
    change.tell(format!("version {number}"));
    Ok(id)
}

fn concerns(change: &Change<'_>, of: Versioned, id: i64, parent: i64) -> Result<(), Failure> {
    change.concerns(of.kind(), id)?;
    change.concerns(of.parent(), parent)
}

/// Rewrites a draft. `seen` is the digest of the content the form was filled from: another one is `Stale`.
pub fn rewrite(
    db: &Db,
    actor: &Actor,
    of: Versioned,
    id: i64,
    written: &Written,
    seen: &str,
) -> Result<(), Failure> {
    db.change(actor, of.draft_act(), &Reason::stated(&written.reason), |change| {
        let version = store::version::get(change, of, id)?;
        if version.state != VersionState::Draft {
            return Err(VersionRefusal::VersionFrozen.into());
        }
        if version.digest() != seen {
            return Err(Failure::Stale(Stale {
                what: format!("Version {}", version.number),
                changed_by: version.author_name.clone(),
                changed_at: version.written_at.clone(),
                theirs: version.content.clone(),
                yours: written.content.clone(),
            }));
        }
        store::version::update(change, of, id, &written.reason, &written.content)?;
        concerns(change, of, id, version.parent)?;
        change.tell(format!("version {}", version.number));
        Ok(())
    })
}

/// A `Stale` of [`rewrite`] with the places where the two contents differ, in place of both documents.
pub fn with_differences(failure: Failure) -> Failure {
    let Failure::Stale(stale) = failure else { return failure };
    let (theirs, yours) = differences(&stale.theirs, &stale.yours);
    Failure::Stale(Stale { theirs, yours, ..stale })
}

/// A check of the content before it may be signed, such as a worked example that must reproduce.
pub type ContentCheck<'a> = &'a dyn Fn(&Change<'_>, &Version) -> Result<(), Failure>;

/// The author signs the draft they wrote. From then on it is frozen.
///
/// Refuses in this order: state, changed since seen, the content check.
pub fn sign(
    db: &Db,
    actor: &Actor,
    of: Versioned,
    id: i64,
    seen: &str,
    signed: &Signed<Authorship>,
    check: ContentCheck<'_>,
) -> Result<(), Failure> {
    let act = if of == Versioned::Formulation { of.sign_act() } else { of.draft_act() };
    db.change(actor, act, &Reason::none(), |change| {
        let version = store::version::get(change, of, id)?;
        may_sign(version.state)?;
        seen_is_current(&version, seen)?;
        check(change, &version)?;
        signed.put_under(change, Subject::new(of.kind(), id), &version.canonical())?;
        concerns(change, of, id, version.parent)?;
        change.tell(format!("version {}, as its author", version.number));
        Ok(())
    })
}

/// A second person approves. Refuses in this order: state and author, changed since seen, the content check.
pub fn approve(
    db: &Db,
    actor: &Actor,
    of: Versioned,
    id: i64,
    seen: &str,
    signed: &Signed<Approval>,
    check: ContentCheck<'_>,
) -> Result<(), Failure> {
    db.change(actor, of.sign_act(), &Reason::none(), |change| {
        let version = store::version::get(change, of, id)?;
        let signatures = store::signature::of(change, of.kind(), id)?;
        let authors: Vec<i64> =
            signatures.iter().map(|signature| signature.account).chain([version.author]).collect();
        concerns(change, of, id, version.parent)?;
        may_approve(version.state, actor.account, &authors)?;
        seen_is_current(&version, seen)?;
        check(change, &version)?;
        signed.put_under(change, Subject::new(of.kind(), id), &version.canonical())?;
        change.tell(format!("version {}", version.number));
        Ok(())
    })
}

fn seen_is_current(version: &Version, seen: &str) -> Result<(), Refusal> {
    if version.digest() == seen { Ok(()) } else { Err(SignatureRefusal::ChangedSinceSeen.into()) }
}

/// No check beyond the signature's own rules.
pub fn unchecked(_: &Change<'_>, _: &Version) -> Result<(), Failure> {
    Ok(())
}
