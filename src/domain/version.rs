//! Versions of definitions: a draft is written, its author signs, a second person approves, and it is frozen.

use super::act::Act;
use super::refusal::NamedReason;
use super::signature::SignatureRefusal;
use super::subject::Kind;

/// The kinds of definition that come in versions.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Versioned {
    Formulation,
    Method,
    Specification,
    Protocol,
}

impl Versioned {
    pub fn kind(self) -> Kind {
        match self {
            Versioned::Formulation => Kind::FormulationVersion,
            Versioned::Method => Kind::MethodVersion,
            Versioned::Specification => Kind::SpecificationVersion,
            Versioned::Protocol => Kind::ProtocolVersion,
        }
    }

    /// The act of writing a version; its author signs by the same act, except a formulation's.
    pub fn draft_act(self) -> Act {
        match self {
            Versioned::Formulation => Act::DraftFormulationVersion,
            Versioned::Method => Act::DraftMethodVersion,
            Versioned::Specification => Act::DraftSpecificationVersion,
            Versioned::Protocol => Act::DraftProtocolVersion,
        }
    }

    /// The act of approving a version, and of signing a formulation version as its author.
    pub fn sign_act(self) -> Act {
        match self {
            Versioned::Formulation => Act::SignFormulationVersion,
            Versioned::Method => Act::ApproveMethodVersion,
            Versioned::Specification => Act::ApproveSpecificationVersion,
            Versioned::Protocol => Act::ApproveProtocolVersion,
        }
    }

    /// The definition the versions belong to.
    pub fn parent(self) -> Kind {
        match self {
            Versioned::Formulation => Kind::Formulation,
            Versioned::Method => Kind::Method,
            Versioned::Specification => Kind::Specification,
            Versioned::Protocol => Kind::Protocol,
        }
    }
}

/// Where a version stands; a query over its signatures, never a column.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum VersionState {
    Draft,
    SignedByAuthor,
    Approved,
    /// Came with an imported file: readable, never approved (decision B17).
    Imported,
}

impl VersionState {
    pub fn words(self) -> &'static str {
        match self {
            VersionState::Draft => "draft",
            VersionState::SignedByAuthor => "waiting for approval",
            VersionState::Approved => "approved",
            VersionState::Imported => "imported, not approved here",
        }
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum VersionRefusal {
    #[error("This version is signed and frozen. Write a new version to change anything.")]
    VersionFrozen,
    #[error("There is a draft already, version {0}. Finish or change that one.")]
    DraftOpen(i64),
    #[error("This version is not approved, so nothing can rest on it yet.")]
    VersionNotApproved,
    #[error("This version was imported, not approved here. Nothing that is signed can rest on it.")]
    VersionImported,
}

impl NamedReason for VersionRefusal {}

/// An author may sign only a draft.
pub fn may_sign(state: VersionState) -> Result<(), SignatureRefusal> {
    match state {
        VersionState::Draft => Ok(()),
        _ => Err(SignatureRefusal::AlreadySigned),
    }
}

/// Refuses in this order: no author's signature, approved already, the author approves.
pub fn may_approve(state: VersionState, approver: i64, authors: &[i64]) -> Result<(), SignatureRefusal> {
    match state {
        VersionState::Draft | VersionState::Imported => Err(SignatureRefusal::NotSignedByAuthor),
        VersionState::Approved => Err(SignatureRefusal::AlreadySigned),
        VersionState::SignedByAuthor if authors.contains(&approver) => {
            Err(SignatureRefusal::ApproverIsAuthor)
        }
        VersionState::SignedByAuthor => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn approval_needs_the_author_first_and_a_second_person() {
        let table = [
            (VersionState::Draft, 2, Err(SignatureRefusal::NotSignedByAuthor)),
            (VersionState::Approved, 2, Err(SignatureRefusal::AlreadySigned)),
            (VersionState::SignedByAuthor, 1, Err(SignatureRefusal::ApproverIsAuthor)),
            (VersionState::SignedByAuthor, 2, Ok(())),
            (VersionState::Imported, 2, Err(SignatureRefusal::NotSignedByAuthor)),
        ];
        for (state, approver, expected) in table {
            assert_eq!(may_approve(state, approver, &[1]), expected, "{state:?} by {approver}");
        }
    }
}
