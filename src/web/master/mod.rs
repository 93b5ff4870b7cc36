//! The master record of a formulation version: its sections on the version's page, and the forms that write it.

pub mod ingredients;
pub mod phase;
pub mod scaling;
pub mod step;

use super::form::{Form, FormPage};
use super::page::Shell;
use super::record::Record;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::formulation::FormulationContent;
use crate::domain::master::rule::MasterRefusal;
use crate::domain::master::{MasterRecord, Phase, Step, rule};
use crate::domain::version::{VersionRefusal, VersionState, Versioned};
use crate::store;
use crate::store::version::Version;

pub const ROUTES: &[Route] = &[
    get("/formulation-versions/{id}/master", ingredients::page),
    post("/formulation-versions/{id}/master", &[Act::DraftFormulationVersion], ingredients::write),
    get("/formulation-versions/{id}/phases/{phase}", phase::page),
    post("/formulation-versions/{id}/phases/{phase}", &[Act::DraftFormulationVersion], phase::write),
    get("/formulation-versions/{id}/phases/{phase}/steps/{step}", step::page),
    post(
        "/formulation-versions/{id}/phases/{phase}/steps/{step}",
        &[Act::DraftFormulationVersion],
        step::write,
    ),
    get("/formulation-versions/{id}/scaling", scaling::page),
];

/// A draft whose master record is being written.
pub struct Draft {
    pub version: Version,
    pub content: FormulationContent,
    pub code: String,
}

impl Draft {
    /// The draft of the address; a signed version is frozen.
    pub fn of(visit: &Visit) -> Result<Draft, Failure> {
        if !visit.may(Act::DraftFormulationVersion) {
            return Err(Failure::Denied(Act::DraftFormulationVersion));
        }
        let id = visit.id("id")?;
        let (version, owner) = visit.read(|reader| {
            let version = store::version::get(reader, Versioned::Formulation, id)?;
            let owner = store::formulation::get(reader, version.parent)?;
            Ok((version, owner))
        })?;
        if version.state != VersionState::Draft {
            return Err(VersionRefusal::VersionFrozen.into());
        }
        let content = version.read()?;
        Ok(Draft { version, content, code: owner.code })
    }

    pub fn master(&self) -> Result<&MasterRecord, Failure> {
        self.content.master.as_ref().ok_or_else(|| MasterRefusal::MasterMissing.into())
    }

    /// A form over this draft, bound to the content it was shown with.
    pub fn form(&self, visit: &Visit, path: &str, button: &str) -> Result<Form, Failure> {
        let action = format!("/formulation-versions/{}{path}", self.version.id);
        let seen = visit.form.get("seen").map_or_else(|| self.version.digest(), str::to_string);
        Ok(Form::new(visit, &action, button)?.hide("seen", seen))
    }

    pub fn show(&self, status: u16, visit: &Visit, title: &str, lead: &str, mut form: Form) -> Outcome {
        // Once both are shown, sending the form again means it: it then carries the digest of what stands there.
        if let Some(stale) = &mut form.stale {
            stale.changed_at = show::instant(&stale.changed_at, visit.at.zone);
            form.hidden.retain(|(name, _)| name != "seen");
            form = form.hide("seen", self.version.digest());
        }
        let title = format!("{} version {}: {title}", self.code, self.version.number);
        let shell = Shell::of(visit, &title)
            .crumb("/formulations", "Formulations")
            .crumb(
                format!("/formulation-versions/{}", self.version.id),
                format!("version {}", self.version.number),
            )
            .with_errors(&form);
        page_with(status, &FormPage { shell, lead: lead.to_string(), note: String::new(), form })
    }

    /// Writes the draft with its master record changed.
    pub fn rewrite(
        &self,
        visit: &Visit,
        actor: &Actor,
        seen: &str,
        change: impl FnOnce(&mut MasterRecord),
    ) -> Result<(), Failure> {
        let mut content = self.content.clone();
        change(content.master.get_or_insert_with(MasterRecord::default));
        let (id, reason) = (self.version.id, &self.version.reason);
        acts::formulation::rewrite(visit.db(), actor, id, reason, &content, seen)
    }
}

/// A place counted from 1 in the address, at most one behind the last.
pub fn place(visit: &Visit, name: &str, count: usize) -> Result<usize, Failure> {
    let number = usize::try_from(visit.id(name)?).unwrap_or_default();
    if (1..=count + 1).contains(&number) {
        Ok(number - 1)
    } else {
        Err(Failure::missing(format!("{name} {number} of this record")))
    }
}

fn ingredient_table(content: &FormulationContent, master: &MasterRecord) -> Table {
    let heads =
        ["Ingredient", "Quantity#", "Weighed in", "Rounded to#", "Overage#", "Tolerance", "Corrected for"];
    let caption = format!("Batch sizes: {}", sizes_words(master));
    Table::new(&caption, &heads, "No ingredient.").rows(content.ingredients.iter().map(|one| {
        let row = master.ingredient(one.material);
        let of = |told: fn(&crate::domain::master::MasterIngredient) -> String| {
            row.map_or(Cell::Missing("not written".to_string()), |row| Cell::text(told(row)))
        };
        vec![
            Cell::text(&one.name),
            Cell::number(one.words()),
            of(|row| row.unit.clone()),
            of(|row| format!("{}\u{202f}{}", row.rounding_step, row.unit)),
            of(|row| {
                if row.overage_percent.is_zero() {
                    "none".to_string()
                } else {
                    format!("{}\u{202f}%", row.overage_percent)
                }
            }),
            of(|row| row.tolerance.words(&row.unit)),
            of(|row| row.potency.map_or("nothing".to_string(), |_| "assay and water".to_string())),
        ]
    }))
}

pub fn sizes_words(master: &MasterRecord) -> String {
    let sizes: Vec<String> = master.batch_sizes.iter().map(|size| size.to_string()).collect();
    format!("{}\u{202f}{}", sizes.join(", "), master.size_unit)
}

/// What a step asks for, in a few words.
pub fn step_notes(step: &Step) -> Vec<String> {
    let mut notes: Vec<String> =
        step.values.iter().map(|value| format!("{}: {}", value.name, value.limit_words())).collect();
    match (step.least_minutes, step.most_minutes) {
        (Some(least), Some(most)) => notes.push(format!("{least} to {most} min")),
        (Some(least), None) => notes.push(format!("at least {least} min")),
        (None, Some(most)) => notes.push(format!("at most {most} min")),
        (None, None) => {}
    }
    notes.extend(step.stop_minutes_most.map(|most| format!("a stop lasts at most {most} min")));
    notes
}

fn step_asks(step: &Step) -> String {
    let mut asks = Vec::new();
    if step.needs_check {
        asks.push(if step.blind_within.is_some() {
            "second person weighs blind"
        } else {
            "checked by a second person"
        });
    }
    if step.may_repeat {
        asks.push("may be repeated");
    }
    if step.may_skip {
        asks.push("may be skipped");
    }
    asks.join("; ")
}

fn phase_table(version: &Version, at: usize, phase: &Phase, may_write: bool) -> Table {
    let order = if phase.is_in_any_order { "steps in any order" } else { "steps in their order" };
    let theory = phase.theory.as_ref().map_or("no yield is taken".to_string(), |theory| {
        format!(
            "theoretical yield {}\u{202f}{} for one unit of batch size, {} to {}\u{202f}%",
            theory.per_size_unit, theory.unit, theory.least_percent, theory.most_percent
        )
    });
    let caption = format!("Phase {}: {}: {order}; {theory}", at + 1, phase.name);
    let heads = ["Step", "Instruction", "Equipment", "Values and limits", "Asks for"];
    let rows = phase.steps.iter().enumerate().map(|(place, step)| {
        let words = format!("{}.{} {}", at + 1, place + 1, step.title);
        let path = format!("/formulation-versions/{}/phases/{}/steps/{}", version.id, at + 1, place + 1);
        let name = if may_write {
            Cell::Link { path, words, note: step.kind.words().to_string() }
        } else {
            Cell::noted(words, step.kind.words())
        };
        let or = |text: String, why: &str| {
            if text.is_empty() { Cell::Missing(why.to_string()) } else { Cell::text(text) }
        };
        vec![
            name,
            Cell::text(&step.instruction),
            or(step.equipment_class.clone(), "none"),
            or(step_notes(step).join("; "), "none"),
            or(step_asks(step), "nothing more"),
        ]
    });
    Table::new(&caption, &heads, "This phase has no step yet.").rows(rows)
}

/// The master record on the page of its version, with what is still missing while it is a draft.
pub fn sections(record: Record, visit: &Visit, version: &Version, content: &FormulationContent) -> Record {
    let may_write = visit.may(Act::DraftFormulationVersion) && version.state == VersionState::Draft;
    let path = format!("/formulation-versions/{}", version.id);
    let Some(master) = &content.master else {
        return record.quiet_link_if(may_write, format!("{path}/master"), "Write the master record");
    };
    let phases = master.phases.len();
    let mut record = record
        .quiet_link_if(may_write, format!("{path}/master"), "Sizes and weighing")
        .quiet_link_if(may_write, format!("{path}/phases/{}", phases + 1), "Add a phase");
    for (at, phase) in master.phases.iter().enumerate().filter(|_| may_write) {
        let next = format!("{path}/phases/{}/steps/{}", at + 1, phase.steps.len() + 1);
        record = record.quiet_link_if(true, next, &format!("Add a step to “{}”", phase.name)).quiet_link_if(
            true,
            format!("{path}/phases/{}", at + 1),
            &format!("Change phase {}", at + 1),
        );
    }
    record = record.quiet_link_if(
        !master.batch_sizes.is_empty(),
        format!("{path}/scaling"),
        "Scale to a batch size",
    );
    let faults = rule::faults(content);
    if version.state == VersionState::Draft && !faults.is_empty() {
        record = record.sentences("Before it can be signed", faults);
    }
    record = record.table("Master record", ingredient_table(content, master));
    for (at, phase) in master.phases.iter().enumerate() {
        record = record.table("", phase_table(version, at, phase, may_write));
    }
    record
}
