//! The master records of the demo's formulation versions.

use rust_decimal::Decimal;

use super::player::Player;
use super::seed::{StepRow, ValueRow, WeighingRow};
use crate::domain::failure::Failure;
use crate::domain::formulation::FormulationContent;
use crate::domain::master::{
    Dispense, MasterIngredient, MasterRecord, Phase, Potency, Step, StepKind, StepValue, TheoreticalYield,
    Tolerance,
};

impl Player<'_> {
    /// The master record of a product's version: its steps, without those of materials that are not in it.
    pub fn master(&self, product: &str, content: &FormulationContent) -> Result<MasterRecord, Failure> {
        let sizes = self.seed.lots.iter().filter(|lot| lot.product == product);
        let mut batch_sizes: Vec<Decimal> = sizes.clone().map(|lot| lot.size).collect();
        batch_sizes.dedup();
        let size_unit = sizes.map(|lot| lot.size_unit.clone()).next().unwrap_or_default();
        let mut master = MasterRecord { batch_sizes, size_unit, ..MasterRecord::default() };
        for ingredient in &content.ingredients {
            let row = self.seed.weighing.iter().find(|row| row.material == ingredient.material_code);
            let row = row.ok_or_else(|| Failure::missing(format!("weighing of {}", ingredient.name)))?;
            let density = self.seed.materials.iter().find(|one| one.code == ingredient.material_code);
            let row = weighed(row, ingredient.material, &ingredient.name);
            let unit = if ingredient.is_quantity_sufficient { "L".to_string() } else { row.unit.clone() };
            let density_g_per_ml = density.and_then(|one| one.density);
            master.ingredients.push(MasterIngredient { unit, density_g_per_ml, ..row });
        }
        for row in self.seed.steps.iter().filter(|row| row.product == product) {
            let is_in = |code: &str| content.ingredients.iter().any(|one| one.material_code == code);
            if row.material.is_empty() || is_in(&row.material) {
                self.add_step(&mut master, row)?;
            }
        }
        Ok(master)
    }

    fn add_step(&self, master: &mut MasterRecord, row: &StepRow) -> Result<(), Failure> {
        if master.phases.last().is_none_or(|phase| phase.name != row.phase) {
            let theory =
                self.seed.yields.iter().find(|one| one.product == row.product && one.phase == row.phase);
            master.phases.push(Phase {
                name: row.phase.clone(),
                is_in_any_order: row.any_order == "yes",
                theory: theory.map(|one| TheoreticalYield {
                    unit: one.unit.clone(),
                    per_size_unit: one.per_size_unit,
                    least_percent: one.least,
                    most_percent: one.most,
                }),
                steps: Vec::new(),
            });
        }
        let dispense = match row.material.as_str() {
            "" => None,
            code => Some(Dispense { material: self.number(code)?, share_percent: Decimal::ONE_HUNDRED }),
        };
        let values =
            self.seed.values.iter().filter(|one| one.product == row.product && one.step == row.title);
        let step = Step {
            kind: StepKind::from_words(&row.kind)
                .ok_or_else(|| Failure::missing(format!("kind of step {}", row.kind)))?,
            title: row.title.clone(),
            instruction: row.instruction.clone(),
            dispense,
            equipment_class: row.equipment.clone(),
            values: values.map(value).collect(),
            needs_check: row.check == "yes",
            blind_within: row.blind,
            may_repeat: row.repeat == "yes",
            may_skip: row.skip == "yes",
            least_minutes: row.least_minutes,
            most_minutes: row.most_minutes,
            stop_minutes_most: row.stop_minutes,
        };
        if let Some(phase) = master.phases.last_mut() {
            phase.steps.push(step);
        }
        Ok(())
    }
}

fn weighed(row: &WeighingRow, material: i64, name: &str) -> MasterIngredient {
    MasterIngredient {
        material,
        name: name.to_string(),
        unit: row.unit.clone(),
        rounding_step: row.step.unwrap_or_default(),
        overage_percent: row.overage.unwrap_or_default(),
        tolerance: Tolerance { below: row.below, above: row.above, is_percent: true },
        potency: (row.corrected == "yes").then_some(Potency { salt_factor: Decimal::ONE }),
        is_undissolved: row.solid == "yes",
        density_g_per_ml: None,
    }
}

fn value(row: &ValueRow) -> StepValue {
    StepValue {
        name: row.name.clone(),
        unit: row.unit.clone(),
        least: row.least,
        most: row.most,
        is_in_process_check: row.check == "yes",
        is_words: row.words == "yes",
    }
}
