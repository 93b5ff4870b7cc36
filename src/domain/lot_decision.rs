//! Release or rejection of a lot: a decision of the authorised person, by signature.

use chrono::NaiveDate;

use super::refusal::NamedReason;
use super::review::{SampleFacts, SampleState};
use super::version::VersionState;

/// The two decisions.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Decision {
    Released,
    Rejected,
}

impl Decision {
    /// As stored in `lot_decision.decision`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Decision::Released => "released",
            Decision::Rejected => "rejected",
        }
    }

    pub fn from_words(words: &str) -> Option<Decision> {
        [Decision::Released, Decision::Rejected].into_iter().find(|one| one.words() == words)
    }
}

/// Everything a release rests on.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DecisionFacts {
    pub lot_number: String,
    pub is_imported: bool,
    pub formulation_state: VersionState,
    /// The newest decision on the lot.
    pub decided: Option<Decision>,
    /// The samples received for release.
    pub release: Vec<SampleFacts>,
    /// Tests with a release limit in the specification in force that no release sample has a result of.
    pub tests_missing: Vec<String>,
    /// Latest release results that do not conform: "Assay 107.9 %, out of specification".
    pub not_conforming: Vec<String>,
    /// Numbers of investigations over results of the lot that have no conclusion.
    pub open_investigations: Vec<i64>,
    /// Numbers of deviations of the lot, or of its bulk lot, that are not closed.
    pub open_deviations: Vec<i64>,
    /// The items of 21 CFR 211.188 (b) that are missing.
    pub missing_items: Vec<String>,
    /// The last day of use by the assigned shelf life; `None` where none is assigned for the day it was made.
    pub expires_on: Option<NaiveDate>,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum DecisionRefusal {
    #[error("{0} was imported, not made here. Nothing is decided on it.")]
    LotImported(String),
    #[error("Its formulation version is {0}. A lot is released only to an approved version.")]
    FormulationNotApproved(&'static str),
    #[error("{0} is {1} already.")]
    DecidedAlready(String, &'static str),
    #[error("{0} was rejected. A rejected lot is not released.")]
    LotRejected(String),
    #[error("No sample of {0} was received for release. Receive one and have it tested.")]
    NoReleaseSample(String),
    #[error("No release result yet for: {0}.")]
    ReleaseTestsMissing(String),
    #[error("These release samples are not complete and checked yet: {0}.")]
    ReleaseNotComplete(String),
    #[error("These release samples are not reviewed and signed as they are now: {0}.")]
    ReleaseNotReviewed(String),
    #[error("These release results do not conform: {0}.")]
    ReleaseNotConforming(String),
    #[error("These investigations are open: {0}. Conclude them first.")]
    InvestigationOpen(String),
    #[error("These deviations are open: {0}. QA closes them first.")]
    DeviationOpen(String),
    #[error("The record of {lot} lacks: {items}. Its page of completeness says how to mend it.")]
    RecordIncomplete { lot: String, items: String },
    #[error("Look through the corrections and the history of the lot, then tick that you did.")]
    TrailNotReviewed,
    #[error("Something was recorded on {0} since this page was shown. Look at it again, then decide.")]
    ChangedSinceShown(String),
    #[error(
        "No shelf life is assigned for a lot of this presentation made on that day, so there is no expiry. \
         QA assigns one on the page of the presentation."
    )]
    ShelfLifeMissing,
    #[error("Say why in at least {SHORTEST_REASON} characters; it stands beside the signature.")]
    ReasonTooShort,
}

impl NamedReason for DecisionRefusal {
    fn field(&self) -> Option<String> {
        match self {
            DecisionRefusal::ReasonTooShort => Some("reason".to_string()),
            DecisionRefusal::TrailNotReviewed => Some("is_reviewed".to_string()),
            _ => None,
        }
    }
}

/// The shortest reason for a rejection.
pub const SHORTEST_REASON: usize = 20;

/// Whether the lot may be released. Refuses in this order: imported, formulation not approved, released already,
/// rejected, no release sample, tests missing, not complete, not reviewed, not conforming, open investigation,
/// open deviation, record incomplete, no shelf life.
pub fn may_release(facts: &DecisionFacts) -> Result<(), DecisionRefusal> {
    let lot = || facts.lot_number.clone();
    if facts.is_imported {
        return Err(DecisionRefusal::LotImported(lot()));
    }
    if facts.formulation_state != VersionState::Approved {
        return Err(DecisionRefusal::FormulationNotApproved(facts.formulation_state.words()));
    }
    match facts.decided {
        Some(Decision::Released) => return Err(DecisionRefusal::DecidedAlready(lot(), "released")),
        Some(Decision::Rejected) => return Err(DecisionRefusal::LotRejected(lot())),
        None => {}
    }
    results_stand(facts)?;
    if !facts.not_conforming.is_empty() {
        return Err(DecisionRefusal::ReleaseNotConforming(facts.not_conforming.join("; ")));
    }
    if !facts.open_investigations.is_empty() {
        let numbers: Vec<String> = facts.open_investigations.iter().map(i64::to_string).collect();
        return Err(DecisionRefusal::InvestigationOpen(numbers.join(", ")));
    }
    if !facts.open_deviations.is_empty() {
        let numbers: Vec<String> = facts.open_deviations.iter().map(i64::to_string).collect();
        return Err(DecisionRefusal::DeviationOpen(numbers.join(", ")));
    }
    if !facts.missing_items.is_empty() {
        return Err(DecisionRefusal::RecordIncomplete { lot: lot(), items: facts.missing_items.join("; ") });
    }
    facts.expires_on.map(|_| ()).ok_or(DecisionRefusal::ShelfLifeMissing)
}

/// Whether the release results are all in, checked, reviewed and signed: what a release and a certificate rest on.
///
/// Refuses in this order: no release sample, tests missing, not complete, not reviewed.
pub fn results_stand(facts: &DecisionFacts) -> Result<(), DecisionRefusal> {
    if facts.release.is_empty() {
        return Err(DecisionRefusal::NoReleaseSample(facts.lot_number.clone()));
    }
    if !facts.tests_missing.is_empty() {
        return Err(DecisionRefusal::ReleaseTestsMissing(facts.tests_missing.join(", ")));
    }
    if let Some(numbers) = samples_in(facts, &[SampleState::InWork, SampleState::WaitingForCheck]) {
        return Err(DecisionRefusal::ReleaseNotComplete(numbers));
    }
    match unsigned(facts) {
        Some(numbers) => Err(DecisionRefusal::ReleaseNotReviewed(numbers)),
        None => Ok(()),
    }
}

fn samples_in(facts: &DecisionFacts, states: &[SampleState]) -> Option<String> {
    let found: Vec<&str> = facts
        .release
        .iter()
        .filter(|sample| states.contains(&sample.state()))
        .map(|sample| sample.number.as_str())
        .collect();
    (!found.is_empty()).then(|| found.join(", "))
}

fn unsigned(facts: &DecisionFacts) -> Option<String> {
    let open = [SampleState::WaitingForReview, SampleState::ChangedAfterSigning, SampleState::Imported];
    samples_in(facts, &open)
}

/// What the person who releases has looked at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Looked {
    /// The newest entry of the lot's history when the page was shown.
    pub up_to_act: i64,
    /// Ticked: corrections and history were looked through (req_I6).
    pub is_reviewed: bool,
}

/// Whether what was looked at is what stands now. Refuses in this order: not ticked, changed since.
pub fn has_looked(looked: Looked, newest_act: i64, lot: &str) -> Result<(), DecisionRefusal> {
    if !looked.is_reviewed {
        return Err(DecisionRefusal::TrailNotReviewed);
    }
    if looked.up_to_act != newest_act {
        return Err(DecisionRefusal::ChangedSinceShown(lot.to_string()));
    }
    Ok(())
}

/// Whether the lot may be rejected. Refuses in this order: imported, rejected already, the reason.
pub fn may_reject(facts: &DecisionFacts, reason: &str) -> Result<(), DecisionRefusal> {
    if facts.is_imported {
        return Err(DecisionRefusal::LotImported(facts.lot_number.clone()));
    }
    if facts.decided == Some(Decision::Rejected) {
        return Err(DecisionRefusal::DecidedAlready(facts.lot_number.clone(), "rejected"));
    }
    if reason.trim().chars().count() < SHORTEST_REASON {
        return Err(DecisionRefusal::ReasonTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::check::TestFacts;

    fn signed() -> SampleFacts {
        let test = TestFacts { title: "Assay".to_string(), version: Some(1), ..TestFacts::default() };
        SampleFacts { number: "R1".to_string(), is_signed: true, tests: vec![test], ..SampleFacts::default() }
    }

    fn good() -> DecisionFacts {
        DecisionFacts {
            lot_number: "TW-104".to_string(),
            is_imported: false,
            formulation_state: VersionState::Approved,
            decided: None,
            release: vec![signed()],
            tests_missing: Vec::new(),
            not_conforming: Vec::new(),
            open_investigations: Vec::new(),
            open_deviations: Vec::new(),
            missing_items: Vec::new(),
            expires_on: NaiveDate::from_ymd_opt(2028, 12, 31),
        }
    }

    #[test]
    fn a_release_is_refused_in_the_documented_order() {
        let lot = || "TW-104".to_string();
        let open = SampleFacts { tests: vec![TestFacts::default()], ..signed() };
        let unsigned = SampleFacts { is_signed: false, ..signed() };
        let changed = SampleFacts { is_changed_after_signing: true, ..signed() };
        let number = || "R1".to_string();
        let table = [
            (DecisionFacts { is_imported: true, ..good() }, Err(DecisionRefusal::LotImported(lot()))),
            (
                DecisionFacts { formulation_state: VersionState::Draft, ..good() },
                Err(DecisionRefusal::FormulationNotApproved("draft")),
            ),
            (
                DecisionFacts { decided: Some(Decision::Released), ..good() },
                Err(DecisionRefusal::DecidedAlready(lot(), "released")),
            ),
            (
                DecisionFacts { decided: Some(Decision::Rejected), ..good() },
                Err(DecisionRefusal::LotRejected(lot())),
            ),
            (DecisionFacts { release: Vec::new(), ..good() }, Err(DecisionRefusal::NoReleaseSample(lot()))),
            (
                DecisionFacts { tests_missing: vec!["pH".to_string()], ..good() },
                Err(DecisionRefusal::ReleaseTestsMissing("pH".to_string())),
            ),
            (
                DecisionFacts { release: vec![open], ..good() },
                Err(DecisionRefusal::ReleaseNotComplete(number())),
            ),
            (
                DecisionFacts { release: vec![unsigned], ..good() },
                Err(DecisionRefusal::ReleaseNotReviewed(number())),
            ),
            (
                DecisionFacts { release: vec![changed], ..good() },
                Err(DecisionRefusal::ReleaseNotReviewed(number())),
            ),
            (
                DecisionFacts { not_conforming: vec!["Assay 107.9 %".to_string()], ..good() },
                Err(DecisionRefusal::ReleaseNotConforming("Assay 107.9 %".to_string())),
            ),
            (
                DecisionFacts { open_investigations: vec![3, 7], ..good() },
                Err(DecisionRefusal::InvestigationOpen("3, 7".to_string())),
            ),
            (
                DecisionFacts { open_deviations: vec![2], missing_items: vec!["x".into()], ..good() },
                Err(DecisionRefusal::DeviationOpen("2".to_string())),
            ),
            (
                DecisionFacts { missing_items: vec!["(1) dates".into()], expires_on: None, ..good() },
                Err(DecisionRefusal::RecordIncomplete { lot: lot(), items: "(1) dates".to_string() }),
            ),
            (DecisionFacts { expires_on: None, ..good() }, Err(DecisionRefusal::ShelfLifeMissing)),
            (good(), Ok(())),
        ];
        for (facts, expected) in table {
            assert_eq!(may_release(&facts), expected, "{facts:?}");
        }
    }

    #[test]
    fn a_release_is_signed_over_what_was_looked_at() {
        let looked = |up_to_act, is_reviewed| Looked { up_to_act, is_reviewed };
        assert_eq!(has_looked(looked(7, true), 7, "TW-104"), Ok(()));
        assert_eq!(has_looked(looked(6, false), 7, "TW-104"), Err(DecisionRefusal::TrailNotReviewed));
        let changed = DecisionRefusal::ChangedSinceShown("TW-104".to_string());
        assert_eq!(has_looked(looked(6, true), 7, "TW-104"), Err(changed));
    }

    #[test]
    fn a_rejection_needs_a_reason_and_may_follow_a_release() {
        let why = "the bottles leak at the cap seal";
        let table = [
            (DecisionFacts { is_imported: true, ..good() }, why, false),
            (DecisionFacts { decided: Some(Decision::Rejected), ..good() }, why, false),
            (good(), "leaks", false),
            (good(), why, true),
            (DecisionFacts { decided: Some(Decision::Released), ..good() }, why, true),
            (DecisionFacts { release: Vec::new(), ..good() }, why, true),
        ];
        for (facts, reason, expected) in table {
            assert_eq!(may_reject(&facts, reason).is_ok(), expected, "{facts:?}");
        }
    }
}
