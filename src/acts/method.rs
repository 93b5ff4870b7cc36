//! Methods: adding one with its first version, writing, signing and approving versions.

use super::version::{self, Written};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::method::rule::{MethodRefusal, may_be_signed, may_be_written};
use crate::domain::method::{MethodContent, TestKind};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::version::Version;

/// A method with the content of its first version.
#[derive(Clone, Debug)]
pub struct NewMethod {
    pub code: String,
    pub name: String,
    pub content: MethodContent,
}

/// Adds a method with version 1 as a draft; answers with the version's id.
///
/// Refuses in this order: the code is taken, the content ([`may_be_written`]).
pub fn add(db: &Db, actor: &Actor, new: &NewMethod) -> Result<i64, Failure> {
    let kind = new.content.settings.kind();
    db.change(actor, Act::AddMethod, &Reason::none(), |change| {
        if store::method::is_code_taken(change, &new.code)? {
            return Err(MethodRefusal::CodeTaken(new.code.clone()).into());
        }
        may_be_written(kind, &new.content)?;
        let method = store::method::insert(change, &new.code, &new.name, kind)?;
        let first = written("first version", &new.content)?;
        let id = version::draft_inside(change, Versioned::Method, method, &first)?;
        change.concerns(Kind::Method, method)?;
        change.tell(format!("{}, {} ({})", new.code, new.name, kind.words()));
        Ok(id)
    })
}

fn written(reason: &str, content: &MethodContent) -> Result<Written, Failure> {
    Ok(Written { reason: reason.to_string(), content: serde_json::to_string(content)? })
}

/// Writes the next version of a method as a draft.
pub fn draft(
    db: &Db,
    actor: &Actor,
    method: i64,
    reason: &str,
    content: &MethodContent,
) -> Result<i64, Failure> {
    let kind = kind_of(db, method)?;
    may_be_written(kind, content)?;
    version::draft(db, actor, Versioned::Method, method, &written(reason, content)?)
}

/// Rewrites a draft; `seen` is the digest of the version the form was filled from.
pub fn rewrite(
    db: &Db,
    actor: &Actor,
    id: i64,
    reason: &str,
    content: &MethodContent,
    seen: &str,
) -> Result<(), Failure> {
    let kind = db.read(|reader| store::method::version(reader, id))?.kind;
    may_be_written(kind, content)?;
    version::rewrite(db, actor, Versioned::Method, id, &written(reason, content)?, seen)
        .map_err(version::with_differences)
}

fn kind_of(db: &Db, method: i64) -> Result<TestKind, Failure> {
    Ok(db.read(|reader| store::method::get(reader, method))?.kind)
}

/// The content check of signing and approving: the worked example reproduces.
pub fn check(change: &Change<'_>, version: &Version) -> Result<(), Failure> {
    let method = store::method::get(change, version.parent)?;
    may_be_signed(method.kind, &version.read()?)?;
    Ok(())
}
