//! Filling a suspension: stops of the line, and where samples are taken.

use super::state::present;
use super::{Entry, EntryKind, Planned};
use crate::domain::master::StepKind;
use crate::domain::moment::Moment;

/// The points at which in-process checks are read while filling: start, after each stop, middle, end. Empty for other
/// steps.
pub fn points(planned: &Planned<'_>, entries: &[Entry]) -> Vec<String> {
    if planned.step.kind != StepKind::Fill {
        return Vec::new();
    }
    let stops = present(entries, planned.number).into_iter().filter(|one| one.kind == EntryKind::Resumed);
    let after = (1..=stops.count()).map(|number| format!("after stop {number}"));
    ["start".to_string(), "middle".to_string(), "end".to_string()].into_iter().chain(after).collect()
}

/// The stop that has not ended yet.
pub fn open_stop<'a>(planned: &Planned<'_>, entries: &'a [Entry]) -> Option<&'a Entry> {
    let present = present(entries, planned.number);
    let stopped = present.iter().rev().find(|one| one.kind == EntryKind::Stopped)?;
    let is_over = present.iter().any(|one| one.kind == EntryKind::Resumed && one.answers == Some(stopped.id));
    (!is_over).then_some(*stopped)
}

/// Whole minutes from one stored instant to another, rounded up: a limit is not met by a fraction.
pub fn minutes_between(from: &str, to: &str, zone: chrono_tz::Tz) -> Option<i64> {
    let (from, to) = (Moment::from_stored(from, zone)?, Moment::from_stored(to, zone)?);
    let seconds = (to.utc - from.utc).num_seconds();
    Some(seconds.div_euclid(60) + i64::from(seconds.rem_euclid(60) > 0))
}

#[cfg(test)]
mod tests {
    use super::super::example::{self, entry};
    use super::*;

    #[test]
    fn every_stop_asks_for_a_sample_after_it() {
        let content = example::content();
        let fill = content.step(5).unwrap();
        let mut entries = vec![entry(&[], 5, EntryKind::Started, 1)];
        assert_eq!(points(&fill, &entries), ["start", "middle", "end"]);
        assert_eq!(points(&content.step(3).unwrap(), &entries), Vec::<String>::new());
        entries.push(entry(&entries, 5, EntryKind::Stopped, 1));
        assert!(open_stop(&fill, &entries).is_some());
        let stop = entries[1].id;
        let resumed = entry(&entries, 5, EntryKind::Resumed, 1);
        entries.push(Entry { answers: Some(stop), ..resumed });
        assert!(open_stop(&fill, &entries).is_none());
        assert_eq!(points(&fill, &entries)[3], "after stop 1");
    }

    #[test]
    fn minutes_are_rounded_up() {
        let zone = chrono_tz::Europe::London;
        let from = "2026-12-01T09:00:00.000Z";
        for (to, minutes) in [
            ("2026-12-01T09:00:00.000Z", 0),
            ("2026-12-01T09:10:00.000Z", 10),
            ("2026-12-01T09:10:01.000Z", 11),
        ] {
            assert_eq!(minutes_between(from, to, zone), Some(minutes));
        }
    }
}
