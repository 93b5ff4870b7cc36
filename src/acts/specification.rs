//! Specifications: adding one for a presentation, writing, signing and approving versions.

use super::version::{self, Written};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::specification::SpecificationContent;
use crate::domain::specification::rule::{SpecificationRefusal, may_be_written};
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::version::Version;

/// Adds a specification for a presentation with version 1 as a draft; answers with the version's id.
///
/// Refuses in this order: the code is taken, the presentation has one already, the content
/// ([`may_be_written`]).
pub fn add(
    db: &Db,
    actor: &Actor,
    code: &str,
    presentation: i64,
    content: &SpecificationContent,
) -> Result<i64, Failure> {
    db.change(actor, Act::DraftSpecificationVersion, &Reason::none(), |change| {
        if store::specification::is_code_taken(change, code)? {
            return Err(SpecificationRefusal::CodeTaken(code.to_string()).into());
        }
        if let Some(other) = store::specification::code_of_presentation(change, presentation)? {
            return Err(SpecificationRefusal::PresentationTaken(other).into());
        }
        content_holds(change, content)?;
        let specification = store::specification::insert(change, code, presentation)?;
        let first = written("first version", content)?;
        let id = version::draft_inside(change, Versioned::Specification, specification, &first)?;
        change.concerns(Kind::Presentation, presentation)?;
        change.tell(format!("{code}, version 1"));
        Ok(id)
    })
}

fn written(reason: &str, content: &SpecificationContent) -> Result<Written, Failure> {
    Ok(Written { reason: reason.to_string(), content: serde_json::to_string(content)? })
}

fn content_holds(reader: &Reader<'_>, content: &SpecificationContent) -> Result<(), Failure> {
    let versions = store::method::approved_versions(reader)?;
    // Newest first per method, so the first found is the newest approved one.
    let method_of = |method: i64| {
        versions.iter().find(|version| version.method == method).map(|version| &version.content)
    };
    may_be_written(content, &method_of)?;
    Ok(())
}

/// Writes the next version of a specification as a draft.
pub fn draft(
    db: &Db,
    actor: &Actor,
    specification: i64,
    reason: &str,
    content: &SpecificationContent,
) -> Result<i64, Failure> {
    db.read(|reader| content_holds(reader, content))?;
    version::draft(db, actor, Versioned::Specification, specification, &written(reason, content)?)
}

/// Rewrites a draft; `seen` is the digest of the version the form was filled from.
pub fn rewrite(
    db: &Db,
    actor: &Actor,
    id: i64,
    reason: &str,
    content: &SpecificationContent,
    seen: &str,
) -> Result<(), Failure> {
    db.read(|reader| content_holds(reader, content))?;
    version::rewrite(db, actor, Versioned::Specification, id, &written(reason, content)?, seen)
        .map_err(version::with_differences)
}

/// The content check of signing and approving: every rule again, against the methods approved by then.
pub fn check(change: &Change<'_>, version: &Version) -> Result<(), Failure> {
    content_holds(change, &version.read()?)
}
