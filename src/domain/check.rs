//! The laboratory check of a completed test by a second qualified person, before QA looks (decision A8).

use super::refusal::NamedReason;

/// Where one test of a sample stands on its way to review.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TestState {
    /// No result yet.
    Open,
    SentBack,
    WaitingForCheck,
    /// In, and checked where its method asks for a check.
    Ready,
}

/// What decides the state of a test.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct TestFacts {
    pub sample_test: i64,
    pub title: String,
    /// The latest version of its result.
    pub version: Option<i64>,
    /// What was last said of that version: `Some(true)` checked, `Some(false)` sent back.
    pub is_checked: Option<bool>,
    pub needs_check: bool,
    /// Accounts that recorded or corrected a reading, or completed the test.
    pub performers: Vec<i64>,
}

/// The state of a test; only what was said of the latest version counts.
pub fn state(facts: &TestFacts) -> TestState {
    match (facts.version, facts.is_checked) {
        (None, _) => TestState::Open,
        (Some(_), Some(false)) => TestState::SentBack,
        (Some(_), Some(true)) => TestState::Ready,
        (Some(_), None) if facts.needs_check => TestState::WaitingForCheck,
        (Some(_), None) => TestState::Ready,
    }
}

/// The shortest reason for sending a test back.
pub const SHORTEST_WHY: usize = 10;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum CheckRefusal {
    #[error("{0} is not complete yet, so there is nothing to check.")]
    TestOpen(String),
    #[error("{0} was sent back and waits for the analyst.")]
    TestSentBack(String),
    #[error("{0} is not waiting for a check.")]
    NotWaitingForCheck(String),
    #[error("You read or completed {title} yourself. A second qualified person checks it.")]
    OwnReadings { title: String, performers: Vec<i64> },
    #[error("{0} was completed anew since you opened this page. Look at it again, then decide.")]
    ResultChanged(String),
    #[error("Say in at least {SHORTEST_WHY} characters what to look at again; the analyst reads it.")]
    WhyTooShort,
}

impl NamedReason for CheckRefusal {
    fn field(&self) -> Option<String> {
        matches!(self, CheckRefusal::WhyTooShort).then(|| "why".to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            CheckRefusal::OwnReadings { performers, .. } => Some(performers.clone()),
            _ => None,
        }
    }
}

/// Whether this person may check this version. Refuses in this order: not complete, sent back, not waiting, own
/// readings, another version than the one looked at. Being qualified is asked of the register after that.
pub fn may_check(facts: &TestFacts, checker: i64, seen_version: i64) -> Result<(), CheckRefusal> {
    let title = || facts.title.clone();
    match state(facts) {
        TestState::Open => return Err(CheckRefusal::TestOpen(title())),
        TestState::SentBack => return Err(CheckRefusal::TestSentBack(title())),
        TestState::Ready => return Err(CheckRefusal::NotWaitingForCheck(title())),
        TestState::WaitingForCheck => {}
    }
    if facts.performers.contains(&checker) {
        return Err(CheckRefusal::OwnReadings { title: title(), performers: facts.performers.clone() });
    }
    if facts.version != Some(seen_version) {
        return Err(CheckRefusal::ResultChanged(title()));
    }
    Ok(())
}

/// Whether the checker may send it back: as [`may_check`], then the reason.
pub fn may_send_back(
    facts: &TestFacts,
    checker: i64,
    seen_version: i64,
    why: &str,
) -> Result<(), CheckRefusal> {
    may_check(facts, checker, seen_version)?;
    if why.trim().chars().count() < SHORTEST_WHY {
        return Err(CheckRefusal::WhyTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn facts(version: Option<i64>, is_checked: Option<bool>, needs_check: bool) -> TestFacts {
        TestFacts {
            title: "pH".to_string(),
            version,
            is_checked,
            needs_check,
            performers: vec![4],
            ..TestFacts::default()
        }
    }

    #[test]
    fn a_test_is_open_waiting_sent_back_or_ready() {
        let table = [
            (facts(None, None, true), TestState::Open),
            (facts(Some(1), None, true), TestState::WaitingForCheck),
            (facts(Some(1), None, false), TestState::Ready),
            (facts(Some(1), Some(true), true), TestState::Ready),
            (facts(Some(1), Some(false), true), TestState::SentBack),
            (facts(Some(1), Some(false), false), TestState::SentBack),
        ];
        for (facts, expected) in table {
            assert_eq!(state(&facts), expected, "{facts:?}");
        }
    }

    #[test]
    fn the_check_is_refused_in_the_documented_order() {
        let ph = || "pH".to_string();
        let own_readings = CheckRefusal::OwnReadings { title: ph(), performers: vec![4] };
        let table = [
            (facts(None, None, true), 4, 1, Err(CheckRefusal::TestOpen(ph()))),
            (facts(Some(1), Some(false), true), 4, 2, Err(CheckRefusal::TestSentBack(ph()))),
            (facts(Some(1), Some(true), true), 4, 2, Err(CheckRefusal::NotWaitingForCheck(ph()))),
            (facts(Some(1), None, true), 4, 2, Err(own_readings)),
            (facts(Some(2), None, true), 5, 1, Err(CheckRefusal::ResultChanged(ph()))),
            (facts(Some(2), None, true), 5, 2, Ok(())),
        ];
        for (facts, checker, seen, expected) in table {
            assert_eq!(may_check(&facts, checker, seen), expected, "{facts:?}");
        }
        let waiting = facts(Some(1), None, true);
        assert_eq!(may_send_back(&waiting, 5, 1, " too short "), Err(CheckRefusal::WhyTooShort));
        assert_eq!(may_send_back(&waiting, 5, 1, "temperature of bottle 2"), Ok(()));
    }
}
