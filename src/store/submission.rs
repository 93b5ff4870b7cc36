//! One-use keys of forms: the same submit again finds the first answer and makes no second record.

use std::sync::atomic::Ordering;

use rusqlite::named_params;

use super::door::{Change, Housekeeping};
use super::{Answer, Reader};
use crate::domain::failure::Failure;

/// Takes the key of the actor's form inside the act's own transaction, so both are kept or neither.
///
/// The first act of a request claims the key; a later act of the same request is part of the same answer.
pub(in crate::store) fn claim(change: &Change<'_>) -> Answer<()> {
    let Some(submission) = &change.actor().submission else { return Ok(()) };
    if submission.is_claimed.load(Ordering::SeqCst) {
        return Ok(());
    }
    let known = change.maybe(
        "select content_digest from submission_key where key = :key",
        named_params! { ":key": submission.key },
        |row| row.get::<_, String>(0),
    )?;
    match known {
        None => {
            change.execute(
                "insert into submission_key (key, account, content_digest, act, at)
                 values (:key, :account, :digest, :act, :at)",
                named_params! {
                    ":key": submission.key,
                    ":account": change.actor().account,
                    ":digest": submission.content_digest,
                    ":act": change.act(),
                    ":at": change.actor().at.stored(),
                },
            )?;
            Ok(())
        }
        Some(digest) if digest == submission.content_digest => Err(Failure::Repeated),
        Some(_) => Err(Failure::RepeatedOtherwise),
    }
}

/// Where the first submit under a key led, and what it had sent.
pub struct Answered {
    pub content_digest: String,
    pub act: i64,
    pub location: Option<String>,
}

pub fn answered(reader: &Reader<'_>, account: i64, key: &str) -> Answer<Option<Answered>> {
    reader.maybe(
        "select content_digest, act, location from submission_key where key = :key and account = :account",
        named_params! { ":key": key, ":account": account },
        |row| Ok(Answered { content_digest: row.get(0)?, act: row.get(1)?, location: row.get(2)? }),
    )
}

/// Remembers where the answer to a submit led, for a repeat of it.
pub fn remember_location(work: &Housekeeping<'_>, key: &str, location: &str) -> Answer<()> {
    work.execute(
        "update submission_key set location = :location where key = :key and location is null",
        named_params! { ":key": key, ":location": location },
    )?;
    Ok(())
}
