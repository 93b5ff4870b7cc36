//! Entries that come late: what was done at an earlier time, with the reason why it was not recorded then.

use super::refusal::StepRefusal;
use crate::domain::moment::Moment;
use crate::domain::reason::Reason;

/// When something was done, where that was not now.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Late {
    pub happened_at: Option<Moment>,
    pub reason: Reason,
}

/// Refuses in this order: a time before the record was started or after now, no reason.
pub fn may_state_time(late: &Late, started: Option<Moment>, now: Moment) -> Result<(), StepRefusal> {
    let Some(happened) = late.happened_at else { return Ok(()) };
    if happened.utc > now.utc || started.is_some_and(|started| happened.utc < started.utc) {
        return Err(StepRefusal::TimeNotPossible);
    }
    if late.reason.text().is_none() { Err(StepRefusal::LateReasonMissing) } else { Ok(()) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_earlier_time_lies_within_the_record_and_has_a_reason() {
        let at = |text: &str| Moment::from_stored(text, chrono_tz::Europe::London);
        let (started, now) = (at("2026-12-01T09:00:00.000Z"), at("2026-12-01T12:00:00.000Z").unwrap());
        let late = |text: &str, reason: Reason| Late { happened_at: at(text), reason };
        let why = || Reason::stated("the tablet was charging");
        let table = [
            (Late::default(), Ok(())),
            (late("2026-12-01T10:00:00.000Z", why()), Ok(())),
            (late("2026-12-01T08:59:00.000Z", why()), Err(StepRefusal::TimeNotPossible)),
            (late("2026-12-01T12:01:00.000Z", why()), Err(StepRefusal::TimeNotPossible)),
            (late("2026-12-01T10:00:00.000Z", Reason::none()), Err(StepRefusal::LateReasonMissing)),
        ];
        for (late, expected) in table {
            assert_eq!(may_state_time(&late, started, now), expected, "{late:?}");
        }
    }
}
