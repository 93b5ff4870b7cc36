//! Every way in which what a person asked for did not happen.

use super::act::Act;
use super::refusal::{NamedReason, Refusal};

/// Why an act or a page did not come about. `web` turns each into its page and status.
#[derive(Debug)]
pub enum Failure {
    /// A rule said no. 409, at its field or on top of the form.
    Refused(Refusal),
    /// Somebody else changed the record since the form was shown. 409 with both values.
    Stale(Stale),
    /// A rule said no because it is the person's own work. 403, recorded in the trail.
    OwnWork(OwnWork),
    /// No role of the person permits the act. 403, recorded in the trail.
    Denied(Act),
    /// The thing does not exist, or not for this person. 404.
    Missing(String),
    /// The same form was sent before: the answer of the first time is to be given again.
    Repeated,
    /// The same form key with other content. 409.
    RepeatedOtherwise,
    /// A request the program's own pages never make: unknown or doubled fields. 400.
    BadRequest(String),
    /// No signed-in person.
    NoSession,
    /// Writes are held: the clock moved, the disk failed. 503 with the sentence.
    Held(String),
    /// Something broke. 500 with a reference number only.
    Fault(Fault),
}

/// An attempt to sign, check or decide on own work.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OwnWork {
    pub act: Act,
    pub sentence: String,
    /// The accounts that took part; another person with a role for the act could do it.
    pub took_part: Vec<i64>,
}

/// What changed under the person's hands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Stale {
    pub what: String,
    pub changed_by: String,
    pub changed_at: String,
    pub theirs: String,
    pub yours: String,
}

/// An unexpected error with its full chain, for the log alone.
#[derive(Debug)]
pub struct Fault(pub Box<dyn std::error::Error + Send + Sync>);

impl<R: NamedReason> From<R> for Failure {
    fn from(reason: R) -> Failure {
        Failure::Refused(reason.into())
    }
}

impl From<Refusal> for Failure {
    fn from(refusal: Refusal) -> Failure {
        Failure::Refused(refusal)
    }
}

impl Failure {
    /// A fault from any error.
    pub fn fault(error: impl Into<Box<dyn std::error::Error + Send + Sync>>) -> Failure {
        Failure::Fault(Fault(error.into()))
    }

    pub fn missing(what: impl Into<String>) -> Failure {
        Failure::Missing(what.into())
    }
}

impl From<std::io::Error> for Failure {
    fn from(error: std::io::Error) -> Failure {
        Failure::fault(error)
    }
}

impl From<serde_json::Error> for Failure {
    fn from(error: serde_json::Error) -> Failure {
        Failure::fault(error)
    }
}

impl std::fmt::Display for Failure {
    /// One sentence, for commands and logs. Pages have their own words.
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Failure::Refused(refusal) => f.write_str(&refusal.sentence),
            Failure::OwnWork(own) => f.write_str(&own.sentence),
            Failure::Stale(stale) => write!(f, "{} was changed by {}.", stale.what, stale.changed_by),
            Failure::Denied(act) => write!(f, "This act needs one of these roles: {}.", act.who_may()),
            Failure::Missing(what) => write!(f, "There is no {what}."),
            Failure::Repeated => f.write_str("This was already recorded."),
            Failure::RepeatedOtherwise => f.write_str("This form was already sent with other content."),
            Failure::BadRequest(what) => f.write_str(what),
            Failure::NoSession => f.write_str("Nobody is signed in."),
            Failure::Held(why) => f.write_str(why),
            Failure::Fault(fault) => write!(f, "{}", fault.0),
        }
    }
}

impl std::error::Error for Failure {}
