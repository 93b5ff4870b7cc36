//! Carrying out a step: start, values, stops of the line, notes, end, skipping and repeating. Each is its own
//! act.

use super::{Loaded, at_field, concerns, open_deviation};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::late::{Late, may_state_time};
use crate::domain::batch::refusal::StepRefusal;
use crate::domain::batch::rule::{
    StepFacts, may_end, may_enter, may_record, may_repeat, may_skip, may_start, may_stop, verdict_of,
};
use crate::domain::batch::state::{in_slot, present, run_of, slots, unanswered};
use crate::domain::batch::weighing::{judge, parts, target, weighings};
use crate::domain::batch::{Entry, EntryKind, NewEntry, Verdict, filling};
use crate::domain::failure::{Failure, Stale};
use crate::domain::master::StepKind;
use crate::domain::moment::Moment;
use crate::domain::reason::Reason;
use crate::domain::typed::Number;
use crate::store;
use crate::store::door::{Change, Db};

/// Which step, as the page showed it, and when it was done.
#[derive(Clone, Debug, Default)]
pub struct How {
    pub record: i64,
    /// Counted from 1.
    pub step: usize,
    /// The newest entry of the step that the page showed.
    pub seen: i64,
    pub late: Late,
}

/// One entry of a step by its act: loads the record, asks `decide` for the entry and what the history says of it.
///
/// Before `decide` it refuses an earlier time that cannot be, and a step that was changed since the page was shown.
pub(super) fn enter(
    db: &Db,
    actor: &Actor,
    act: Act,
    (how, reason, yours): (&How, &Reason, &str),
    decide: impl FnOnce(&mut Change<'_>, &Loaded, &StepFacts<'_>) -> Result<(NewEntry, String), Failure>,
) -> Result<i64, Failure> {
    let reason = if reason.text().is_some() { reason } else { &how.late.reason };
    db.change(actor, act, reason, |change| {
        let loaded = Loaded::of(change, how.record)?;
        let facts = loaded.facts(how.step)?;
        concerns(change, &loaded.record)?;
        let zone = actor.at.zone;
        may_state_time(&how.late, Moment::from_stored(&loaded.record.started_at, zone), actor.at)?;
        may_enter(&facts)?;
        seen_is_current(&facts, how, yours, actor)?;
        let (entry, told) = decide(change, &loaded, &facts)?;
        let late = how.late.happened_at.map(|at| at.stored());
        let entry = NewEntry { happened_at: entry.happened_at.clone().or(late), ..entry };
        let id = store::batch::entry::insert(change, how.record, &entry)?;
        change.tell(format!("{}, {}{told}", loaded.record.lot_number, facts.planned.words()));
        Ok(id)
    })
}

fn seen_is_current(facts: &StepFacts<'_>, how: &How, yours: &str, actor: &Actor) -> Result<(), Failure> {
    let newest = facts.entries.iter().filter(|one| one.step == how.step).max_by_key(|one| one.id);
    let Some(newest) = newest.filter(|newest| newest.id > how.seen) else { return Ok(()) };
    // Who weighs in blind must not learn the first figure from a conflict.
    let is_hidden = facts.planned.step.blind_within.is_some() && newest.kind == EntryKind::Weighing;
    let shown = if is_hidden { String::new() } else { newest.shown() };
    let at = Moment::from_stored(&newest.at, actor.at.zone);
    Err(Failure::Stale(Stale {
        what: facts.planned.words(),
        changed_by: newest.by.clone(),
        changed_at: at.map(|at| at.shown()).unwrap_or_else(|| newest.at.clone()),
        theirs: format!("{} {shown}", newest.label()).trim_end().to_string(),
        yours: yours.to_string(),
    }))
}

/// An entry of the step's present run.
pub(super) fn new(facts: &StepFacts<'_>, kind: EntryKind) -> NewEntry {
    NewEntry::of(facts.planned.number, run_of(facts.entries, facts.planned.number), kind)
}

/// Starts a step, in the equipment it is done in; filling only with the agitation on.
///
/// Refuses in the order of [`may_start`], then agitation, the equipment: none, of another class, not fit for use.
pub fn start(
    db: &Db,
    actor: &Actor,
    how: &How,
    equipment: Option<i64>,
    is_agitation_on: bool,
) -> Result<i64, Failure> {
    let yours = (how, &Reason::none(), "the start of the step");
    enter(db, actor, Act::RecordStep, yours, |change, loaded, facts| {
        may_start(facts)?;
        let step = facts.planned.step;
        if step.kind == StepKind::Fill && !is_agitation_on {
            return Err(StepRefusal::AgitationOff.into());
        }
        let mut entry = new(facts, EntryKind::Started);
        let mut told = " started".to_string();
        if step.kind == StepKind::Fill {
            entry.typed = "agitation on".to_string();
        }
        if !step.equipment_class.is_empty() {
            let wanted = step.equipment_class.clone();
            let Some(id) = equipment else { return Err(StepRefusal::EquipmentMissing(wanted).into()) };
            let found = store::equipment::facts(change, id)?;
            if found.class != wanted {
                let (code, is) = (found.code, found.class);
                return Err(StepRefusal::EquipmentOfOtherClass { code, is, wanted }.into());
            }
            at_field(crate::acts::equipment::use_inside(change, id, loaded.record.lot), "equipment")?;
            told = format!(" started in {}", found.code);
            entry.equipment = Some(id);
        }
        Ok((entry, told))
    })
}

/// What was read of a value: a number, or one of the two words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Read {
    Number(Number),
    Words(&'static str),
}

impl Read {
    pub fn text(&self) -> &str {
        match self {
            Read::Number(number) => &number.text,
            Read::Words(words) => words,
        }
    }

    fn number(&self) -> Option<rust_decimal::Decimal> {
        match self {
            Read::Number(number) => Some(number.value),
            Read::Words(_) => None,
        }
    }
}

/// Records one value of a running step; outside its limits it stands and asks for a deviation before the step ends.
/// `slot` counts the values the step asks for, from 0.
///
/// Refuses in the order of [`may_record`], then a value that is recorded already.
pub fn value(db: &Db, actor: &Actor, how: &How, slot: usize, read: &Read) -> Result<i64, Failure> {
    let yours = (how, &Reason::none(), read.text());
    enter(db, actor, Act::RecordStep, yours, |_, _, facts| {
        may_record(facts, actor.account)?;
        let slots = slots(&facts.planned, facts.entries);
        let missing = || Failure::missing("value of this step with this number");
        let slot = slots.get(slot).ok_or_else(missing)?;
        if let Some(there) = in_slot(&facts.planned, facts.entries, slot) {
            return Err(StepRefusal::ValueRecorded(there.label()).into());
        }
        let asked = facts.planned.step.values.get(slot.value).ok_or_else(missing)?;
        let entry = NewEntry {
            name: asked.name.clone(),
            point: slot.point.clone(),
            typed: read.text().to_string(),
            value: read.number(),
            unit: asked.unit.clone(),
            verdict: verdict_of(asked, read.text(), read.number()),
            limits: asked.limit_words(),
            ..new(facts, EntryKind::Value)
        };
        let told = format!(": {} {} {}, {}", entry.name, entry.typed, entry.unit, entry.verdict.words());
        Ok((entry, told))
    })
}

/// The filling line stops. Refuses in the order of [`may_stop`].
pub fn stop(db: &Db, actor: &Actor, how: &How, why: &str) -> Result<i64, Failure> {
    enter(db, actor, Act::RecordStep, (how, &Reason::none(), "a stop of the line"), |_, _, facts| {
        may_stop(facts, actor.account)?;
        let entry = NewEntry { typed: why.to_string(), ..new(facts, EntryKind::Stopped) };
        Ok((entry, format!(": the line stopped, {why}")))
    })
}

/// The filling line runs again; a stop beyond the limit of the step stands outside and asks for a deviation.
///
/// Refuses in the order of [`may_record`], then a line that runs.
pub fn resume(db: &Db, actor: &Actor, how: &How) -> Result<i64, Failure> {
    enter(db, actor, Act::RecordStep, (how, &Reason::none(), "the line runs again"), |_, _, facts| {
        may_record(facts, actor.account)?;
        let Some(stopped) = filling::open_stop(&facts.planned, facts.entries) else {
            return Err(StepRefusal::LineRuns.into());
        };
        let minutes = minutes_since(stopped, how, actor);
        let most = facts.planned.step.stop_minutes_most;
        let entry = NewEntry {
            typed: minutes.to_string(),
            value: Some(minutes.into()),
            unit: "min".to_string(),
            verdict: Verdict::of(minutes.into(), None, most.map(Into::into)),
            limits: most.map_or("no limit".to_string(), |most| format!("at most {most}\u{202f}min")),
            answers: Some(stopped.id),
            ..new(facts, EntryKind::Resumed)
        };
        let told = format!(": the line runs again after {minutes} min, {}", entry.verdict.words());
        Ok((entry, told))
    })
}

fn minutes_since(from: &Entry, how: &How, actor: &Actor) -> i64 {
    let to = how.late.happened_at.unwrap_or(actor.at).stored();
    filling::minutes_between(from.instant(), &to, actor.at.zone).unwrap_or_default()
}

/// Notes something beside a step, at any time while the record is open.
pub fn note(db: &Db, actor: &Actor, how: &How, text: &str) -> Result<i64, Failure> {
    enter(db, actor, Act::RecordStep, (how, &Reason::none(), text), |_, _, facts| {
        let entry = NewEntry { typed: text.to_string(), ..new(facts, EntryKind::Note) };
        Ok((entry, format!(": noted “{text}”")))
    })
}

/// Answers what lies outside its limits: opens a deviation that stays with the entry.
///
/// Refuses an entry that is within its limits or answered, then as a deviation does.
pub fn answer(db: &Db, actor: &Actor, how: &How, entry: i64, described: &str) -> Result<i64, Failure> {
    enter(db, actor, Act::RecordStep, (how, &Reason::none(), described), |change, loaded, facts| {
        let open = unanswered(facts.entries, how.step);
        let Some(outside) = open.iter().find(|one| one.id == entry) else {
            return Err(Failure::missing("value outside its limits with this number"));
        };
        let title = format!("{}: {} outside limits", facts.planned.words(), outside.label());
        let step = Some((how.step, facts.planned.words()));
        let field = format!("described.{entry}");
        let (id, number) = open_deviation(change, &loaded.record, step, (&title, described, &field))?;
        let answered = NewEntry {
            typed: described.to_string(),
            deviation: Some(id),
            answers: Some(entry),
            ..new(facts, EntryKind::Answered)
        };
        Ok((answered, format!(": deviation {number} answers {}", outside.label())))
    })
}

/// Ends a step. Where too little was weighed, or it ran too short or too long, `described` says what happened and a
/// deviation is opened in the same act.
///
/// Refuses in the order of [`may_end`].
pub fn end(db: &Db, actor: &Actor, how: &How, described: Option<&str>) -> Result<i64, Failure> {
    enter(
        db,
        actor,
        Act::RecordStep,
        (how, &Reason::none(), "the end of the step"),
        |change, loaded, facts| {
            let present = present(facts.entries, how.step);
            let started = present.iter().find(|one| one.kind == EntryKind::Started);
            let minutes = started.map(|started| minutes_since(started, how, actor)).unwrap_or_default();
            may_end(facts, actor.account, minutes, described.is_some())?;
            let step = facts.planned.step;
            let (least, most) = (step.least_minutes.map(Into::into), step.most_minutes.map(Into::into));
            let verdict = Verdict::of(minutes.into(), least, most);
            let mut entry = NewEntry {
                typed: minutes.to_string(),
                value: Some(minutes.into()),
                unit: "min".to_string(),
                verdict,
                limits: minutes_words(step.least_minutes, step.most_minutes),
                ..new(facts, EntryKind::Ended)
            };
            let mut told = format!(" ended after {minutes} min");
            if let Some(described) = described {
                if verdict != Verdict::Outside && !is_too_little(facts) {
                    return Err(StepRefusal::NothingOutside.into());
                }
                let title = format!("{}: ended outside limits", facts.planned.words());
                let named = Some((how.step, facts.planned.words()));
                let words = (&*title, described, "end_deviation");
                let (id, number) = open_deviation(change, &loaded.record, named, words)?;
                entry.deviation = Some(id);
                told.push_str(&format!(", deviation {number}"));
            }
            Ok((entry, told))
        },
    )
}

fn is_too_little(facts: &StepFacts<'_>) -> bool {
    let Some(target) = target(facts.content, &facts.planned) else { return false };
    let stands = judge(&target, &parts(&weighings(&facts.planned, facts.entries)));
    stands.least.is_some_and(|least| stands.weighed < least)
}

fn minutes_words(least: Option<u32>, most: Option<u32>) -> String {
    match (least, most) {
        (Some(least), Some(most)) => format!("{least} to {most}\u{202f}min"),
        (Some(least), None) => format!("at least {least}\u{202f}min"),
        (None, Some(most)) => format!("at most {most}\u{202f}min"),
        (None, None) => "no limit".to_string(),
    }
}

/// Whether a deviation with this number is of the record's lot and signed by QA to go on under.
fn signed_deviation(change: &Change<'_>, lot: i64, number: Option<i64>) -> Result<Option<i64>, Failure> {
    let Some(number) = number else { return Ok(None) };
    let of_lot = store::deviation::of_lot(change, lot)?;
    let found = of_lot.into_iter().find(|one| one.facts.number == number);
    match found.filter(|one| one.facts.is_continued || one.facts.is_closed) {
        Some(found) => Ok(Some(found.id)),
        None => Err(StepRefusal::DeviationNotSigned(number).into()),
    }
}

/// Skips a step as the record allows, or under a deviation (by its number) that QA signed. Refuses in the order of
/// [`may_skip`].
pub fn skip(db: &Db, actor: &Actor, how: &How, why: &Reason, deviation: Option<i64>) -> Result<i64, Failure> {
    enter(db, actor, Act::SkipStep, (how, why, "skipped"), |change, loaded, facts| {
        let signed = signed_deviation(change, loaded.record.lot, deviation);
        let signed = at_field(signed, "skip_deviation")?;
        may_skip(facts, signed.is_some())?;
        let typed = why.text().unwrap_or_default().to_string();
        Ok((NewEntry { typed, deviation: signed, ..new(facts, EntryKind::Skipped) }, " skipped".to_string()))
    })
}

/// Begins a done step again as the record allows, or under a deviation that QA signed. Its first run stays. Refuses in
/// the order of [`may_repeat`].
pub fn repeat(
    db: &Db,
    actor: &Actor,
    how: &How,
    why: &Reason,
    deviation: Option<i64>,
) -> Result<i64, Failure> {
    enter(db, actor, Act::RepeatStep, (how, why, "repeated"), |change, loaded, facts| {
        let signed = signed_deviation(change, loaded.record.lot, deviation);
        let signed = at_field(signed, "repeat_deviation")?;
        may_repeat(facts, signed.is_some())?;
        let typed = why.text().unwrap_or_default().to_string();
        let bare = new(facts, EntryKind::Repeated);
        let entry = NewEntry { run: bare.run + 1, typed, deviation: signed, ..bare };
        let told = format!(" begins again, run {}", entry.run);
        Ok((entry, told))
    })
}
