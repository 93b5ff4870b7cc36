//! Signing and approving a version, the same on every definition's page.

use super::form::{self, Form};
use super::part::Signatures;
use super::reply::Outcome;
use super::visit::Visit;
use crate::acts;
use crate::acts::signature::{Approval, Authorship};
use crate::acts::version::ContentCheck;
use crate::domain::failure::Failure;
use crate::domain::signature::{Meaning, SignatureRefusal};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::version::Version;

/// The form that is next in the version's life for this person: sign as author, approve, or none.
///
/// `path` is the version's page; the form posts to `<path>/sign`.
pub fn next_form(
    visit: &Visit,
    of: Versioned,
    version: &Version,
    path: &str,
) -> Result<Option<Form>, Failure> {
    let is_author = version.author == visit.actor()?.account;
    let is_offered = match version.state {
        VersionState::Draft => is_author,
        VersionState::SignedByAuthor => !is_author && visit.may(of.sign_act()),
        _ => false,
    };
    if is_offered { Ok(Some(sign_form(visit, version, path)?)) } else { Ok(None) }
}

fn sign_form(visit: &Visit, version: &Version, path: &str) -> Result<Form, Failure> {
    let (meaning, button) = match version.state {
        VersionState::Draft => (Meaning::Authorship, "Sign as author"),
        _ => (Meaning::Approval, "Approve this version"),
    };
    Ok(Form::new(visit, &format!("{path}/sign"), button)?
        .signature(meaning.words())
        .hide("seen", version.digest())
        .hide("meaning", meaning.code()))
}

/// The signatures under a version.
pub fn signatures(visit: &Visit, of: Versioned, version: &Version) -> Result<Signatures, Failure> {
    let found = visit.read(|reader| store::signature::of(reader, of.kind(), version.id))?;
    Ok(Signatures::of(&found, &version.digest(), visit.at.zone))
}

/// Handles the POST of [`next_form`]. `page` shows the version's page again with the failed form.
pub fn sign(
    visit: &Visit,
    of: Versioned,
    id: i64,
    path: &str,
    check: ContentCheck<'_>,
    page: impl FnOnce(u16, Form) -> Outcome,
) -> Outcome {
    let version = visit.read(|reader| store::version::get(reader, of, id))?;
    if version.state == VersionState::Draft && version.author != visit.actor()?.account {
        return Err(SignatureRefusal::NotSignedByAuthor.into());
    }
    // The author who wants to approve is refused by the act, so that the attempt is noted.
    let form = sign_form(visit, &version, path)?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        form,
        |typed| {
            let meaning = Meaning::from_code(&typed.raw("meaning"))?;
            let password = typed.visit.form.get("password")?.to_string();
            Some((meaning, typed.raw("seen"), typed.raw("user_name"), password))
        },
        |actor, (meaning, seen, user_name, password)| match meaning {
            Meaning::Authorship => {
                let signed =
                    acts::signature::authenticate::<Authorship>(db, secrets, actor, &user_name, &password)?;
                acts::version::sign(db, actor, of, id, &seen, &signed, check)
            }
            _ => {
                let signed =
                    acts::signature::authenticate::<Approval>(db, secrets, actor, &user_name, &password)?;
                acts::version::approve(db, actor, of, id, &seen, &signed, check)
            }
        },
        |_| path.to_string(),
        page,
    )
}
