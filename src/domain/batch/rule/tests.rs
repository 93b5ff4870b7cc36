use proptest::prelude::*;
use rust_decimal::Decimal;

use super::super::example::{content, entry, yielded};
use super::super::standing;
use super::super::state::{run_of, states};
use super::*;

fn facts<'a>(
    content: &'a RecordContent,
    step: usize,
    entries: &'a [Entry],
    yields: &'a [PhaseYield],
) -> StepFacts<'a> {
    let planned = content.steps()[step - 1];
    StepFacts { content, planned, entries, yields, is_closed: false, record: "BR-1", lot_decided: None }
}

fn name(said: Result<(), StepRefusal>) -> String {
    match said {
        Ok(()) => "may".to_string(),
        Err(refusal) => crate::domain::refusal::Refusal::from(refusal).name,
    }
}

/// Step 1 weighed in tolerance and ended by person 1.
fn weighed() -> Vec<Entry> {
    let mut entries = vec![entry(&[], 1, EntryKind::Started, 1)];
    let one = entry(&entries, 1, EntryKind::Weighing, 1);
    entries.push(Entry { value: Some(Decimal::from(40)), ..one });
    entries.push(entry(&entries, 1, EntryKind::Ended, 1));
    entries
}

#[test]
fn starting_is_refused_in_its_order() {
    let content = content();
    let started = vec![entry(&[], 1, EntryKind::Started, 1)];
    let weighed = weighed();
    let table: [(&[Entry], usize, &str); 5] = [
        (&[], 1, "may"),
        (&[], 3, "StepNotOpen"),
        (&started, 1, "StepStarted"),
        (&weighed, 1, "StepEnded"),
        (&weighed, 2, "may"),
    ];
    for (entries, step, expected) in table {
        assert_eq!(name(may_start(&facts(&content, step, entries, &[]))), expected, "step {step}");
    }
    let closed = StepFacts { is_closed: true, ..facts(&content, 1, &[], &[]) };
    assert_eq!(name(may_start(&closed)), "RecordClosed");
    let decided = StepFacts { lot_decided: Some("released"), ..closed };
    assert_eq!(name(may_start(&decided)), "LotDecided");
}

#[test]
fn ending_asks_for_everything_in_its_order() {
    let content = content();
    let with = |step: usize, more: &[Entry]| {
        let mut entries = vec![entry(&[], step, EntryKind::Started, 1)];
        for one in more {
            let id = entries.len() as i64 + 1;
            entries.push(Entry { id, step, ..one.clone() });
        }
        entries
    };
    let speed = |verdict| Entry { name: "Speed".to_string(), verdict, ..entry(&[], 3, EntryKind::Value, 1) };
    let weight =
        |net: i64| Entry { value: Some(Decimal::new(net, 2)), ..entry(&[], 1, EntryKind::Weighing, 1) };
    let stop = entry(&[], 5, EntryKind::Stopped, 1);
    let table = [
        (1, with(1, &[]), 5, true, "NothingWeighed"),
        (1, with(1, &[weight(3959)]), 5, false, "WeightBelowLimit"),
        (1, with(1, &[weight(3959)]), 5, true, "may"),
        (1, with(1, &[weight(2000), weight(1960)]), 5, false, "may"),
        (3, with(3, &[]), 20, false, "ValuesMissing"),
        (3, with(3, &[speed(Verdict::Outside)]), 20, true, "OutsideUnanswered"),
        (3, with(3, &[speed(Verdict::Within)]), 9, false, "TooEarly"),
        (3, with(3, &[speed(Verdict::Within)]), 61, false, "TooLate"),
        (3, with(3, &[speed(Verdict::Within)]), 61, true, "may"),
        (3, with(3, &[speed(Verdict::Within)]), 60, false, "may"),
        (5, with(5, &[stop]), 20, false, "LineStands"),
        (5, with(5, &[]), 20, false, "ValuesMissing"),
    ];
    for (step, entries, minutes, has_words, expected) in table {
        let said = may_end(&facts(&content, step, &entries, &[]), 1, minutes, has_words);
        assert_eq!(name(said), expected, "step {step} after {minutes} min");
    }
}

/// sec_S51: the checker is not a doer, and a second weighing comes first where one is set.
#[test]
fn a_check_is_another_persons_and_after_the_second_weighing() {
    let content = content();
    let mut entries = weighed();
    let said = |entries: &[Entry], account| name(may_check(&facts(&content, 1, entries, &[]), account));
    assert_eq!(said(&entries[..1], 2), "NothingToCheck");
    assert_eq!(said(&entries, 1), "CheckerIsDoer");
    assert_eq!(said(&entries, 2), "SecondWeighingMissing");
    let second = entry(&entries, 1, EntryKind::SecondWeighing, 2);
    entries.push(Entry { answers: Some(2), ..second });
    assert_eq!(said(&entries, 2), "may");
    entries[3].verdict = Verdict::Outside;
    assert_eq!(said(&entries, 2), "OutsideUnanswered");
    let correct =
        |at: usize, account| name(may_correct(&facts(&content, 1, &entries, &[]), &entries[at], account));
    assert_eq!(correct(1, 2), "CorrectedByChecker");
    assert_eq!(correct(1, 1), "may");
    assert_eq!(correct(3, 1), "CorrectedByChecker");
    assert_eq!(correct(0, 1), "EntryNotCorrectable");
}

#[test]
fn skipping_and_repeating_follow_the_record_or_a_signed_deviation() {
    let content = content();
    let entries = weighed();
    let skip = |step, signed| name(may_skip(&facts(&content, step, &[], &[]), signed));
    assert_eq!((skip(2, false), skip(1, false)), ("may".to_string(), "SkipNeedsDeviation".to_string()));
    assert_eq!((skip(1, true), skip(3, true)), ("may".to_string(), "StepNotOpen".to_string()));
    let repeat =
        |step, entries: &[Entry], signed| name(may_repeat(&facts(&content, step, entries, &[]), signed));
    assert_eq!(repeat(1, &entries, true), "NothingToRepeat");
    let done = |step| vec![entry(&[], step, EntryKind::Started, 1), entry(&[], step, EntryKind::Ended, 1)];
    assert_eq!(repeat(3, &done(3), false), "may");
    assert_eq!(repeat(4, &done(4), false), "RepeatNeedsDeviation");
    assert_eq!(repeat(4, &done(4), true), "may");
}

#[test]
fn a_record_closes_when_every_step_and_yield_is_settled() {
    let content = content();
    let mut entries = Vec::new();
    let mut yields = Vec::new();
    let said = |entries: &[Entry], yields: &[PhaseYield], closed| {
        name(may_close((&content, entries, yields), closed, "BR-1"))
    };
    assert_eq!(said(&entries, &yields, false), "StepsOpen");
    for step in 1..=5 {
        entries.push(entry(&entries, step, EntryKind::Skipped, 1));
    }
    assert_eq!(said(&entries, &yields, false), "YieldsOpen");
    for phase in [1, 2] {
        yields.push(PhaseYield { checked: Some(("person 2".to_string(), String::new())), ..yielded(phase) });
    }
    assert_eq!(said(&entries, &yields, false), "may");
    assert_eq!(said(&entries, &yields, true), "RecordClosed");
    yields.push(PhaseYield { id: 9, ..yielded(1) });
    assert_eq!(said(&entries, &yields, false), "YieldsOpen", "a new figure asks for a new check");
}

/// What somebody tries at a random moment.
#[derive(Clone, Debug)]
enum Try {
    Start,
    Weigh(i64),
    Value(bool),
    Answer,
    Stop,
    Resume,
    End(i64, bool),
    WeighAgain,
    Check,
    Skip(bool),
    Repeat(bool),
    Yield(usize),
    Close,
}

fn tries() -> impl Strategy<Value = Try> {
    prop_oneof![
        4 => Just(Try::Start),
        3 => (3900_i64..4100).prop_map(Try::Weigh),
        4 => any::<bool>().prop_map(Try::Value),
        2 => Just(Try::Answer),
        1 => Just(Try::Stop),
        1 => Just(Try::Resume),
        4 => (0_i64..90, any::<bool>()).prop_map(|(minutes, words)| Try::End(minutes, words)),
        2 => Just(Try::WeighAgain),
        3 => Just(Try::Check),
        1 => any::<bool>().prop_map(Try::Skip),
        1 => any::<bool>().prop_map(Try::Repeat),
        2 => (0_usize..3).prop_map(Try::Yield),
        1 => Just(Try::Close),
    ]
}

struct Walk {
    entries: Vec<Entry>,
    yields: Vec<PhaseYield>,
    is_closed: bool,
}

impl Walk {
    fn push(&mut self, step: usize, kind: EntryKind, account: i64, change: impl FnOnce(&mut Entry)) {
        let mut one = entry(&self.entries, step, kind, account);
        one.run = run_of(&self.entries, step);
        change(&mut one);
        self.entries.push(one);
    }

    /// Does what the rules allow; what they refuse leaves no entry.
    fn tries(&mut self, content: &RecordContent, step: usize, account: i64, what: &Try) {
        let (entries, yields) = (self.entries.clone(), self.yields.clone());
        let facts = StepFacts { is_closed: self.is_closed, ..facts(content, step, &entries, &yields) };
        let may = |said: Result<(), StepRefusal>| said.is_ok();
        match what {
            Try::Start if may(may_start(&facts)) => self.push(step, EntryKind::Started, account, |_| {}),
            Try::Weigh(net) if may(may_record(&facts, account)) && facts.planned.step.dispense.is_some() => {
                self.push(step, EntryKind::Weighing, account, |one| one.value = Some(Decimal::new(*net, 2)));
            }
            Try::Value(is_outside) if may(may_record(&facts, account)) => {
                let open = slots(&facts.planned, &entries);
                let open = open.into_iter().find(|slot| in_slot(&facts.planned, &entries, slot).is_none());
                let Some(slot) = open else { return };
                let name = facts.planned.step.values[slot.value].name.clone();
                self.push(step, EntryKind::Value, account, |one| {
                    (one.name, one.point) = (name, slot.point);
                    one.verdict = if *is_outside { Verdict::Outside } else { Verdict::Within };
                });
            }
            Try::Answer if may(may_enter(&facts)) => {
                if let Some(open) = unanswered(&entries, step).first() {
                    let id = open.id;
                    self.push(step, EntryKind::Answered, account, |one| one.answers = Some(id));
                }
            }
            Try::Stop if facts.planned.step.stop_minutes_most.is_some() && may(may_stop(&facts, account)) => {
                self.push(step, EntryKind::Stopped, account, |_| {});
            }
            Try::Resume if may(may_record(&facts, account)) => {
                if let Some(stop) = filling::open_stop(&facts.planned, &entries) {
                    self.push(step, EntryKind::Resumed, account, |one| one.answers = Some(stop.id));
                }
            }
            Try::End(minutes, words) if may(may_end(&facts, account, *minutes, *words)) => {
                self.push(step, EntryKind::Ended, account, |_| {});
            }
            Try::WeighAgain if may(may_look(&facts, account)) => {
                if let Some(first) = to_weigh_again(&facts).first() {
                    let id = first.id;
                    self.push(step, EntryKind::SecondWeighing, account, |one| one.answers = Some(id));
                }
            }
            Try::Check if may(may_check(&facts, account)) => {
                self.push(step, EntryKind::Checked, account, |_| {});
            }
            other => self.tries_more(content, (step, account), other),
        }
    }

    fn tries_more(&mut self, content: &RecordContent, (step, account): (usize, i64), what: &Try) {
        let (entries, yields) = (self.entries.clone(), self.yields.clone());
        let facts = StepFacts { is_closed: self.is_closed, ..facts(content, step, &entries, &yields) };
        let may = |said: Result<(), StepRefusal>| said.is_ok();
        match what {
            Try::Skip(signed) if may(may_skip(&facts, *signed)) => {
                self.push(step, EntryKind::Skipped, account, |_| {});
            }
            Try::Repeat(signed) if may(may_repeat(&facts, *signed)) => {
                self.push(step, EntryKind::Repeated, account, |one| one.run += 1);
            }
            Try::Yield(phase) if content.master.phases[*phase].theory.is_some() && !self.is_closed => {
                let checked = Some(("person 9".to_string(), String::new()));
                self.yields.push(PhaseYield { checked, ..yielded(*phase) });
            }
            Try::Close if may(may_close((content, &entries, &yields), self.is_closed, "BR-1")) => {
                self.is_closed = true;
            }
            _ => {}
        }
    }
}

/// What must hold whatever was tried.
fn holds(content: &RecordContent, walk: &Walk) {
    let states = states(content, &walk.entries, &walk.yields);
    for (planned, state) in content.steps().iter().zip(&states) {
        let present = present(&walk.entries, planned.number);
        let has = |kind: EntryKind| present.iter().filter(|one| one.kind == kind).count();
        assert!(has(EntryKind::Started) <= 1 && has(EntryKind::Ended) <= 1 && has(EntryKind::Checked) <= 1);
        assert!(has(EntryKind::Ended) <= has(EntryKind::Started), "ended without a start");
        assert!(has(EntryKind::Skipped) + has(EntryKind::Started) <= 1, "skipped and begun");
        for check in present.iter().filter(|one| one.kind == EntryKind::Checked) {
            let own = present.iter().any(|one| one.kind.is_doing() && one.account == check.account);
            assert!(!own, "checked by a doer");
        }
        if *state == StepState::Done {
            assert!(unanswered(&walk.entries, planned.number).is_empty(), "done with something outside");
            assert!(planned.step.blind_within.is_none() || has(EntryKind::SecondWeighing) > 0);
        }
        if present.iter().any(|one| one.kind == EntryKind::Started)
            && run_of(&walk.entries, planned.number) == 1
        {
            let before: Vec<_> =
                content.steps().into_iter().filter(|other| other.phase < planned.phase).collect();
            let began = |other: &Planned<'_>| walk.entries.iter().any(|one| one.step == other.number);
            assert!(before.iter().all(began), "begun before the phase in front of it");
        }
    }
    if walk.is_closed {
        assert!(states.iter().all(|state| state.is_settled()), "closed with open steps");
    }
    assert_eq!(standing(&walk.entries).len(), walk.entries.len(), "nothing was corrected on this walk");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(600))]

    /// Random walks of three people over five steps reach no state that cannot be.
    #[test]
    fn random_walks_reach_no_impossible_state(
        moves in proptest::collection::vec((1_usize..6, 1_i64..4, tries()), 1..160),
    ) {
        let content = content();
        let mut walk = Walk { entries: Vec::new(), yields: Vec::new(), is_closed: false };
        for (step, account, what) in &moves {
            let before = walk.entries.len();
            let was_closed = walk.is_closed;
            walk.tries(&content, *step, *account, what);
            prop_assert!(!was_closed || walk.entries.len() == before, "an entry after the record was closed");
            holds(&content, &walk);
        }
    }
}
