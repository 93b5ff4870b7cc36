//! What a master record must hold before it may be signed: every fault at once, each named.

use std::collections::BTreeSet;

use rust_decimal::Decimal;

use super::scale::{ScaleFault, scale};
use super::{MasterRecord, Step, StepKind, StepValue};
use crate::domain::formulation::FormulationContent;
use crate::domain::refusal::NamedReason;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum MasterRefusal {
    #[error("The master record is not complete. {}", .0.join(" "))]
    MasterIncomplete(Vec<String>),
    #[error("This version has no master record yet. Write its batch sizes and ingredients first.")]
    MasterMissing,
    #[error("There is no phase {0}. Phases are added one after the other.")]
    PhaseUnknown(usize),
}

impl NamedReason for MasterRefusal {}

/// Whether the version may be signed as far as its master record goes; a version without one may.
pub fn may_sign(content: &FormulationContent) -> Result<(), MasterRefusal> {
    let found = faults(content);
    if found.is_empty() { Ok(()) } else { Err(MasterRefusal::MasterIncomplete(found)) }
}

/// Every fault of the master record in the order of the record: sizes, ingredients, phases with their steps, then
/// what must be dispensed.
pub fn faults(content: &FormulationContent) -> Vec<String> {
    let Some(master) = &content.master else { return Vec::new() };
    let mut found = Vec::new();
    size_faults(content, master, &mut found);
    ingredient_faults(content, master, &mut found);
    if master.phases.is_empty() {
        found.push("No phase is written: a record has at least one phase with one step.".to_string());
    }
    for (at, phase) in master.phases.iter().enumerate() {
        phase_faults(master, at, &mut found);
        for (place, step) in phase.steps.iter().enumerate() {
            let name = format!("Step {}.{} “{}”", at + 1, place + 1, step.title);
            step_faults(master, &name, step, &mut found);
        }
    }
    dispensing_faults(content, master, &mut found);
    found
}

fn size_faults(content: &FormulationContent, master: &MasterRecord, found: &mut Vec<String>) {
    if master.batch_sizes.is_empty() {
        found.push("No batch size is stated.".to_string());
    }
    for size in &master.batch_sizes {
        // A missing row is told with the ingredients, once.
        match scale(content, master, *size) {
            Err(ScaleFault::NotInMaster(_)) | Ok(_) => {}
            Err(fault) => {
                let sentence = fault.to_string();
                if !found.contains(&sentence) {
                    found.push(sentence);
                }
            }
        }
    }
}

fn ingredient_faults(content: &FormulationContent, master: &MasterRecord, found: &mut Vec<String>) {
    for ingredient in &content.ingredients {
        let name = &ingredient.name;
        let Some(row) = master.ingredient(ingredient.material) else {
            found.push(format!("{name} is an ingredient and has no row in the master record."));
            continue;
        };
        if row.rounding_step <= Decimal::ZERO {
            found.push(format!("{name}: the rounding step is more than 0."));
        }
        if row.overage_percent < Decimal::ZERO {
            found.push(format!("{name}: an overage is not less than 0 %."));
        }
        if row.overage_percent > Decimal::ZERO && ingredient.is_quantity_sufficient {
            found.push(format!("{name} makes up to the total, so it has no overage."));
        }
        let sides = [row.tolerance.below, row.tolerance.above];
        if sides.iter().flatten().any(|side| *side < Decimal::ZERO) {
            found.push(format!("{name}: a tolerance is not less than 0."));
        }
        if sides == [None, None] && !ingredient.is_quantity_sufficient {
            found.push(format!("{name} has no tolerance on either side."));
        }
        if row.potency.is_some_and(|potency| potency.salt_factor <= Decimal::ZERO) {
            found.push(format!("{name}: the salt factor is more than 0; it is 1 without a salt."));
        }
    }
    let is_known = |material: i64| content.ingredients.iter().any(|one| one.material == material);
    for row in master.ingredients.iter().filter(|row| !is_known(row.material)) {
        found.push(format!("{} is in the master record and no ingredient of this version.", row.name));
    }
}

fn phase_faults(master: &MasterRecord, at: usize, found: &mut Vec<String>) {
    let (number, phase) = (at + 1, &master.phases[at]);
    if phase.steps.is_empty() {
        found.push(format!("Phase {number} “{}” has no step.", phase.name));
    }
    if master.phases[..at].iter().any(|earlier| earlier.name == phase.name) {
        found.push(format!("Two phases are called “{}”. Give each its own name.", phase.name));
    }
    match &phase.theory {
        Some(theory) if theory.per_size_unit <= Decimal::ZERO => {
            found.push(format!("Phase {number}: the theoretical yield is more than 0."));
        }
        Some(theory) if theory.least_percent > theory.most_percent => {
            found.push(format!("Phase {number}: the least yield is more than the most."));
        }
        None if number == master.phases.len() => {
            found.push(format!("Phase {number} is the last and has no theoretical yield with limits."));
        }
        _ => {}
    }
}

fn step_faults(master: &MasterRecord, name: &str, step: &Step, found: &mut Vec<String>) {
    let mut say = |sentence: &str| found.push(format!("{name}: {sentence}"));
    if step.title.trim().is_empty() || step.instruction.trim().is_empty() {
        say("it needs a title and an instruction.");
    }
    match (step.kind == StepKind::Dispense, &step.dispense) {
        (true, None) => say("choose the material that is dispensed."),
        (true, Some(dispense)) if master.ingredient(dispense.material).is_none() => {
            say("the material it dispenses has no row in the master record.");
        }
        (true, Some(dispense))
            if dispense.share_percent <= Decimal::ZERO || dispense.share_percent > Decimal::ONE_HUNDRED =>
        {
            say("the share that is dispensed is more than 0 % and at most 100 %.");
        }
        (false, Some(_)) => say("only a step that dispenses has a material."),
        _ => {}
    }
    if step.blind_within.is_some() && (step.kind != StepKind::Dispense || !step.needs_check) {
        say("a blind second weighing belongs to a step that dispenses and is checked by a second person.");
    }
    if step.kind == StepKind::Hold && step.most_minutes.is_none() {
        say("a hold needs its longest time.");
    }
    if step.kind == StepKind::Fill && step.stop_minutes_most.is_none() {
        say("filling needs the longest time a stop may last.");
    }
    if step.least_minutes.zip(step.most_minutes).is_some_and(|(least, most)| least > most) {
        say("the shortest time is more than the longest.");
    }
    let mut names = BTreeSet::new();
    for value in &step.values {
        if !names.insert(value.name.to_lowercase()) {
            say(&format!("“{}” stands twice.", value.name));
        }
        if let Some(sentence) = value_fault(value) {
            say(&sentence);
        }
    }
}

fn value_fault(value: &StepValue) -> Option<String> {
    if value.is_words && (value.least.is_some() || value.most.is_some()) {
        return Some(format!("“{}” is answered in words and has no numbers as limits.", value.name));
    }
    let is_turned = value.least.zip(value.most).is_some_and(|(least, most)| least > most);
    is_turned.then(|| format!("“{}” has a lower limit above its upper one.", value.name))
}

/// Every ingredient goes in whole; the one that makes up to the total has its step.
fn dispensing_faults(content: &FormulationContent, master: &MasterRecord, found: &mut Vec<String>) {
    let share = |material: i64| -> Decimal {
        master
            .steps()
            .filter_map(|(_, _, step)| step.dispense)
            .filter(|dispense| dispense.material == material)
            .map(|dispense| dispense.share_percent)
            .sum()
    };
    for ingredient in &content.ingredients {
        let (name, dispensed) = (&ingredient.name, share(ingredient.material).normalize());
        if ingredient.is_quantity_sufficient {
            let makes_up = master.steps().any(|(_, _, step)| step.kind == StepKind::MakeUp);
            if !makes_up {
                found.push(format!("{name} makes up to the total, and no step makes up to volume."));
            }
            if dispensed > Decimal::ONE_HUNDRED {
                found.push(format!("{dispensed} % of {name} is dispensed; at most 100 % is."));
            }
        } else if dispensed != Decimal::ONE_HUNDRED {
            found.push(format!("{dispensed} % of {name} is dispensed over all steps; 100 % goes in."));
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::formulation::Ingredient;
    use crate::domain::master::{Dispense, MasterIngredient, Phase, TheoreticalYield, Tolerance};

    fn content() -> FormulationContent {
        let ingredient =
            |material: i64, quantity: i64, unit: &str, is_quantity_sufficient: bool| Ingredient {
                material,
                material_code: format!("M-{material}"),
                name: format!("material {material}"),
                function: "active".to_string(),
                quantity: Decimal::from(quantity),
                unit: unit.to_string(),
                is_quantity_sufficient,
            };
        let row = |material: i64, unit: &str| MasterIngredient {
            material,
            name: format!("material {material}"),
            unit: unit.to_string(),
            rounding_step: Decimal::new(1, 2),
            tolerance: Tolerance { below: Some(Decimal::ONE), above: Some(Decimal::ONE), is_percent: true },
            ..MasterIngredient::default()
        };
        let step = |kind: StepKind, title: &str| Step {
            kind,
            title: title.to_string(),
            instruction: "As the title says.".to_string(),
            ..Step::default()
        };
        let dispense = Step {
            dispense: Some(Dispense { material: 1, share_percent: Decimal::ONE_HUNDRED }),
            needs_check: true,
            ..step(StepKind::Dispense, "Weigh the active")
        };
        let theory = TheoreticalYield {
            unit: "L".to_string(),
            per_size_unit: Decimal::ONE,
            least_percent: Decimal::from(97),
            most_percent: Decimal::from(101),
        };
        let master = MasterRecord {
            batch_sizes: vec![Decimal::from(500)],
            size_unit: "L".to_string(),
            ingredients: vec![row(1, "kg"), row(2, "L")],
            phases: vec![Phase {
                name: "Compounding".to_string(),
                theory: Some(theory),
                steps: vec![dispense, step(StepKind::MakeUp, "Make up")],
                ..Phase::default()
            }],
        };
        FormulationContent {
            quantity_basis: "100 mL".to_string(),
            ingredients: vec![ingredient(1, 8, "g", false), ingredient(2, 0, "mL", true)],
            master: Some(master),
            ..FormulationContent::default()
        }
    }

    fn with(change: impl FnOnce(&mut MasterRecord)) -> FormulationContent {
        let mut content = content();
        change(content.master.as_mut().unwrap());
        content
    }

    /// req_U5: each fault by itself, by the words it is named with.
    #[test]
    fn each_fault_is_named() {
        assert_eq!(faults(&content()), Vec::<String>::new());
        assert_eq!(faults(&FormulationContent::default()), Vec::<String>::new(), "a version may have none");
        let step = |change: fn(&mut Step)| with(|master| change(&mut master.phases[0].steps[0]));
        let table: [(FormulationContent, &str); 18] = [
            (with(|master| master.batch_sizes.clear()), "No batch size"),
            (with(|master| master.batch_sizes.push(Decimal::ZERO)), "batch size is more than 0"),
            (with(|master| master.size_unit = "kg".to_string()), "one is a mass, the other a volume"),
            (with(|master| drop(master.ingredients.remove(1))), "material 2 is an ingredient and has no row"),
            (with(|master| master.ingredients[0].rounding_step = Decimal::ZERO), "rounding step"),
            (with(|master| master.ingredients[0].overage_percent = -Decimal::ONE), "overage is not less"),
            (with(|master| master.ingredients[1].overage_percent = Decimal::ONE), "so it has no overage"),
            (with(|master| master.ingredients[0].tolerance = Tolerance::default()), "no tolerance on either"),
            (with(|master| master.phases.clear()), "No phase is written"),
            (with(|master| master.phases[0].theory = None), "no theoretical yield"),
            (with(|master| drop(master.phases[0].steps.pop())), "no step makes up to volume"),
            (step(|step| step.title.clear()), "title and an instruction"),
            (step(|step| step.dispense = None), "choose the material"),
            (step(|step| step.kind = StepKind::Hold), "a hold needs its longest time"),
            (step(|step| step.kind = StepKind::Fill), "longest time a stop may last"),
            (
                step(|step| (step.least_minutes, step.most_minutes) = (Some(9), Some(3))),
                "the shortest time is more",
            ),
            (
                step(|step| (step.needs_check, step.blind_within) = (false, Some(Decimal::ONE))),
                "blind second weighing belongs",
            ),
            (
                step(|step| step.dispense = Some(Dispense { material: 1, share_percent: Decimal::TEN })),
                "10 % of material 1 is dispensed",
            ),
        ];
        for (content, words) in table {
            let found = faults(&content);
            assert!(found.iter().any(|fault| fault.contains(words)), "{words}: {found:?}");
        }
    }

    #[test]
    fn all_faults_are_told_at_once() {
        let worst = with(|master| {
            master.batch_sizes.clear();
            master.ingredients.clear();
            master.phases[0].steps[1].values = vec![StepValue {
                name: "speed".to_string(),
                least: Some(Decimal::TEN),
                most: Some(Decimal::ONE),
                ..StepValue::default()
            }];
        });
        let MasterRefusal::MasterIncomplete(found) = may_sign(&worst).unwrap_err() else { panic!() };
        assert_eq!(found.len(), 5, "{found:#?}");
    }
}
