//! What people decide about the history: versions that count as alike, results that are left out.

use crate::domain::refusal::NamedReason;

/// What is declared alike.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AlikeKind {
    FormulationVersion,
    MethodVersion,
}

impl AlikeKind {
    pub const ALL: [AlikeKind; 2] = [AlikeKind::FormulationVersion, AlikeKind::MethodVersion];

    /// As stored and as shown.
    pub fn words(self) -> &'static str {
        match self {
            AlikeKind::FormulationVersion => "formulation version",
            AlikeKind::MethodVersion => "method version",
        }
    }

    pub fn from_words(words: &str) -> Option<AlikeKind> {
        AlikeKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// Two versions to be declared alike, or no longer so.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewEquivalence {
    pub kind: AlikeKind,
    pub one: i64,
    pub other: i64,
    /// False withdraws an earlier declaration.
    pub is_declared: bool,
    pub why: String,
}

impl NewEquivalence {
    /// The pair in the order in which it is stored.
    pub fn pair(&self) -> (i64, i64) {
        (self.one.min(self.other), self.one.max(self.other))
    }

    pub fn state(&self) -> &'static str {
        if self.is_declared { "declared" } else { "withdrawn" }
    }

    /// The text that is signed.
    pub fn canonical(&self) -> String {
        let (one, other) = self.pair();
        serde_json::json!({
            "kind": self.kind.words(),
            "one": one,
            "other": other,
            "state": self.state(),
            "why": self.why,
        })
        .to_string()
    }
}

/// Two versions as the rule sees them.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct PairFacts {
    /// Formulation versions: both of one product; method versions: both of one test kind and unit.
    pub is_comparable: bool,
    pub are_approved: bool,
    pub is_declared_now: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum EquivalenceRefusal {
    #[error("Choose two different versions: a version is always its own history.")]
    SameVersion,
    #[error(
        "These versions cannot be one history: formulation versions have to be of one product, method versions of \
         one kind and unit."
    )]
    NotComparable,
    #[error("Both versions have to be approved before their results count as one history.")]
    NotApproved,
    #[error("These versions are declared alike already.")]
    DeclaredAlready,
    #[error("These versions are not declared alike, so there is nothing to withdraw.")]
    NotDeclared,
    #[error("Say in at least {SHORTEST_WHY} characters why.")]
    WhyTooShort,
}

impl NamedReason for EquivalenceRefusal {
    fn field(&self) -> Option<String> {
        match self {
            EquivalenceRefusal::SameVersion => Some("other".to_string()),
            EquivalenceRefusal::WhyTooShort => Some("why".to_string()),
            _ => None,
        }
    }
}

/// The shortest reason for a decision about the history.
pub const SHORTEST_WHY: usize = 20;

/// Refuses in this order: the same version, not comparable, not approved, declared already or not declared, too
/// short a reason.
pub fn may_declare(new: &NewEquivalence, facts: &PairFacts) -> Result<(), EquivalenceRefusal> {
    if new.one == new.other {
        return Err(EquivalenceRefusal::SameVersion);
    }
    if !facts.is_comparable {
        return Err(EquivalenceRefusal::NotComparable);
    }
    if !facts.are_approved {
        return Err(EquivalenceRefusal::NotApproved);
    }
    match (new.is_declared, facts.is_declared_now) {
        (true, true) => return Err(EquivalenceRefusal::DeclaredAlready),
        (false, false) => return Err(EquivalenceRefusal::NotDeclared),
        _ => {}
    }
    if new.why.trim().chars().count() < SHORTEST_WHY {
        return Err(EquivalenceRefusal::WhyTooShort);
    }
    Ok(())
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ExclusionRefusal {
    #[error("This test has no result yet, so there is nothing to leave out.")]
    NoResult,
    #[error("Imported results are in no history, so there is nothing to leave out.")]
    Imported,
    #[error("This result is left out already.")]
    LeftOutAlready,
    #[error("This result is in the history, so there is nothing to take back.")]
    NotLeftOut,
    #[error("Say in at least {SHORTEST_WHY} characters why.")]
    ReasonTooShort,
}

impl NamedReason for ExclusionRefusal {
    fn field(&self) -> Option<String> {
        matches!(self, ExclusionRefusal::ReasonTooShort).then(|| "why".to_string())
    }
}

/// A result as the rule sees it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct ExclusionFacts {
    pub has_result: bool,
    pub is_imported: bool,
    pub is_left_out: bool,
}

/// Whether a result may be left out of histories, or taken back. Refuses in this order: no result, imported,
/// nothing to change, too short a reason.
pub fn may_leave_out(facts: &ExclusionFacts, leaves_out: bool, why: &str) -> Result<(), ExclusionRefusal> {
    if !facts.has_result {
        return Err(ExclusionRefusal::NoResult);
    }
    if facts.is_imported {
        return Err(ExclusionRefusal::Imported);
    }
    match (leaves_out, facts.is_left_out) {
        (true, true) => return Err(ExclusionRefusal::LeftOutAlready),
        (false, false) => return Err(ExclusionRefusal::NotLeftOut),
        _ => {}
    }
    if why.trim().chars().count() < SHORTEST_WHY {
        return Err(ExclusionRefusal::ReasonTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_pair_is_declared_once_with_a_reason() {
        let new = NewEquivalence {
            kind: AlikeKind::FormulationVersion,
            one: 4,
            other: 2,
            is_declared: true,
            why: "only the supplier of the bottle changed".to_string(),
        };
        let good = PairFacts { is_comparable: true, are_approved: true, is_declared_now: false };
        let short = NewEquivalence { why: "alike".to_string(), ..new.clone() };
        let same = NewEquivalence { other: 4, ..new.clone() };
        let back = NewEquivalence { is_declared: false, ..new.clone() };
        let table = [
            (&same, PairFacts::default(), Err(EquivalenceRefusal::SameVersion)),
            (&short, PairFacts::default(), Err(EquivalenceRefusal::NotComparable)),
            (&short, PairFacts { is_comparable: true, ..good }, Err(EquivalenceRefusal::WhyTooShort)),
            (&new, PairFacts { are_approved: false, ..good }, Err(EquivalenceRefusal::NotApproved)),
            (&new, PairFacts { is_declared_now: true, ..good }, Err(EquivalenceRefusal::DeclaredAlready)),
            (&back, good, Err(EquivalenceRefusal::NotDeclared)),
            (&back, PairFacts { is_declared_now: true, ..good }, Ok(())),
            (&new, good, Ok(())),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_declare(new, &facts), expected);
        }
        assert_eq!(new.pair(), (2, 4));
    }

    #[test]
    fn a_result_is_left_out_once_with_a_reason_and_can_be_taken_back() {
        let there = ExclusionFacts { has_result: true, ..ExclusionFacts::default() };
        let out = ExclusionFacts { is_left_out: true, ..there };
        let why = "the bottle had been opened before";
        let table = [
            (ExclusionFacts::default(), true, why, Err(ExclusionRefusal::NoResult)),
            (ExclusionFacts { is_imported: true, ..there }, true, why, Err(ExclusionRefusal::Imported)),
            (out, true, why, Err(ExclusionRefusal::LeftOutAlready)),
            (there, false, why, Err(ExclusionRefusal::NotLeftOut)),
            (there, true, "odd", Err(ExclusionRefusal::ReasonTooShort)),
            (there, true, why, Ok(())),
            (out, false, why, Ok(())),
        ];
        for (facts, leaves_out, why, expected) in table {
            assert_eq!(may_leave_out(&facts, leaves_out, why), expected);
        }
    }
}
