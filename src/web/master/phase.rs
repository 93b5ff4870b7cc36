//! One phase: its name, the order of its steps, its theoretical yield with limits.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::rows::shown;
use super::super::visit::Visit;
use super::{Draft, place};
use crate::domain::failure::Failure;
use crate::domain::master::{Phase, TheoreticalYield};
use crate::domain::typed::NumberRule;

const LEAD: &str = "A phase ends with a yield where one is stated. Outside its limits a deviation is opened.";

/// The place of the phase, and the phase where it is written already.
fn asked(visit: &Visit, draft: &Draft) -> Result<(usize, Option<Phase>), Failure> {
    let phases = &draft.master()?.phases;
    let at = place(visit, "phase", phases.len())?;
    Ok((at, phases.get(at).cloned()))
}

fn phase_form(visit: &Visit, draft: &Draft) -> Result<Form, Failure> {
    let (at, phase) = asked(visit, draft)?;
    let is_new = phase.is_none();
    let phase = phase.unwrap_or_default();
    let theory = phase.theory.as_ref();
    let button = if is_new { "Add the phase" } else { "Save the phase" };
    let form = draft
        .form(visit, &format!("/phases/{}", at + 1), button)?
        .field(
            Field::new("name", "Name of the phase", Entry::Text)
                .hint("Such as Dispensing, Compounding, Filling.")
                .value(phase.name.as_str()),
        )
        .field(
            Field::new("any_order", "Its steps may be carried out in any order", Entry::Tick)
                .value(if phase.is_in_any_order { "yes" } else { "" }),
        )
        .heading("Yield", "Leave all four empty where no yield is taken. The last phase always has one.")
        .field(
            Field::new("yield_unit", "Unit of the yield", Entry::Text)
                .width(12)
                .hint("L, kg, bottles.")
                .value(theory.map(|one| one.unit.clone()).unwrap_or_default()),
        )
        .field(
            Field::new("per_size_unit", "Theoretical yield for one unit of batch size", Entry::Decimal)
                .width(12)
                .hint("1 for litres of bulk; 10 for bottles of 100 mL from litres.")
                .value(shown(theory.map(|one| one.per_size_unit))),
        )
        .field(
            Field::new("least_percent", "Least yield, % of theory", Entry::Decimal)
                .width(8)
                .value(shown(theory.map(|one| one.least_percent))),
        )
        .field(
            Field::new("most_percent", "Most yield, % of theory", Entry::Decimal)
                .width(8)
                .value(shown(theory.map(|one| one.most_percent))),
        );
    Ok(if is_new { form } else { form.other_button("then", "remove", "Remove the phase with its steps") })
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let draft = Draft::of(visit)?;
    let form = phase_form(visit, &draft)?;
    draft.show(200, visit, "phase", LEAD, form)
}

enum Wish {
    Remove,
    Write { name: String, is_in_any_order: bool, theory: Option<TheoreticalYield> },
}

fn typed_theory(typed: &mut Typed<'_>) -> Option<Option<TheoreticalYield>> {
    let names = ["yield_unit", "per_size_unit", "least_percent", "most_percent"];
    if names.iter().all(|name| typed.raw(name).is_empty()) {
        return Some(None);
    }
    let unit = typed.text("yield_unit", 20);
    let per = typed.decimal("per_size_unit", &NumberRule::between("Theoretical yield", 0, 1_000_000));
    let least = typed.decimal("least_percent", &NumberRule::between("Least yield", 0, 200));
    let most = typed.decimal("most_percent", &NumberRule::between("Most yield", 0, 200));
    Some(Some(TheoreticalYield {
        unit: unit?,
        per_size_unit: per?.value,
        least_percent: least?.value,
        most_percent: most?.value,
    }))
}

fn typed_wish(typed: &mut Typed<'_>) -> Option<(Wish, String)> {
    let seen = typed.raw("seen");
    if typed.raw("then") == "remove" {
        return Some((Wish::Remove, seen));
    }
    let name = typed.text("name", 80);
    let theory = typed_theory(typed);
    let is_in_any_order = typed.tick("any_order");
    Some((Wish::Write { name: name?, is_in_any_order, theory: theory? }, seen))
}

pub fn write(visit: &Visit) -> Outcome {
    let draft = Draft::of(visit)?;
    let (at, _) = asked(visit, &draft)?;
    form::submit(
        visit,
        phase_form(visit, &draft)?,
        typed_wish,
        |actor, (wish, seen)| {
            draft.rewrite(visit, actor, &seen, |master| match wish {
                Wish::Remove => {
                    master.phases.remove(at);
                }
                Wish::Write { name, is_in_any_order, theory } => {
                    let steps = master.phases.get(at).map(|phase| phase.steps.clone()).unwrap_or_default();
                    let phase = Phase { name, is_in_any_order, theory, steps };
                    match master.phases.get_mut(at) {
                        Some(there) => *there = phase,
                        None => master.phases.push(phase),
                    }
                }
            })
        },
        |()| format!("/formulation-versions/{}", draft.version.id),
        |status, form| draft.show(status, visit, "phase", LEAD, form),
    )
}
