//! Methods: adding one with its first version, writing, signing and approving versions.

use std::path::Path;

use super::attachment::{NewFile, attach_inside};
use super::version::{self, Written};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::attachment::{AttachmentRefusal, MediaType};
use crate::domain::failure::Failure;
use crate::domain::method::rule::{MethodRefusal, may_be_signed, may_be_written};
use crate::domain::method::{MethodContent, TestKind};
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionRefusal, VersionState, Versioned};
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

/// Which grade of which draft gets a reference photograph.
#[derive(Clone, Debug)]
pub struct GradePhoto<'a> {
    pub version: i64,
    pub attribute: String,
    pub grade: String,
    pub file_name: &'a str,
    pub bytes: &'a [u8],
}

/// Puts a reference photograph beside the anchor sentence of a grade (decision A15). The picture is kept with the
/// method; its digest becomes part of the draft, so the signatures cover it. Another one replaces it.
///
/// Refuses in this order: the version is no draft, no such grade, then as [`super::attachment::attach`], no photo.
pub fn put_photo(db: &Db, folder: &Path, actor: &Actor, new: &GradePhoto<'_>) -> Result<(), Failure> {
    let of = Versioned::Method;
    db.change(actor, of.draft_act(), &Reason::none(), |change| {
        let version = store::version::get(change, of, new.version)?;
        if version.state != VersionState::Draft {
            return Err(VersionRefusal::VersionFrozen.into());
        }
        let mut content: MethodContent = version.read()?;
        let grade = content.grade_mut(&new.attribute, &new.grade).ok_or(MethodRefusal::GradeUnknown)?;
        let about = format!("{}: {}", new.attribute, grade.word);
        let subject = Subject::new(Kind::Method, version.parent);
        let file = NewFile { subject, file_name: new.file_name, bytes: new.bytes, about };
        let (_, row) = attach_inside(change, folder, &file)?;
        if !MediaType::from_code(row.media_type).is_some_and(MediaType::is_photo) {
            return Err(AttachmentRefusal::NotAPhoto.into());
        }
        grade.photo = Some(row.sha256.clone());
        store::version::update(change, of, new.version, &version.reason, &serde_json::to_string(&content)?)?;
        change.concerns(of.kind(), new.version)?;
        change.concerns(Kind::Method, version.parent)?;
        change.tell(format!("reference photograph of {}, sha256 {}", row.about, &row.sha256[..12]));
        Ok(())
    })
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
