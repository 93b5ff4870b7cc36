//! The forms of a step: what this person can do in it now, each recorded by itself.

use super::super::field::{Entry as Kind, Field};
use super::super::form::Form;
use super::super::visit::Visit;
use super::late::LateWords;
use crate::acts::batch::Loaded;
use crate::domain::act::Act;
use crate::domain::batch::refusal::StepRefusal;
use crate::domain::batch::rule::{self, StepFacts, to_weigh_again};
use crate::domain::batch::state::{Slot, StepState, in_slot, slots, unanswered};
use crate::domain::batch::{Entry, EntryKind, filling};
use crate::domain::equipment;
use crate::domain::failure::Failure;
use crate::domain::instrument;
use crate::domain::master::{StepKind, StepValue};
use crate::store;

/// A form with its heading; one that is seldom used is folded away.
pub struct Section {
    pub heading: String,
    pub note: String,
    pub form: Form,
    pub is_folded: bool,
}

/// What the words of an in-process check can be.
pub const WORDS: [&str; 2] = ["conforms", "does not conform"];

/// A bare form of a step, bound to what the page shows and carrying an earlier time.
pub fn bare(visit: &Visit, loaded: &Loaded, step: usize, path: &str, button: &str) -> Result<Form, Failure> {
    let action = format!("/batches/{}/steps/{step}{path}", loaded.record.id);
    let newest = loaded.entries.iter().filter(|one| one.step == step).map(|one| one.id).max();
    let seen = newest.unwrap_or_default().to_string();
    let form = Form::new(visit, &action, button)?.hide("seen", seen).quiet();
    Ok(LateWords::of(visit).hide_in(form))
}

fn long(name: &str, label: &str, hint: &str) -> Field {
    Field::new(name, label, Kind::Long).hint(hint)
}

fn decimal(name: &str, label: &str) -> Field {
    Field::new(name, label, Kind::Decimal).width(12)
}

pub fn start(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let planned = loaded.facts(step)?.planned;
    let mut form = bare(visit, loaded, step, "/start", "Start this step")?;
    let class = &planned.step.equipment_class;
    if !class.is_empty() {
        let today = visit.at.date();
        let found = visit.read(|reader| store::equipment::of_class(reader, class))?;
        let choices = found.iter().map(|one| {
            (one.id.to_string(), format!("{} {}: {}", one.code, one.name, equipment::state_words(one, today)))
        });
        form = form
            .field(Field::new("equipment", &format!("Equipment: {class}"), Kind::Select).choices(choices));
    }
    if planned.step.kind == StepKind::Fill {
        form = form.field(Field::new("agitation", "The agitation is on", Kind::Tick));
    }
    Ok(Form { is_primary: true, ..form })
}

fn balances(visit: &Visit, name: &str) -> Result<Field, Failure> {
    let today = visit.at.date();
    let found = visit.read(|reader| store::instrument::usable_kinds(reader, "balance", today))?;
    let choices: Vec<(String, String)> = found
        .iter()
        .map(|one| {
            let state = match instrument::may_use(one, today) {
                Ok(()) => "may be used".to_string(),
                Err(why) => why.to_string(),
            };
            (one.id.to_string(), format!("{} {}: {state}", one.code, one.name))
        })
        .collect();
    let usable: Vec<_> = found.iter().filter(|one| instrument::may_use(one, today).is_ok()).collect();
    let only = if usable.len() == 1 { usable[0].id.to_string() } else { String::new() };
    Ok(Field::new(name, "Balance", Kind::Select).choices(choices).value(only))
}

fn weights(form: Form, end: &str, unit: &str) -> Form {
    form.field(decimal(&format!("gross{end}"), &format!("Gross, {unit}")))
        .field(decimal(&format!("tare{end}"), &format!("Tare, {unit}")))
        .field(
            decimal(&format!("net{end}"), &format!("Net, {unit}"))
                .hint("Alone where the balance was tared; else it may stay empty."),
        )
}

pub fn weighing(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let facts = loaded.facts(step)?;
    let unit = unit_of(&facts);
    let scanned = visit.query.get("material_lot").unwrap_or_default().to_string();
    let form = bare(visit, loaded, step, "/weighing", "Record this weighing")?
        .field(
            Field::new("material_lot", "Material lot: scan its label, or type its number", Kind::Text)
                .width(20)
                .value(scanned),
        )
        .field(balances(visit, "balance")?);
    let form = Form { is_primary: true, ..weights(form, "", &unit) };
    let asked = visit.form.get("weigh_deviation").is_some();
    Ok(if asked { with_words(form, "weigh_deviation") } else { form })
}

/// Adds the box that opens a deviation.
pub fn with_words(form: Form, name: &str) -> Form {
    if form.fields().any(|field| field.name == name) {
        return form;
    }
    form.field(long(name, "What happened", "Only if it stays as it is: this opens a deviation."))
}

fn unit_of(facts: &StepFacts<'_>) -> String {
    let dispense = facts.planned.step.dispense;
    let row = dispense.and_then(|dispense| facts.content.master.ingredient(dispense.material));
    row.map(|row| row.unit.clone()).unwrap_or_default()
}

/// The value of a slot: its words, its unit, and the entry that is there.
pub fn asked<'a>(facts: &StepFacts<'a>, slot: &Slot) -> Option<(&'a StepValue, String)> {
    let value = facts.planned.step.values.get(slot.value)?;
    let unit = if value.unit.is_empty() { String::new() } else { format!(", {}", value.unit) };
    let point = if slot.point.is_empty() { String::new() } else { format!(", {}", slot.point) };
    Some((value, format!("{}{point}{unit}", value.name)))
}

pub fn value(visit: &Visit, loaded: &Loaded, step: usize, at: usize) -> Result<Form, Failure> {
    let facts = loaded.facts(step)?;
    let missing = || Failure::missing("value of this step with this number");
    let slots = slots(&facts.planned, facts.entries);
    let (value, label) = slots.get(at).and_then(|slot| asked(&facts, slot)).ok_or_else(missing)?;
    let name = format!("reading.{}", at + 1);
    let field = if value.is_words {
        Field::new(&name, &label, Kind::Radios).choices(WORDS.map(|one| (one, one)))
    } else {
        decimal(&name, &label)
    };
    let field = field.hint(&value.limit_words());
    Ok(bare(visit, loaded, step, &format!("/values/{}", at + 1), "Record")?.field(field))
}

pub fn answer(visit: &Visit, loaded: &Loaded, step: usize, entry: &Entry) -> Result<Form, Failure> {
    let name = format!("described.{}", entry.id);
    let label = format!("{} {}: what happened?", entry.label(), entry.shown());
    let hint = "At least twenty characters. A deviation is opened and stays with this value.";
    let path = format!("/answers/{}", entry.id);
    Ok(bare(visit, loaded, step, &path, "Open the deviation")?.field(long(&name, &label, hint)))
}

pub fn end(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let form = bare(visit, loaded, step, "/end", "End this step")?;
    let form = Form { is_primary: !has_open(&loaded.facts(step)?), ..form };
    let asked = visit.form.get("end_deviation").is_some();
    Ok(if asked { with_words(form, "end_deviation") } else { form })
}

fn has_open(facts: &StepFacts<'_>) -> bool {
    !rule::missing(facts).is_empty() || facts.planned.step.dispense.is_some()
}

pub fn stop(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    Ok(bare(visit, loaded, step, "/stop", "The line stops now")?.field(Field::new(
        "stop_why",
        "Why it stops",
        Kind::Text,
    )))
}

pub fn resume(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let form = bare(visit, loaded, step, "/resume", "The line runs again")?;
    Ok(Form { is_primary: true, ..form })
}

pub fn note(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    Ok(bare(visit, loaded, step, "/note", "Keep the note")?.field(long("note", "Note", "")))
}

fn under(form: Form, prefix: &str, is_allowed: bool) -> Form {
    let hint = if is_allowed { "Not needed: the record allows it." } else { "Signed by QA to go on under." };
    form.field(Field::new(&format!("{prefix}_reason"), "Why", Kind::Text).hint("At least ten characters."))
        .field(
            Field::new(&format!("{prefix}_deviation"), "Number of the deviation", Kind::Count)
                .width(8)
                .hint(hint),
        )
}

pub fn skip(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let may = loaded.facts(step)?.planned.step.may_skip;
    Ok(under(bare(visit, loaded, step, "/skip", "Skip this step")?, "skip", may))
}

pub fn repeat(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let may = loaded.facts(step)?.planned.step.may_repeat;
    Ok(under(bare(visit, loaded, step, "/repeat", "Begin it again")?, "repeat", may))
}

pub fn check(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Form, Failure> {
    let form = bare(visit, loaded, step, "/check", "Checked: done as it is recorded")?;
    Ok(Form { is_primary: true, ..form })
}

pub fn second(visit: &Visit, loaded: &Loaded, step: usize, first: &Entry) -> Result<Form, Failure> {
    let end = format!(".{}", first.id);
    let unit = unit_of(&loaded.facts(step)?);
    let form = bare(visit, loaded, step, &format!("/second/{}", first.id), "Record what the balance shows")?
        .field(balances(visit, &format!("balance{end}"))?);
    Ok(weights(form, &end, &unit))
}

struct Sections(Vec<Section>);

impl Sections {
    fn add(&mut self, heading: &str, note: impl Into<String>, form: Form) {
        self.0.push(Section { heading: heading.to_string(), note: note.into(), form, is_folded: false });
    }

    fn fold(&mut self, heading: &str, form: Form) {
        self.0.push(Section { heading: heading.to_string(), note: String::new(), form, is_folded: true });
    }
}

/// Every form this person can use in the step now, in the order of the work.
pub fn all(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Vec<Section>, Failure> {
    let facts = loaded.facts(step)?;
    let mut sections = Sections(Vec::new());
    if rule::may_enter(&facts).is_err() {
        return Ok(sections.0);
    }
    let account = visit.actor()?.account;
    if visit.may(Act::RecordStep) {
        match facts.state() {
            StepState::Ready => before(visit, loaded, step, &facts, &mut sections)?,
            StepState::InProgress if rule::may_record(&facts, account).is_ok() => {
                running(visit, loaded, step, &facts, &mut sections)?;
            }
            _ => {}
        }
        for open in unanswered(facts.entries, step) {
            sections.add("Outside its limits", "", answer(visit, loaded, step, open)?);
        }
    }
    if visit.may(Act::CheckStep) && rule::may_look(&facts, account).is_ok() {
        for first in to_weigh_again(&facts) {
            let heading = format!("Weigh {} again", first.weighed.material_lot);
            let note = "You weigh before the first figures are shown. Type what the balance shows.";
            sections.add(&heading, note, second(visit, loaded, step, first)?);
        }
        if rule::may_check(&facts, account).is_ok() {
            sections.add("Second person", "", check(visit, loaded, step)?);
        }
    }
    if facts.state() == StepState::Done && visit.may(Act::RepeatStep) {
        sections.fold("Do this step again", repeat(visit, loaded, step)?);
    }
    if visit.may(Act::RecordStep) {
        sections.fold("Note something", note(visit, loaded, step)?);
    }
    Ok(sections.0)
}

fn before(
    visit: &Visit,
    loaded: &Loaded,
    step: usize,
    facts: &StepFacts<'_>,
    sections: &mut Sections,
) -> Result<(), Failure> {
    if rule::may_start(facts).is_ok() {
        sections.add("Start", "", start(visit, loaded, step)?);
        sections.fold("Skip this step", skip(visit, loaded, step)?);
    }
    Ok(())
}

fn running(
    visit: &Visit,
    loaded: &Loaded,
    step: usize,
    facts: &StepFacts<'_>,
    sections: &mut Sections,
) -> Result<(), Failure> {
    if filling::open_stop(&facts.planned, facts.entries).is_some() {
        sections.add("The line stands", "", resume(visit, loaded, step)?);
        return Ok(());
    }
    if facts.planned.step.dispense.is_some() {
        sections.add("Weigh", "", weighing(visit, loaded, step)?);
    }
    for (at, slot) in slots(&facts.planned, facts.entries).iter().enumerate() {
        let heading = facts.planned.step.values.get(slot.value).map(|value| value.name.as_str());
        if in_slot(&facts.planned, facts.entries, slot).is_none() {
            let heading = match slot.point.is_empty() {
                true => heading.unwrap_or_default().to_string(),
                false => format!("{}, {}", heading.unwrap_or_default(), slot.point),
            };
            sections.add(&heading, "", value(visit, loaded, step, at)?);
        }
    }
    if facts.planned.step.kind == StepKind::Fill {
        sections.fold("The line stops", stop(visit, loaded, step)?);
    }
    let (form, note) = ending(visit, loaded, step, facts)?;
    sections.add("End", note, form);
    Ok(())
}

/// The form that ends a step, and what stands in its way; with the box for words where these would let it end.
fn ending(
    visit: &Visit,
    loaded: &Loaded,
    step: usize,
    facts: &StepFacts<'_>,
) -> Result<(Form, String), Failure> {
    let form = end(visit, loaded, step)?;
    let started = crate::domain::batch::state::present(facts.entries, step);
    let started = started.iter().find(|one| one.kind == EntryKind::Started);
    let minutes = started
        .and_then(|one| filling::minutes_between(one.instant(), &visit.at.stored(), visit.at.zone))
        .unwrap_or_default();
    Ok(match rule::may_end(facts, visit.actor()?.account, minutes, false) {
        Ok(()) => (form, String::new()),
        Err(
            why @ (StepRefusal::TooEarly { .. }
            | StepRefusal::TooLate { .. }
            | StepRefusal::WeightBelowLimit { .. }),
        ) => (with_words(form, "end_deviation"), why.to_string()),
        Err(why) => (form, why.to_string()),
    })
}
