//! What may be done in a step, and in which order it is refused.

use super::refusal::StepRefusal;
use super::state::{Before, StepState, in_slot, own_state, present, slots, unanswered, waits_for};
use super::weighing::{judge, parts, target, weighings};
use super::{Entry, EntryKind, PhaseYield, Planned, RecordContent, Verdict, filling, yield_of};

/// All that decides what may be done in a step.
#[derive(Clone, Copy)]
pub struct StepFacts<'a> {
    pub content: &'a RecordContent,
    pub planned: Planned<'a>,
    pub entries: &'a [Entry],
    pub yields: &'a [PhaseYield],
    pub is_closed: bool,
    /// The record's number.
    pub record: &'a str,
    /// Whose decision on the lot has fallen: released or rejected.
    pub lot_decided: Option<&'a str>,
}

impl StepFacts<'_> {
    pub fn state(&self) -> StepState {
        own_state(&self.planned, self.entries)
    }

    fn words(&self) -> String {
        self.planned.words()
    }

    /// Who did a part of the present run.
    pub fn doers(&self) -> Vec<i64> {
        let run = super::state::run_of(self.entries, self.planned.number);
        let of_run = self.entries.iter().filter(|one| one.step == self.planned.number && one.run == run);
        of_run.filter(|one| one.kind.is_doing()).map(|one| one.account).collect()
    }

    /// Who checked or weighed a second time in the present run.
    fn checkers(&self) -> Vec<i64> {
        let checking = |one: &&&Entry| matches!(one.kind, EntryKind::Checked | EntryKind::SecondWeighing);
        present(self.entries, self.planned.number).iter().filter(checking).map(|one| one.account).collect()
    }
}

/// The record takes entries. Refuses in this order: the lot decided on, the record closed.
pub fn may_enter(facts: &StepFacts<'_>) -> Result<(), StepRefusal> {
    if let Some(decided) = facts.lot_decided {
        return Err(StepRefusal::LotDecided(decided.to_string()));
    }
    if facts.is_closed { Err(StepRefusal::RecordClosed(facts.record.to_string())) } else { Ok(()) }
}

fn in_order(facts: &StepFacts<'_>) -> Result<(), StepRefusal> {
    let step = facts.words();
    match waits_for(facts.content, &facts.planned, facts.entries, facts.yields) {
        Some(Before::Step(before)) => Err(StepRefusal::StepNotOpen { step, before }),
        Some(Before::Yield(phase)) => Err(StepRefusal::YieldNotRecorded { step, phase }),
        None => Ok(()),
    }
}

/// Whether the step may start. Refuses in this order: closed; started, ended, done, skipped; what comes before.
pub fn may_start(facts: &StepFacts<'_>) -> Result<(), StepRefusal> {
    may_enter(facts)?;
    match facts.state() {
        StepState::Ready | StepState::CannotStart => in_order(facts),
        StepState::InProgress => Err(StepRefusal::StepStarted(facts.words())),
        StepState::WaitingForCheck => Err(StepRefusal::StepEnded(facts.words())),
        StepState::Done => Err(StepRefusal::StepDone(facts.words())),
        StepState::Skipped => Err(StepRefusal::StepSkipped(facts.words())),
    }
}

/// Whether something may be recorded in the running step. Refuses in this order: closed; not started, ended, done,
/// skipped; the person checked it.
pub fn may_record(facts: &StepFacts<'_>, account: i64) -> Result<(), StepRefusal> {
    may_enter(facts)?;
    match facts.state() {
        StepState::InProgress => {}
        StepState::Ready | StepState::CannotStart => {
            in_order(facts)?;
            return Err(StepRefusal::StepNotStarted(facts.words()));
        }
        StepState::WaitingForCheck => return Err(StepRefusal::StepEnded(facts.words())),
        StepState::Done => return Err(StepRefusal::StepDone(facts.words())),
        StepState::Skipped => return Err(StepRefusal::StepSkipped(facts.words())),
    }
    if facts.checkers().contains(&account) {
        return Err(StepRefusal::CheckerDoes(facts.words(), account));
    }
    Ok(())
}

/// Whether the line may stop or run again, in the order of [`may_record`], then whether it runs or stands.
pub fn may_stop(facts: &StepFacts<'_>, account: i64) -> Result<(), StepRefusal> {
    may_record(facts, account)?;
    let stands = filling::open_stop(&facts.planned, facts.entries).is_some();
    if stands { Err(StepRefusal::LineStands) } else { Ok(()) }
}

/// What a step still lacks before it may end. Refuses in this order: those of [`may_record`], the line stands,
/// values
/// missing, nothing weighed, too little weighed (`has_words` says what happened), outside limits without a deviation,
/// too early, too late.
pub fn may_end(
    facts: &StepFacts<'_>,
    account: i64,
    minutes: i64,
    has_words: bool,
) -> Result<(), StepRefusal> {
    may_record(facts, account)?;
    if filling::open_stop(&facts.planned, facts.entries).is_some() {
        return Err(StepRefusal::LineStands);
    }
    let missing = missing(facts);
    if !missing.is_empty() {
        return Err(StepRefusal::ValuesMissing(missing.join(", ")));
    }
    enough_weighed(facts, has_words)?;
    all_answered(facts)?;
    let step = facts.planned.step;
    match (step.least_minutes, step.most_minutes) {
        _ if has_words => Ok(()),
        (Some(least), _) if minutes < i64::from(least) => Err(StepRefusal::TooEarly { minutes, least }),
        (_, Some(most)) if minutes > i64::from(most) => Err(StepRefusal::TooLate { minutes, most }),
        _ => Ok(()),
    }
}

/// The values a running step has not recorded yet, in words.
pub fn missing(facts: &StepFacts<'_>) -> Vec<String> {
    slots(&facts.planned, facts.entries)
        .into_iter()
        .filter(|slot| in_slot(&facts.planned, facts.entries, slot).is_none())
        .map(|slot| {
            let name = &facts.planned.step.values[slot.value].name;
            if slot.point.is_empty() { name.clone() } else { format!("{name}, {}", slot.point) }
        })
        .collect()
}

fn enough_weighed(facts: &StepFacts<'_>, has_words: bool) -> Result<(), StepRefusal> {
    let Some(target) = target(facts.content, &facts.planned) else { return Ok(()) };
    let weighed = weighings(&facts.planned, facts.entries);
    let stands = judge(&target, &parts(&weighed));
    let unit = &target.row.unit;
    if weighed.is_empty() {
        return Err(StepRefusal::NothingWeighed(target.row.name.clone()));
    }
    let is_below = stands.least.is_some_and(|least| stands.weighed < least);
    if is_below && !has_words {
        let weighed = format!("{}\u{202f}{unit}", stands.weighed.normalize());
        return Err(StepRefusal::WeightBelowLimit { weighed, limit: stands.limit_words(unit) });
    }
    Ok(())
}

fn all_answered(facts: &StepFacts<'_>) -> Result<(), StepRefusal> {
    let open = unanswered(facts.entries, facts.planned.number);
    if open.is_empty() {
        return Ok(());
    }
    let words: Vec<String> = open.iter().map(|one| format!("{} {}", one.label(), one.shown())).collect();
    Err(StepRefusal::OutsideUnanswered(words.join("; ")))
}

/// Whether the person may look at the step as its second pair of eyes. Refuses in this order: closed, nothing to check,
/// own work.
pub fn may_look(facts: &StepFacts<'_>, account: i64) -> Result<(), StepRefusal> {
    may_enter(facts)?;
    if facts.state() != StepState::WaitingForCheck {
        return Err(StepRefusal::NothingToCheck(facts.words()));
    }
    let doers = facts.doers();
    if doers.contains(&account) {
        return Err(StepRefusal::CheckerIsDoer(facts.words(), doers));
    }
    Ok(())
}

/// Whether the person may check the step: [`may_look`], then the second weighing where one is asked for, then what
/// lies outside without a deviation.
pub fn may_check(facts: &StepFacts<'_>, account: i64) -> Result<(), StepRefusal> {
    may_look(facts, account)?;
    if !to_weigh_again(facts).is_empty() {
        return Err(StepRefusal::SecondWeighingMissing);
    }
    all_answered(facts)
}

/// The weighings a second person has still to make in blind.
pub fn to_weigh_again<'a>(facts: &StepFacts<'a>) -> Vec<&'a Entry> {
    if facts.planned.step.blind_within.is_none() {
        return Vec::new();
    }
    let present = present(facts.entries, facts.planned.number);
    let is_weighed =
        |id: i64| present.iter().any(|one| one.kind == EntryKind::SecondWeighing && one.answers == Some(id));
    weighings(&facts.planned, facts.entries).into_iter().filter(|one| !is_weighed(one.id)).collect()
}

/// Whether the step may be skipped: as the record allows, or under a deviation signed by QA. Refuses in this order:
/// closed, what comes before, begun already, the deviation.
pub fn may_skip(facts: &StepFacts<'_>, has_signed_deviation: bool) -> Result<(), StepRefusal> {
    may_start(facts)?;
    if facts.planned.step.may_skip || has_signed_deviation {
        Ok(())
    } else {
        Err(StepRefusal::SkipNeedsDeviation(facts.words()))
    }
}

/// Whether the step may be repeated: as the record allows, or under a deviation signed by QA. Refuses in this order:
/// closed, not done, the deviation.
pub fn may_repeat(facts: &StepFacts<'_>, has_signed_deviation: bool) -> Result<(), StepRefusal> {
    may_enter(facts)?;
    if facts.state() != StepState::Done {
        return Err(StepRefusal::NothingToRepeat(facts.words()));
    }
    if facts.planned.step.may_repeat || has_signed_deviation {
        Ok(())
    } else {
        Err(StepRefusal::RepeatNeedsDeviation(facts.words()))
    }
}

/// Whether an entry may be corrected. Refuses in this order: closed, no observation, corrected already, by the person
/// who stands on the other side of the check.
pub fn may_correct(facts: &StepFacts<'_>, entry: &Entry, account: i64) -> Result<(), StepRefusal> {
    may_enter(facts)?;
    if !entry.kind.is_observation() {
        return Err(StepRefusal::EntryNotCorrectable);
    }
    if facts.entries.iter().any(|later| later.supersedes == Some(entry.id)) {
        return Err(StepRefusal::EntrySuperseded);
    }
    let others = if entry.kind == EntryKind::SecondWeighing { facts.doers() } else { facts.checkers() };
    if entry.kind != EntryKind::Note && others.contains(&account) {
        return Err(StepRefusal::CorrectedByChecker(entry.label(), account));
    }
    Ok(())
}

/// Whether the record may be closed. Refuses in this order: closed already, steps open, something outside without a
/// deviation, yields open.
pub fn may_close(
    facts: (&RecordContent, &[Entry], &[PhaseYield]),
    is_closed: bool,
    number: &str,
) -> Result<(), StepRefusal> {
    let (content, entries, yields) = facts;
    if is_closed {
        return Err(StepRefusal::RecordClosed(number.to_string()));
    }
    let open: Vec<String> = content
        .steps()
        .iter()
        .filter(|planned| !own_state(planned, entries).is_settled())
        .map(Planned::words)
        .collect();
    if !open.is_empty() {
        return Err(StepRefusal::StepsOpen(open.join(", ")));
    }
    let outside = content.steps().into_iter().flat_map(|planned| unanswered(entries, planned.number));
    let outside: Vec<String> = outside.map(|one| format!("{} {}", one.label(), one.shown())).collect();
    if !outside.is_empty() {
        return Err(StepRefusal::OutsideUnanswered(outside.join("; ")));
    }
    let phases = content.master.phases.iter().enumerate().filter(|(_, phase)| phase.theory.is_some());
    let unchecked: Vec<&str> = phases
        .filter(|(at, _)| yield_of(yields, *at).is_none_or(|found| found.checked.is_none()))
        .map(|(_, phase)| phase.name.as_str())
        .collect();
    if unchecked.is_empty() { Ok(()) } else { Err(StepRefusal::YieldsOpen(unchecked.join(", "))) }
}

/// A value as it is judged: numbers by their bounds, words by "conforms".
pub fn verdict_of(
    value: &crate::domain::master::StepValue,
    typed: &str,
    number: Option<rust_decimal::Decimal>,
) -> Verdict {
    match number {
        _ if value.is_words => match typed {
            "conforms" => Verdict::Within,
            _ => Verdict::Outside,
        },
        Some(number) => Verdict::of(number, value.least, value.most),
        None => Verdict::NoLimit,
    }
}

#[cfg(test)]
mod tests;
