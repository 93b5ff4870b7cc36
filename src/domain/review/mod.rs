//! The review of a sample by QA: where it stands, in which part of the queue, who may agree and who may sign.

pub mod checked;
pub mod exception;

use super::check::{TestFacts, TestState, state};
use super::refusal::NamedReason;
use exception::Exception;

/// Everything that decides about a sample's review.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SampleFacts {
    pub sample: i64,
    pub number: String,
    pub is_imported: bool,
    /// A review signature stands under it.
    pub is_signed: bool,
    /// Something was recorded after that signature.
    pub is_changed_after_signing: bool,
    pub tests: Vec<TestFacts>,
    /// Accounts that checked a test of it.
    pub checkers: Vec<i64>,
    pub exceptions: Vec<Exception>,
}

/// Where a sample stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SampleState {
    /// Some test has no result, or was sent back.
    InWork,
    WaitingForCheck,
    WaitingForReview,
    Signed,
    /// Signed, then changed: it needs a new review and a new signature.
    ChangedAfterSigning,
    Imported,
}

/// The three parts of the queue, in reading order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Part {
    WithExceptions,
    WithoutExceptions,
    WaitingForOthers,
}

impl SampleFacts {
    pub fn state(&self) -> SampleState {
        let has = |wanted: TestState| self.tests.iter().any(|test| state(test) == wanted);
        if self.is_imported {
            SampleState::Imported
        } else if self.tests.is_empty() || has(TestState::Open) || has(TestState::SentBack) {
            SampleState::InWork
        } else if has(TestState::WaitingForCheck) {
            SampleState::WaitingForCheck
        } else if self.is_signed && self.is_changed_after_signing {
            SampleState::ChangedAfterSigning
        } else if self.is_signed {
            SampleState::Signed
        } else {
            SampleState::WaitingForReview
        }
    }

    /// The part of the queue it stands in; `None` where there is nothing to review.
    ///
    /// An exception always leads to the first part, also while tests are still out: it reaches QA the same day.
    pub fn part(&self) -> Option<Part> {
        match self.state() {
            SampleState::Signed | SampleState::Imported => None,
            _ if !self.exceptions.is_empty() => Some(Part::WithExceptions),
            SampleState::WaitingForReview | SampleState::ChangedAfterSigning => Some(Part::WithoutExceptions),
            SampleState::InWork | SampleState::WaitingForCheck => Some(Part::WaitingForOthers),
        }
    }

    /// Whether the person took part in the work: read, corrected, completed or checked.
    pub fn is_own_work_of(&self, account: i64) -> bool {
        self.took_part().contains(&account)
    }

    /// The accounts that read, corrected, completed or checked something of it, each once.
    fn took_part(&self) -> Vec<i64> {
        let performers = self.tests.iter().flat_map(|test| &test.performers);
        let mut accounts: Vec<i64> = performers.chain(&self.checkers).copied().collect();
        accounts.sort_unstable();
        accounts.dedup();
        accounts
    }

    fn titles(&self, wanted: &[TestState]) -> Option<String> {
        let found: Vec<&str> = self
            .tests
            .iter()
            .filter(|test| wanted.contains(&state(test)))
            .map(|test| test.title.as_str())
            .collect();
        (!found.is_empty()).then(|| found.join(", "))
    }

    fn unanswered(&self) -> Option<String> {
        let open = |exception: &&Exception| exception.answer.is_none();
        let found: Vec<&str> = self.exceptions.iter().filter(open).map(|one| one.sentence.as_str()).collect();
        (!found.is_empty()).then(|| found.join(" "))
    }
}

/// At most so many samples are signed in one act (screen_U74).
pub const MOST_SIGNED: usize = 20;
/// The shortest sentence with which a sample with exceptions is signed (screen_U75).
pub const SHORTEST_STATEMENT: usize = 20;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ReviewRefusal {
    #[error("You have not opened this sample as it is now. Open it, look at it, then decide.")]
    NotOpened,
    #[error("It has changed since you looked at it. Look at it again, then decide.")]
    ChangedSinceLooked,
    #[error("{0} was imported, not observed here. It can be read, but never signed.")]
    ImportedNotSigned(String),
    #[error("These tests are not in yet, or were sent back: {0}.")]
    TestsNotIn(String),
    #[error("These tests wait for the check by a second person: {0}.")]
    TestsNotChecked(String),
    #[error("You read or checked something of {} yourself. Another QA reviewer takes it.", .number)]
    OwnWork { number: String, took_part: Vec<i64> },
    #[error("{0} is signed already, and nothing has changed since.")]
    SignedAlready(String),
    #[error("Answer these first: {0}")]
    ExceptionsUnanswered(String),
    #[error("The signing list is empty. Agree to a sample first.")]
    NothingToSign,
    #[error("At most {MOST_SIGNED} samples are signed at once. Leave some for the next time.")]
    TooManyAtOnce,
    #[error("{0} has exceptions: it is signed alone, with a sentence on why it is acceptable.")]
    ExceptionsSignedAlone(String),
    #[error(
        "Say in at least {SHORTEST_STATEMENT} characters why the sample with its exceptions is acceptable."
    )]
    StatementTooShort,
    #[error(
        "Everything on the list has changed since you looked. Nothing was signed; open the samples again."
    )]
    AllChanged,
    #[error("Tick at least one test to send back.")]
    NoTestNamed,
    #[error("Say in at least {} characters why; the analyst reads it.", super::check::SHORTEST_WHY)]
    WhyTooShort,
}

impl NamedReason for ReviewRefusal {
    fn field(&self) -> Option<String> {
        match self {
            ReviewRefusal::StatementTooShort => Some("statement".to_string()),
            ReviewRefusal::WhyTooShort => Some("why".to_string()),
            _ => None,
        }
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            ReviewRefusal::OwnWork { took_part, .. } => Some(took_part.clone()),
            _ => None,
        }
    }
}

/// Whether the reviewer may agree to the sample. That it was opened, and is unchanged, is asked before.
///
/// Refuses in this order: imported, tests not in, not checked, own work, signed already, exceptions unanswered.
pub fn may_agree(facts: &SampleFacts, reviewer: i64) -> Result<(), ReviewRefusal> {
    let number = || facts.number.clone();
    if facts.is_imported {
        return Err(ReviewRefusal::ImportedNotSigned(number()));
    }
    if facts.tests.is_empty() {
        return Err(ReviewRefusal::TestsNotIn("none has been asked for".to_string()));
    }
    if let Some(titles) = facts.titles(&[TestState::Open, TestState::SentBack]) {
        return Err(ReviewRefusal::TestsNotIn(titles));
    }
    if let Some(titles) = facts.titles(&[TestState::WaitingForCheck]) {
        return Err(ReviewRefusal::TestsNotChecked(titles));
    }
    not_own_work(facts, reviewer)?;
    if facts.state() == SampleState::Signed {
        return Err(ReviewRefusal::SignedAlready(number()));
    }
    facts.unanswered().map_or(Ok(()), |open| Err(ReviewRefusal::ExceptionsUnanswered(open)))
}

/// Whether the person stayed out of the work: only such a person answers, agrees and signs.
pub fn not_own_work(facts: &SampleFacts, reviewer: i64) -> Result<(), ReviewRefusal> {
    let took_part = facts.took_part();
    if took_part.contains(&reviewer) {
        return Err(ReviewRefusal::OwnWork { number: facts.number.clone(), took_part });
    }
    Ok(())
}

/// Whether the list may be signed as a whole. What changed since the reviewer looked has dropped out before.
///
/// Refuses in this order: nothing, too many, mixed with exceptions, the sentence, then each as [`may_agree`].
pub fn may_sign(list: &[SampleFacts], reviewer: i64, statement: &str) -> Result<(), ReviewRefusal> {
    if list.is_empty() {
        return Err(ReviewRefusal::NothingToSign);
    }
    if list.len() > MOST_SIGNED {
        return Err(ReviewRefusal::TooManyAtOnce);
    }
    if let Some(facts) = list.iter().find(|facts| !facts.exceptions.is_empty()) {
        if list.len() > 1 {
            return Err(ReviewRefusal::ExceptionsSignedAlone(facts.number.clone()));
        }
        if statement.trim().chars().count() < SHORTEST_STATEMENT {
            return Err(ReviewRefusal::StatementTooShort);
        }
    }
    list.iter().try_for_each(|facts| may_agree(facts, reviewer))
}

/// Whether tests may be sent back. Refuses in this order: imported, nothing named, a named test without a result,
/// the reason.
pub fn may_send_back(facts: &SampleFacts, named: &[i64], why: &str) -> Result<(), ReviewRefusal> {
    if facts.is_imported {
        return Err(ReviewRefusal::ImportedNotSigned(facts.number.clone()));
    }
    if named.is_empty() {
        return Err(ReviewRefusal::NoTestNamed);
    }
    let is_in = |id: &i64| facts.tests.iter().any(|test| test.sample_test == *id && test.version.is_some());
    if !named.iter().all(is_in) {
        return Err(ReviewRefusal::TestsNotIn("a test named here".to_string()));
    }
    if why.trim().chars().count() < super::check::SHORTEST_WHY {
        return Err(ReviewRefusal::WhyTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests;
