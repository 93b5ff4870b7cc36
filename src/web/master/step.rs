//! One step: what is done, in which equipment, which values with which limits, who checks it.

use rust_decimal::Decimal;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::rows::{self, shown};
use super::super::visit::Visit;
use super::{Draft, place};
use crate::domain::failure::Failure;
use crate::domain::master::{Dispense, Step, StepKind, StepValue};
use crate::domain::typed::NumberRule;

const LEAD: &str =
    "What stands here is what the operator reads at the bench, and what the values are judged by.";
const VALUE_HEADS: [&str; 6] =
    ["Value", "Unit", "At least", "At most", "In-process check", "Answered in words"];

/// Places of phase and step, counted from 0, and the step where it is written already.
fn asked(visit: &Visit, draft: &Draft) -> Result<(usize, usize, Option<Step>), Failure> {
    let phases = &draft.master()?.phases;
    let at = place(visit, "phase", phases.len())?;
    let phase = phases.get(at).ok_or_else(|| Failure::missing("phase of this record"))?;
    let step = place(visit, "step", phase.steps.len())?;
    Ok((at, step, phase.steps.get(step).cloned()))
}

fn minutes(value: Option<u32>) -> String {
    value.map(|value| value.to_string()).unwrap_or_default()
}

fn tick(name: &str, label: &str, is_so: bool) -> Field {
    Field::new(name, label, Entry::Tick).value(if is_so { "yes" } else { "" })
}

fn value_fields(row: usize, value: Option<&StepValue>) -> Vec<Field> {
    let field = |what: &str, label: &str, entry: Entry| {
        Field::new(&rows::name("value", row, what), &format!("{label}, value {row}"), entry)
    };
    let text = |found: Option<&String>| found.cloned().unwrap_or_default();
    let is_so = |is_so: bool| if is_so { "yes" } else { "" };
    vec![
        field("name", "Name", Entry::Text).width(20).value(text(value.map(|one| &one.name))),
        field("unit", "Unit", Entry::Text).width(8).value(text(value.map(|one| &one.unit))),
        field("least", "At least", Entry::Decimal).width(8).value(shown(value.and_then(|one| one.least))),
        field("most", "At most", Entry::Decimal).width(8).value(shown(value.and_then(|one| one.most))),
        field("check", "In-process check", Entry::Tick)
            .value(is_so(value.is_some_and(|one| one.is_in_process_check))),
        field("words", "Answered in words", Entry::Tick).value(is_so(value.is_some_and(|one| one.is_words))),
    ]
}

fn work_fields(form: Form, draft: &Draft, step: &Step) -> Form {
    let materials = draft.content.ingredients.iter().map(|one| (one.material.to_string(), one.name.clone()));
    let share = step.dispense.map(|one| one.share_percent);
    form.field(
        Field::new("kind", "What is done", Entry::Select)
            .choices(StepKind::ALL.map(|kind| (kind.words(), kind.words())))
            .value(if step.title.is_empty() { "" } else { step.kind.words() }),
    )
    .field(Field::new("title", "Title", Entry::Text).value(step.title.as_str()))
    .field(Field::new("instruction", "Instruction", Entry::Long).value(step.instruction.as_str()))
    .field(
        Field::new("material", "Material that is dispensed", Entry::Select)
            .choices(materials)
            .hint("Only for a step that dispenses.")
            .value(step.dispense.map(|one| one.material.to_string()).unwrap_or_default()),
    )
    .field(
        Field::new("share", "Share of its amount, %", Entry::Decimal)
            .width(8)
            .hint("Empty means all of it, 100.")
            .value(shown(share.filter(|share| *share != Decimal::ONE_HUNDRED))),
    )
    .field(
        Field::new("equipment_class", "Class of equipment", Entry::Text)
            .width(20)
            .hint("Such as mixing vessel, high-shear mixer, colloid mill, filling line. Empty without one.")
            .value(step.equipment_class.as_str()),
    )
}

fn time_fields(form: Form, step: &Step) -> Form {
    form.heading("Time", "Measured from the start of the step to its end.")
        .field(
            Field::new("least_minutes", "Shortest time, min", Entry::Count)
                .width(8)
                .value(minutes(step.least_minutes)),
        )
        .field(
            Field::new("most_minutes", "Longest time, min", Entry::Count)
                .width(8)
                .hint("A hold always has one.")
                .value(minutes(step.most_minutes)),
        )
        .field(
            Field::new("stop_minutes", "Longest stop while filling, min", Entry::Count)
                .width(8)
                .value(minutes(step.stop_minutes_most)),
        )
}

fn step_form(visit: &Visit, draft: &Draft) -> Result<Form, Failure> {
    let (phase, at, found) = asked(visit, draft)?;
    let is_new = found.is_none();
    let step = found.unwrap_or_default();
    let count = rows::count(visit, "value", step.values.len(), 4);
    let values = (1..=count).map(|row| value_fields(row, step.values.get(row - 1))).collect();
    let button = if is_new { "Add the step" } else { "Save the step" };
    let form = draft.form(visit, &format!("/phases/{}/steps/{}", phase + 1, at + 1), button)?;
    let form = work_fields(form, draft, &step)
        .heading("Values", "Parameters and in-process checks, each with its limits. Empty rows are left out.")
        .grid("Parameters and in-process checks", &VALUE_HEADS, values);
    let form = time_fields(form, &step)
        .heading("Who, and what may be", "")
        .field(tick("needs_check", "A second person checks it", step.needs_check))
        .field(
            Field::new(
                "blind_within",
                "Blind second weighing: may differ by, in the unit weighed in",
                Entry::Decimal,
            )
            .width(8)
            .hint("The second person weighs before the first figures are shown. Empty without one.")
            .value(shown(step.blind_within)),
        )
        .field(tick("may_repeat", "May be repeated", step.may_repeat))
        .field(tick("may_skip", "May be skipped", step.may_skip))
        .other_button("then", "next", "Save and write the next step");
    Ok(match (is_new, at) {
        (true, _) => form,
        (false, 0) => form.other_button("then", "remove", "Remove the step"),
        _ => form.other_button("then", "up", "Move it up").other_button("then", "remove", "Remove the step"),
    })
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let draft = Draft::of(visit)?;
    let form = step_form(visit, &draft)?;
    draft.show(200, visit, "step", LEAD, form)
}

fn typed_value(typed: &mut Typed<'_>, row: usize) -> Option<Option<StepValue>> {
    let at = |what: &str| rows::name("value", row, what);
    let (least, most) = (typed.raw(&at("least")), typed.raw(&at("most")));
    if typed.raw(&at("name")).is_empty() {
        if least.is_empty() && most.is_empty() {
            return Some(None);
        }
        typed.fault(&at("name"), format!("Value {row} has no name. Type it, or empty the row."));
        return None;
    }
    let name = typed.text(&at("name"), 60);
    let unit = typed.maybe_text(&at("unit"), 20);
    let least = rows::maybe_decimal(typed, &at("least"), &format!("At least, value {row}"));
    let most = rows::maybe_decimal(typed, &at("most"), &format!("At most, value {row}"));
    let (is_in_process_check, is_words) = (typed.tick(&at("check")), typed.tick(&at("words")));
    let unit = unit?.unwrap_or_default();
    Some(Some(StepValue { name: name?, unit, least: least?, most: most?, is_in_process_check, is_words }))
}

fn typed_minutes(typed: &mut Typed<'_>, name: &str) -> Option<Option<u32>> {
    Some(typed.maybe_count(name, 0, 1_000_000)?.and_then(|minutes| u32::try_from(minutes).ok()))
}

fn typed_step(typed: &mut Typed<'_>, count: usize) -> Option<Step> {
    let kind = typed.choice("kind").and_then(|words| StepKind::from_words(&words));
    let title = typed.text("title", 120);
    let instruction = typed.text("instruction", 1000);
    let material = typed.maybe_record("material");
    let share = typed.maybe_decimal("share", &NumberRule::between("Share", 0, 100));
    let equipment_class = typed.maybe_text("equipment_class", 60);
    let values: Vec<_> = (1..=count).map(|row| typed_value(typed, row)).collect();
    let least_minutes = typed_minutes(typed, "least_minutes");
    let most_minutes = typed_minutes(typed, "most_minutes");
    let stop_minutes_most = typed_minutes(typed, "stop_minutes");
    let blind_within =
        typed.maybe_decimal("blind_within", &NumberRule::between("May differ by", 0, 1_000_000));
    let share_percent = share?.map_or(Decimal::ONE_HUNDRED, |number| number.value);
    Some(Step {
        kind: kind?,
        title: title?,
        instruction: instruction?,
        dispense: material?.map(|material| Dispense { material, share_percent }),
        equipment_class: equipment_class?.unwrap_or_default(),
        values: rows::all(values)?.into_iter().flatten().collect(),
        needs_check: typed.tick("needs_check"),
        blind_within: blind_within?.map(|number| number.value),
        may_repeat: typed.tick("may_repeat"),
        may_skip: typed.tick("may_skip"),
        least_minutes: least_minutes?,
        most_minutes: most_minutes?,
        stop_minutes_most: stop_minutes_most?,
    })
}

enum Wish {
    Remove,
    MoveUp,
    Write(Box<Step>),
}

fn typed_wish(typed: &mut Typed<'_>, count: usize) -> Option<(Wish, String)> {
    let seen = typed.raw("seen");
    let wish = match typed.raw("then").as_str() {
        "remove" => Wish::Remove,
        "up" => Wish::MoveUp,
        _ => Wish::Write(Box::new(typed_step(typed, count)?)),
    };
    Some((wish, seen))
}

pub fn write(visit: &Visit) -> Outcome {
    let draft = Draft::of(visit)?;
    let (phase, at, found) = asked(visit, &draft)?;
    let count = rows::count(visit, "value", found.map_or(0, |step| step.values.len()), 4);
    let wants_next = visit.form.get("then") == Some("next");
    form::submit(
        visit,
        step_form(visit, &draft)?,
        |typed| typed_wish(typed, count),
        |actor, (wish, seen)| {
            draft.rewrite(visit, actor, &seen, |master| {
                let steps = &mut master.phases[phase].steps;
                match wish {
                    Wish::Remove => drop(steps.remove(at)),
                    Wish::MoveUp => steps.swap(at, at.saturating_sub(1)),
                    Wish::Write(step) => match steps.get_mut(at) {
                        Some(there) => *there = *step,
                        None => steps.push(*step),
                    },
                }
            })
        },
        |()| {
            let path = format!("/formulation-versions/{}", draft.version.id);
            if wants_next { format!("{path}/phases/{}/steps/{}", phase + 1, at + 2) } else { path }
        },
        |status, form| draft.show(status, visit, "step", LEAD, form),
    )
}
