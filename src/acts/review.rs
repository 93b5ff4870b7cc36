//! The review by QA: answers to exceptions, the decision, and the signing of a list.

use super::check::{concerned, told};
use super::secret::Secrets;
use super::signature::{Review, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::review::exception::{NewAnswer, answered};
use crate::domain::review::{ReviewRefusal, may_agree, may_send_back, may_sign, not_own_work};
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::review::facts::ReviewSample;

/// Proof that a reviewer opened a sample in its present state: digest of the content, and the keyed digest over
/// reviewer, sample and content that only the page of that sample hands out (decision B3).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Opened {
    pub content_digest: String,
    pub token: String,
}

/// What the page of a sample hands out to the person who opens it.
pub fn opened(
    secrets: &Secrets,
    actor: &Actor,
    sample: i64,
    content_digest: &str,
) -> Result<Opened, Failure> {
    let token = secrets.keyed(&token_parts(actor, sample, content_digest).each_ref().map(String::as_str))?;
    Ok(Opened { content_digest: content_digest.to_string(), token })
}

fn token_parts(actor: &Actor, sample: i64, content_digest: &str) -> [String; 4] {
    let account = actor.account.to_string();
    ["opened for review".to_string(), account, sample.to_string(), content_digest.to_string()]
}

/// Refuses in this order: never opened by this person, changed since.
fn is_opened(secrets: &Secrets, change: &Change<'_>, sample: i64, opened: &Opened) -> Result<(), Failure> {
    let parts = token_parts(change.actor(), sample, &opened.content_digest);
    if !secrets.is_keyed(&parts.each_ref().map(String::as_str), &opened.token) {
        return Err(ReviewRefusal::NotOpened.into());
    }
    if store::review::digest(change, sample)? != opened.content_digest {
        return Err(ReviewRefusal::ChangedSinceLooked.into());
    }
    Ok(())
}

/// Answers one exception of a sample.
///
/// Refuses own work, then in the order of [`answered`].
pub fn answer(db: &Db, actor: &Actor, sample: i64, about: &str, new: &NewAnswer) -> Result<(), Failure> {
    db.change(actor, Act::AnswerException, &Reason::none(), |change| {
        let found = store::review::sample(change, sample)?;
        concerned(change, &found)?;
        not_own_work(&found.facts, change.actor().account)?;
        let exception = found.facts.exceptions.iter().find(|exception| exception.about == about);
        let text = answered(exception, new)?;
        let flag = exception.and_then(|exception| exception.flag);
        store::review::decision::insert_answer(change, sample, flag, about, &text)?;
        let sentence = exception.map(|exception| exception.sentence.clone()).unwrap_or_default();
        told(change, &found, &format!("{sentence} {text}"))
    })
}

/// Puts a sample on the reviewer's signing list.
///
/// Refuses in this order: never opened, changed since, then as [`may_agree`].
pub fn agree(db: &Db, secrets: &Secrets, actor: &Actor, sample: i64, opened: &Opened) -> Result<(), Failure> {
    db.change(actor, Act::DecideReview, &Reason::none(), |change| {
        is_opened(secrets, change, sample, opened)?;
        let found = store::review::sample(change, sample)?;
        concerned(change, &found)?;
        may_agree(&found.facts, change.actor().account)?;
        store::review::decision::insert(change, sample, "agree", &opened.content_digest, None)?;
        told(change, &found, "agreed, not signed yet")
    })
}

/// Leaves a sample for later, and takes it off the signing list.
pub fn not_yet(
    db: &Db,
    secrets: &Secrets,
    actor: &Actor,
    sample: i64,
    opened: &Opened,
) -> Result<(), Failure> {
    db.change(actor, Act::DecideReview, &Reason::none(), |change| {
        is_opened(secrets, change, sample, opened)?;
        let found = store::review::sample(change, sample)?;
        store::review::decision::insert(change, sample, "not yet", &opened.content_digest, None)?;
        told(change, &found, "not yet")
    })
}

/// Sends the named tests back to the analyst.
///
/// Refuses in this order: never opened, changed since, then as [`may_send_back`].
pub fn send_back(
    db: &Db,
    secrets: &Secrets,
    actor: &Actor,
    sample: i64,
    opened: &Opened,
    named: &[i64],
    why: &str,
) -> Result<(), Failure> {
    db.change(actor, Act::SendBackResult, &Reason::stated(why.trim()), |change| {
        is_opened(secrets, change, sample, opened)?;
        let found = store::review::sample(change, sample)?;
        may_send_back(&found.facts, named, why)?;
        let mut titles = Vec::new();
        for test in found.facts.tests.iter().filter(|test| named.contains(&test.sample_test)) {
            let Some(version) = test.version else { continue };
            store::check::insert(change, test.sample_test, version, false, Some(why.trim()))?;
            titles.push(test.title.as_str());
        }
        let digest = &opened.content_digest;
        store::review::decision::insert(change, sample, "send back", digest, Some(why.trim()))?;
        told(change, &found, &titles.join(", "))
    })
}

/// What a signing act did.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Receipt {
    pub act: i64,
    pub signed: usize,
    /// Numbers of samples that dropped out because they changed since the reviewer looked.
    pub dropped: Vec<String>,
}

/// Signs samples of the reviewer's own list, each with its own signature. `listed` are (sample, digest) as the
/// signing page showed them.
///
/// What changed since then drops out and is named. Refuses in this order: a sample the reviewer has not agreed
/// to in the shown state, all changed, then as [`may_sign`].
pub fn sign(
    db: &Db,
    actor: &Actor,
    listed: &[(i64, String)],
    signed: &Signed<Review>,
) -> Result<Receipt, Failure> {
    db.change(actor, Act::SignPulls, &Reason::none(), |change| {
        let agreed = store::review::decision::agreed_by(change, change.actor().account)?;
        let is_agreed = |(sample, digest): &(i64, String)| {
            agreed.iter().any(|one| one.sample == *sample && one.content_digest == *digest)
        };
        if !listed.iter().all(is_agreed) {
            return Err(ReviewRefusal::NotOpened.into());
        }
        let ids: Vec<i64> = listed.iter().map(|(sample, _)| *sample).collect();
        let (kept, dropped) = split(change, store::review::facts::many(change, &ids)?, listed)?;
        if kept.is_empty() && !dropped.is_empty() {
            return Err(ReviewRefusal::AllChanged.into());
        }
        for (sample, _) in &kept {
            concerned(change, sample)?;
        }
        let facts: Vec<_> = kept.iter().map(|(sample, _)| sample.facts.clone()).collect();
        may_sign(&facts, change.actor().account, signed.statement().unwrap_or_default())?;
        for (sample, canonical) in &kept {
            signed.put_under(change, Subject::new(Kind::Sample, sample.head.sample), canonical)?;
            told(change, sample, "")?;
        }
        let numbers: Vec<&str> = kept.iter().map(|(sample, _)| sample.head.number.as_str()).collect();
        change.tell(numbers.join(", "));
        let dropped = dropped.into_iter().map(|sample| sample.head.number).collect();
        Ok(Receipt { act: change.act(), signed: kept.len(), dropped })
    })
}

/// A sample with the canonical text its signature goes over.
type Kept = (ReviewSample, String);

/// Parts what is as the reviewer saw it from what has changed.
fn split(
    change: &Change<'_>,
    samples: Vec<ReviewSample>,
    listed: &[(i64, String)],
) -> Result<(Vec<Kept>, Vec<ReviewSample>), Failure> {
    let (mut kept, mut dropped) = (Vec::new(), Vec::new());
    for sample in samples {
        let canonical = store::review::canonical(change, sample.head.sample, None)?;
        let digest = sha256_hex(canonical.as_bytes());
        let is_same = listed.iter().any(|(id, seen)| *id == sample.head.sample && *seen == digest);
        if is_same { kept.push((sample, canonical)) } else { dropped.push(sample) }
    }
    Ok((kept, dropped))
}
