//! Components that many pages show: status marks, signatures, the history of a record.

use std::borrow::Cow;

use askama::Template;
use chrono_tz::Tz;

use super::show;
use crate::domain::act::Act;
use crate::domain::status::Status;
use crate::store::signature::Signature;
use crate::store::trail::{ActLine, Recent};

/// A status as word and shape, with a count inside the words where one is given.
#[derive(Clone, Debug, Template)]
#[template(path = "part/status.html")]
pub struct StatusMark {
    slug: &'static str,
    words: Cow<'static, str>,
}

impl askama::filters::HtmlSafe for StatusMark {}

impl StatusMark {
    pub fn of(status: Status) -> StatusMark {
        StatusMark { slug: slug(status), words: Cow::Borrowed(status.words()) }
    }

    /// What is done and asks for nothing more, in the words of its work: "Done", "Skipped".
    pub fn settled(words: &str) -> StatusMark {
        StatusMark { slug: slug(Status::Signed), words: words.to_string().into() }
    }

    /// "Out of specification: 1 of 7 tests".
    pub fn counting(status: Status, count: usize, of: usize, things: &str) -> StatusMark {
        let words = format!("{}: {count} of {of} {things}", status.words());
        StatusMark { slug: slug(status), words: Cow::Owned(words) }
    }
}

/// The class and mark id of a status.
fn slug(status: Status) -> &'static str {
    match status {
        Status::NotStarted => "not-started",
        Status::CannotStartYet => "cannot-start",
        Status::InProgress => "in-progress",
        Status::WaitingForCheck => "waiting-check",
        Status::WaitingForReview => "waiting-review",
        Status::SentBack => "sent-back",
        Status::Signed => "signed",
        Status::OutOfSpecification => "out",
        Status::Missed => "missed",
    }
}

/// The history at the foot of a record's page.
#[derive(Clone, Debug, Template)]
#[template(path = "part/trail.html")]
pub struct Trail {
    /// What the table is called.
    pub name: String,
    pub lines: Vec<TrailLine>,
    /// Where the whole history of the record stands, if this is only its newest part.
    pub whole: Option<String>,
}

impl askama::filters::HtmlSafe for Trail {}

/// One act in a history.
#[derive(Clone, Debug)]
pub struct TrailLine {
    pub act: i64,
    pub at: String,
    pub who: String,
    pub role: String,
    pub what: String,
    pub detail: String,
    pub reason: String,
    pub is_denied: bool,
    pub digest: String,
}

impl Trail {
    pub fn of(recent: &Recent, zone: Tz) -> Trail {
        let (kind, id) = (recent.subject.kind.code(), recent.subject.id);
        Trail {
            name: "History".to_string(),
            lines: recent.lines.iter().map(|line| trail_line(line, zone)).collect(),
            whole: recent.has_older.then(|| format!("/history/of/{kind}/{id}")),
        }
    }
}

pub fn trail_line(line: &ActLine, zone: Tz) -> TrailLine {
    TrailLine {
        act: line.act,
        at: show::instant(&line.at, zone),
        who: line.full_name.clone(),
        role: line.role.clone().unwrap_or_default(),
        what: Act::from_code(&line.code)
            .map(Act::words)
            .unwrap_or("did something of an older version")
            .to_string(),
        detail: line.detail.clone().unwrap_or_default(),
        reason: line.reason.clone().unwrap_or_default(),
        is_denied: line.outcome == "denied",
        digest: line.digest.chars().take(12).collect(),
    }
}

/// Signatures as every page, print and export shows them: name, role, time with offset, meaning, digest.
#[derive(Clone, Debug, Template)]
#[template(path = "part/signatures.html")]
pub struct Signatures {
    pub signed: Vec<Signed>,
}

impl askama::filters::HtmlSafe for Signatures {}

#[derive(Clone, Debug)]
pub struct Signed {
    pub meaning: String,
    pub name: String,
    pub role: String,
    pub at: String,
    pub digest: String,
    pub statement: String,
    /// The content under the signature is no longer what was signed.
    pub is_broken: bool,
}

impl Signatures {
    /// Signatures that went over different contents, each with the digest of its own as it stands now.
    pub fn each(signed: Vec<(Signature, String)>, zone: Tz) -> Signatures {
        let one = |(signature, now): (Signature, String)| Signatures::of(&[signature], &now, zone).signed;
        Signatures { signed: signed.into_iter().flat_map(one).collect() }
    }

    /// `now_digest` is the digest of the record's present canonical text.
    pub fn of(signatures: &[Signature], now_digest: &str, zone: Tz) -> Signatures {
        let signed = signatures
            .iter()
            .map(|signature| Signed {
                meaning: signature.meaning.words().to_string(),
                name: signature.signer_name.clone(),
                role: signature.role.clone().unwrap_or_default(),
                at: show::instant(&signature.at, zone),
                digest: show::digest(&signature.digest),
                statement: signature.statement.clone().unwrap_or_default(),
                is_broken: signature.digest != now_digest,
            })
            .collect();
        Signatures { signed }
    }
}
