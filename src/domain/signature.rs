//! What a signature means, and who may not give it.

use super::refusal::NamedReason;

/// The meanings a signature can have; each has its own printed words (11.50).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Meaning {
    Authorship,
    Approval,
    Review,
    Release,
    Rejection,
    Override,
    Conclusion,
    MaterialStatus,
    Continuation,
    Closure,
    Certification,
}

impl Meaning {
    pub const ALL: [Meaning; 11] = [
        Meaning::Authorship,
        Meaning::Approval,
        Meaning::Review,
        Meaning::Release,
        Meaning::Rejection,
        Meaning::Override,
        Meaning::Conclusion,
        Meaning::MaterialStatus,
        Meaning::Continuation,
        Meaning::Closure,
        Meaning::Certification,
    ];

    pub fn code(self) -> &'static str {
        match self {
            Meaning::Authorship => "authorship",
            Meaning::Approval => "approval",
            Meaning::Review => "review",
            Meaning::Release => "release",
            Meaning::Rejection => "rejection",
            Meaning::Override => "override",
            Meaning::Conclusion => "conclusion",
            Meaning::MaterialStatus => "material status",
            Meaning::Continuation => "continuation",
            Meaning::Closure => "closure",
            Meaning::Certification => "certification",
        }
    }

    /// What the signer states, as printed beside the name.
    pub fn words(self) -> &'static str {
        match self {
            Meaning::Authorship => "Written by me and complete",
            Meaning::Approval => "Approved for use",
            Meaning::Review => "Reviewed, agrees with the raw readings",
            Meaning::Release => "Released by me as the authorised person",
            Meaning::Rejection => "Rejected by me as the authorised person",
            Meaning::Override => "Stop lifted by me, for the stated reason",
            Meaning::Conclusion => "Concluded by me from the recorded findings",
            Meaning::MaterialStatus => "Status of this material lot set by me, for the stated reason",
            Meaning::Continuation => "Work goes on under this deviation by my decision",
            Meaning::Closure => "Assessed and closed by me",
            Meaning::Certification => "Certified by me from the reviewed results",
        }
    }

    pub fn from_code(code: &str) -> Option<Meaning> {
        Meaning::ALL.into_iter().find(|meaning| meaning.code() == code)
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum SignatureRefusal {
    #[error("The user name or the password is not right, or signing is waiting after failed tries.")]
    NotAuthenticated,
    #[error("Sign with your own user name, {0}: you are signed in as that person.")]
    NotOwnName(String),
    #[error("This record was signed with this meaning already.")]
    AlreadySigned,
    #[error("The author cannot approve. A second person with the role can.")]
    ApproverIsAuthor(Vec<i64>),
    #[error("It has changed since you looked at it. Look at it again, then sign.")]
    ChangedSinceSeen,
    #[error("The author signs first; then a second person approves.")]
    NotSignedByAuthor,
}

impl NamedReason for SignatureRefusal {
    fn field(&self) -> Option<String> {
        match self {
            SignatureRefusal::NotAuthenticated => Some("password".to_string()),
            SignatureRefusal::NotOwnName(_) => Some("user_name".to_string()),
            _ => None,
        }
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            SignatureRefusal::ApproverIsAuthor(authors) => Some(authors.clone()),
            _ => None,
        }
    }
}
