//! The second pair of eyes: checking a step, and weighing again before the first figure is shown.

use super::plain;
use super::step::{How, enter, new};
use super::weighing::balance;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::rule::{may_check, may_look, to_weigh_again};
use crate::domain::batch::weighing::{TypedWeight, net, target};
use crate::domain::batch::{EntryKind, NewEntry, Verdict, Weighed};
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::store::door::Db;

/// A second person states that the step was done as it is recorded. Refuses in the order of [`may_check`].
pub fn check(db: &Db, actor: &Actor, how: &How) -> Result<i64, Failure> {
    enter(db, actor, Act::CheckStep, (how, &Reason::none(), "the check"), |_, _, facts| {
        may_check(facts, actor.account)?;
        Ok((new(facts, EntryKind::Checked), " checked".to_string()))
    })
}

/// A second person weighs one container again without having seen the first figure. A difference beyond what the
/// record allows stands outside and asks for a deviation before the check.
///
/// Refuses in this order: as [`may_look`]; no such weighing; the figures; the balance.
pub fn weigh_again(
    db: &Db,
    actor: &Actor,
    how: &How,
    first: i64,
    balance_chosen: Option<i64>,
    typed: &TypedWeight,
) -> Result<i64, Failure> {
    let yours = (how, &Reason::none(), "a second weighing");
    enter(db, actor, Act::CheckStep, yours, |change, _, facts| {
        may_look(facts, actor.account)?;
        let missing = || Failure::missing("weighing to be made again with this number");
        let open = to_weigh_again(facts);
        let first = open.iter().find(|one| one.id == first).ok_or_else(missing)?;
        let target = target(facts.content, &facts.planned).ok_or_else(missing)?;
        let (text, value) = net(typed, target.row.rounding_step, &target.row.unit)?;
        let (instrument, code, balance_check) = balance(change, balance_chosen)?;
        let within = facts.planned.step.blind_within.unwrap_or_default();
        let difference = first.value.map(|value_first| (value_first - value).abs()).unwrap_or_default();
        let verdict = if difference <= within { Verdict::Within } else { Verdict::Outside };
        let shown = |number: Option<&crate::domain::typed::Number>| {
            number.map(|number| number.text.clone()).unwrap_or_default()
        };
        let entry = NewEntry {
            typed: text,
            value: Some(value),
            unit: target.row.unit.clone(),
            verdict,
            limits: format!("within {within}\u{202f}{} of the first", target.row.unit),
            weighed: Weighed {
                gross: shown(typed.gross.as_ref()),
                tare: shown(typed.tare.as_ref()),
                material_lot: first.weighed.material_lot.clone(),
                balance: code.clone(),
                balance_check,
                ..Weighed::default()
            },
            material_lot: first.material_lot,
            instrument: Some(instrument),
            answers: Some(first.id),
            ..new(facts, EntryKind::SecondWeighing)
        };
        let told = format!(
            ": weighed again on {code}, {} {} apart, {}",
            plain(difference),
            target.row.unit,
            verdict.words()
        );
        Ok((entry, told))
    })
}
