//! Where each step stands, from its entries.

use super::{Entry, EntryKind, PhaseYield, Planned, RecordContent, Verdict, filling, standing, yield_of};

/// Where a step stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StepState {
    /// What comes before is not done.
    CannotStart,
    Ready,
    InProgress,
    WaitingForCheck,
    Done,
    Skipped,
}

impl StepState {
    /// Done or lawfully skipped: what comes after may begin.
    pub fn is_settled(self) -> bool {
        matches!(self, StepState::Done | StepState::Skipped)
    }
}

/// The run a step is in, counted from 1.
pub fn run_of(entries: &[Entry], step: usize) -> u32 {
    let repeats = entries.iter().filter(|one| one.step == step && one.kind == EntryKind::Repeated);
    repeats.map(|one| one.run).max().unwrap_or(1)
}

/// The standing entries of a step's present run, oldest first.
pub fn present(entries: &[Entry], step: usize) -> Vec<&Entry> {
    let run = run_of(entries, step);
    standing(entries).into_iter().filter(|one| one.step == step && one.run == run).collect()
}

/// What the entries of a step's present run say, what comes before aside.
pub fn own_state(planned: &Planned<'_>, entries: &[Entry]) -> StepState {
    let present = present(entries, planned.number);
    let has = |kind: EntryKind| present.iter().any(|one| one.kind == kind);
    if has(EntryKind::Skipped) {
        StepState::Skipped
    } else if has(EntryKind::Checked) || (has(EntryKind::Ended) && !planned.step.needs_check) {
        StepState::Done
    } else if has(EntryKind::Ended) {
        StepState::WaitingForCheck
    } else if has(EntryKind::Started) {
        StepState::InProgress
    } else {
        StepState::Ready
    }
}

/// What a step waits for before it may begin.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Before {
    /// A step, in words.
    Step(String),
    /// The yield of a phase, by its name.
    Yield(String),
}

/// The first thing a step waits for; `None` where it may begin.
pub fn waits_for(
    content: &RecordContent,
    planned: &Planned<'_>,
    entries: &[Entry],
    yields: &[PhaseYield],
) -> Option<Before> {
    let is_free = content.phase(planned.phase).is_some_and(|phase| phase.is_in_any_order);
    for earlier in content.steps().into_iter().take_while(|one| one.number < planned.number) {
        let matters = earlier.phase < planned.phase || !is_free;
        if matters && !own_state(&earlier, entries).is_settled() {
            return Some(Before::Step(earlier.words()));
        }
    }
    for at in 0..planned.phase {
        let phase = content.phase(at).filter(|phase| phase.theory.is_some());
        if let Some(phase) = phase.filter(|_| yield_of(yields, at).is_none()) {
            return Some(Before::Yield(phase.name.clone()));
        }
    }
    None
}

/// Where every step stands, in the order of the record.
pub fn states(content: &RecordContent, entries: &[Entry], yields: &[PhaseYield]) -> Vec<StepState> {
    content
        .steps()
        .iter()
        .map(|planned| match own_state(planned, entries) {
            StepState::Ready if waits_for(content, planned, entries, yields).is_some() => {
                StepState::CannotStart
            }
            own => own,
        })
        .collect()
}

/// A value the step asks for at one point: its place among the step's values, and the point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Slot {
    pub value: usize,
    pub point: String,
}

/// Every value the step asks for: once, or when filling each in-process check at start, middle, end and after
/// every stop.
pub fn slots(planned: &Planned<'_>, entries: &[Entry]) -> Vec<Slot> {
    let points = filling::points(planned, entries);
    let mut slots = Vec::new();
    for (at, value) in planned.step.values.iter().enumerate() {
        if value.is_in_process_check && !points.is_empty() {
            slots.extend(points.iter().map(|point| Slot { value: at, point: point.clone() }));
        } else {
            slots.push(Slot { value: at, point: String::new() });
        }
    }
    slots
}

/// The standing entry of a slot in the present run.
pub fn in_slot<'a>(planned: &Planned<'_>, entries: &'a [Entry], slot: &Slot) -> Option<&'a Entry> {
    let name = &planned.step.values.get(slot.value)?.name;
    present(entries, planned.number)
        .into_iter()
        .find(|one| one.kind == EntryKind::Value && one.name == *name && one.point == slot.point)
}

/// Entries of the present run outside their limits that no deviation answers yet.
pub fn unanswered(entries: &[Entry], step: usize) -> Vec<&Entry> {
    let present = present(entries, step);
    let is_answered =
        |id: i64| entries.iter().any(|one| one.kind == EntryKind::Answered && one.answers == Some(id));
    present
        .iter()
        .filter(|one| one.verdict == Verdict::Outside && one.deviation.is_none() && !is_answered(one.id))
        .copied()
        .collect()
}

#[cfg(test)]
mod tests {
    use super::super::example::{self, entry};
    use super::*;
    use StepState::*;

    /// Steps open in their order; a phase in any order opens all its steps; the yield stands between two phases.
    #[test]
    fn steps_open_in_order_and_after_the_yield() {
        let content = example::content();
        let mut entries = Vec::new();
        let mut yields = Vec::new();
        let at = |entries: &[Entry], yields: &[PhaseYield]| states(&content, entries, yields);
        assert_eq!(at(&entries, &yields), [Ready, Ready, CannotStart, CannotStart, CannotStart]);
        for (step, kind) in [(1, EntryKind::Started), (1, EntryKind::Ended)] {
            entries.push(entry(&entries, step, kind, 1));
        }
        assert_eq!(at(&entries, &yields)[..3], [WaitingForCheck, Ready, CannotStart]);
        entries.push(entry(&entries, 1, EntryKind::Checked, 2));
        entries.push(entry(&entries, 2, EntryKind::Skipped, 1));
        assert_eq!(at(&entries, &yields), [Done, Skipped, Ready, CannotStart, CannotStart]);
        for step in [3, 4] {
            for kind in [EntryKind::Started, EntryKind::Ended] {
                entries.push(entry(&entries, step, kind, 1));
            }
        }
        assert_eq!(at(&entries, &yields), [Done, Skipped, Done, Done, CannotStart]);
        let last = content.step(5).unwrap();
        let waits = waits_for(&content, &last, &entries, &yields);
        assert_eq!(waits, Some(Before::Yield("Compounding".to_string())));
        yields.push(example::yielded(1));
        assert_eq!(at(&entries, &yields)[4], Ready);
    }

    #[test]
    fn a_repeated_step_begins_again_and_keeps_its_first_run() {
        let content = example::content();
        let mut entries = Vec::new();
        for kind in [EntryKind::Started, EntryKind::Ended] {
            entries.push(entry(&entries, 3, kind, 1));
        }
        let step = content.step(3).unwrap();
        assert_eq!(own_state(&step, &entries), Done);
        entries.push(Entry { run: 2, ..entry(&entries, 3, EntryKind::Repeated, 1) });
        assert_eq!((own_state(&step, &entries), run_of(&entries, 3)), (Ready, 2));
        entries.push(Entry { run: 2, ..entry(&entries, 3, EntryKind::Started, 1) });
        assert_eq!(own_state(&step, &entries), InProgress);
    }

    #[test]
    fn what_lies_outside_waits_for_its_answer() {
        let mut entries = vec![Entry { verdict: Verdict::Outside, ..entry(&[], 3, EntryKind::Value, 1) }];
        assert_eq!(unanswered(&entries, 3).len(), 1);
        let answer = entry(&entries, 3, EntryKind::Answered, 1);
        entries.push(Entry { answers: Some(entries[0].id), ..answer });
        assert!(unanswered(&entries, 3).is_empty());
        let corrected = entry(&entries, 3, EntryKind::Value, 1);
        entries.push(Entry { supersedes: Some(entries[0].id), verdict: Verdict::Outside, ..corrected });
        assert_eq!(unanswered(&entries, 3).len(), 1, "a corrected value asks anew");
    }
}
