//! Corrections: a new entry supersedes the old one, with a reason; both stay, and the ledger follows the weight.

use rust_decimal::Decimal;

use super::step::{How, Read, enter, new};
use super::weighing::take;
use super::{Loaded, at_field};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::rule::{StepFacts, may_correct, verdict_of};
use crate::domain::batch::state::StepState;
use crate::domain::batch::state::own_state;
use crate::domain::batch::weighing::{TypedWeight, judge, net, target, weighings};
use crate::domain::batch::{Entry, EntryKind, NewEntry, Verdict, Weighed};
use crate::domain::failure::Failure;
use crate::domain::master::scale::unit_of;
use crate::domain::reason::Reason;
use crate::store;
use crate::store::door::{Change, Db};

/// What an entry becomes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Corrected {
    Read(Read),
    Weight(TypedWeight),
    Words(String),
}

/// Corrects an entry. It is judged anew; outside its limits it asks for a deviation anew.
///
/// Refuses in the order of [`may_correct`], then as its kind does.
pub fn correct(
    db: &Db,
    actor: &Actor,
    how: &How,
    entry: i64,
    becomes: &Corrected,
    reason: &Reason,
) -> Result<i64, Failure> {
    enter(db, actor, Act::CorrectStep, (how, reason, "a correction"), |change, loaded, facts| {
        let found = facts.entries.iter().find(|one| one.id == entry && one.step == how.step);
        let Some(was) = found else { return Err(Failure::missing("entry of this step with this number")) };
        may_correct(facts, was, actor.account)?;
        let is = match becomes {
            Corrected::Read(read) => value(facts, was, read)?,
            Corrected::Weight(typed) => weight(change, loaded, facts, was, typed)?,
            Corrected::Words(text) => NewEntry { typed: text.clone(), ..kept(facts, was) },
        };
        let is_hidden = facts.planned.step.blind_within.is_some() && was.kind == EntryKind::Weighing;
        let told = match is_hidden {
            true => format!(": {} corrected", was.label()),
            false => format!(": {} was {}, is {} {}", was.label(), was.shown(), is.typed, is.unit),
        };
        Ok((is, told.trim_end().to_string()))
    })
}

/// The entry as it was, about to be superseded; what is late stays as late as it was.
fn kept(facts: &StepFacts<'_>, was: &Entry) -> NewEntry {
    NewEntry {
        run: was.run,
        name: was.name.clone(),
        point: was.point.clone(),
        unit: was.unit.clone(),
        limits: was.limits.clone(),
        weighed: was.weighed.clone(),
        material_lot: was.material_lot,
        stock_entry: was.stock_entry,
        instrument: was.instrument,
        answers: was.answers,
        happened_at: Some(was.instant().to_string()),
        supersedes: Some(was.id),
        ..new(facts, was.kind)
    }
}

fn value(facts: &StepFacts<'_>, was: &Entry, read: &Read) -> Result<NewEntry, Failure> {
    let asked = facts.planned.step.values.iter().find(|one| one.name == was.name);
    let asked = asked.ok_or_else(|| Failure::missing("value of this step"))?;
    let number = match read {
        Read::Number(number) => Some(number.value),
        Read::Words(_) => None,
    };
    Ok(NewEntry {
        typed: read.text().to_string(),
        value: number,
        verdict: verdict_of(asked, read.text(), number),
        ..kept(facts, was)
    })
}

fn weight(
    change: &mut Change<'_>,
    loaded: &Loaded,
    facts: &StepFacts<'_>,
    was: &Entry,
    typed: &TypedWeight,
) -> Result<NewEntry, Failure> {
    let target =
        target(facts.content, &facts.planned).ok_or_else(|| Failure::missing("weight of this step"))?;
    let (text, value) = net(typed, target.row.rounding_step, &target.row.unit)?;
    let shown = |number: &Option<crate::domain::typed::Number>| {
        number.as_ref().map(|number| number.text.clone()).unwrap_or_default()
    };
    let weighed = Weighed { gross: shown(&typed.gross), tare: shown(&typed.tare), ..was.weighed.clone() };
    let mut is = NewEntry { typed: text, value: Some(value), weighed, ..kept(facts, was) };
    if was.kind == EntryKind::SecondWeighing {
        let first = facts.entries.iter().find(|one| Some(one.id) == was.answers).and_then(|one| one.value);
        let within = facts.planned.step.blind_within.unwrap_or_default();
        let is_apart = first.is_some_and(|first| (first - value).abs() > within);
        is.verdict = if is_apart { Verdict::Outside } else { Verdict::Within };
        return Ok(is);
    }
    let others = weighings(&facts.planned, facts.entries).into_iter().filter(|one| one.id != was.id);
    let mut all: Vec<(Decimal, Option<Decimal>)> =
        others.filter_map(|one| Some((one.value?, one.weighed.full_target))).collect();
    all.push((value, was.weighed.full_target));
    let stands = judge(&target, &all);
    // While the step runs, too little only means that more is to come.
    let is_running = own_state(&facts.planned, facts.entries) == StepState::InProgress;
    is.verdict = match stands.verdict {
        Verdict::Outside if is_running && !stands.is_above() => Verdict::Within,
        judged => judged,
    };
    let difference = value - was.value.unwrap_or_default();
    if let Some(entry) = follow(change, loaded, (was, target.row.material), difference)? {
        is.stock_entry = Some(entry);
    }
    Ok(is)
}

/// The ledger follows a corrected weight: more is taken, less comes back.
fn follow(
    change: &mut Change<'_>,
    loaded: &Loaded,
    (was, material): (&Entry, i64),
    difference: Decimal,
) -> Result<Option<i64>, Failure> {
    let Some(lot) = was.material_lot.filter(|_| !difference.is_zero()) else { return Ok(None) };
    let found = store::material_lot::get(change, lot)?;
    if difference > Decimal::ZERO {
        return take(change, loaded, material, &found, (difference, &was.unit)).map(Some);
    }
    let factor = unit_of(&was.unit).zip(unit_of(&found.facts.unit)).map(|((_, from), (_, to))| from / to);
    let back = -difference * factor.unwrap_or(Decimal::ONE);
    let why = format!("weighing corrected in {}", loaded.record.number);
    let entry = crate::acts::material_lot::return_inside(change, lot, loaded.record.lot, back, &why);
    at_field(entry, "net").map(Some)
}
