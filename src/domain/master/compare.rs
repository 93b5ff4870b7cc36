//! Two master records side by side, part by part, numbers in percent.

use rust_decimal::Decimal;

use super::{MasterIngredient, MasterRecord, Phase, Step};

/// One part of a master record: what it is, how it is shown, and its number where it is one.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Part {
    pub what: String,
    pub shown: String,
    pub number: Option<Decimal>,
}

struct Parts(Vec<Part>);

impl Parts {
    fn words(&mut self, what: String, shown: impl Into<String>) {
        let shown = shown.into();
        if !shown.is_empty() {
            self.0.push(Part { what, shown, number: None });
        }
    }

    fn number(&mut self, what: String, value: Option<Decimal>, unit: &str) {
        if let Some(value) = value {
            let shown = format!("{value}\u{202f}{unit}").trim_end().to_string();
            self.0.push(Part { what, shown, number: Some(value) });
        }
    }

    fn is_so(&mut self, what: String, is_so: bool) {
        self.words(what, if is_so { "yes" } else { "" });
    }
}

/// Every part of a master record that has a value, in the order of the record.
pub fn parts(master: &MasterRecord) -> Vec<Part> {
    let mut parts = Parts(Vec::new());
    let sizes: Vec<String> = master.batch_sizes.iter().map(Decimal::to_string).collect();
    parts.words("Batch sizes".to_string(), format!("{} {}", sizes.join(", "), master.size_unit));
    for row in &master.ingredients {
        ingredient(&mut parts, row);
    }
    for one in &master.phases {
        phase(&mut parts, one);
    }
    parts.0
}

fn ingredient(parts: &mut Parts, row: &MasterIngredient) {
    let of = |what: &str| format!("{}: {what}", row.name);
    parts.number(of("rounding step"), Some(row.rounding_step), &row.unit);
    parts.number(of("overage"), Some(row.overage_percent).filter(|overage| !overage.is_zero()), "%");
    parts.words(of("tolerance"), row.tolerance.words(&row.unit));
    parts.number(of("salt factor"), row.potency.map(|potency| potency.salt_factor), "");
    parts.is_so(of("counts as solid"), row.is_undissolved);
    parts.number(of("density"), row.density_g_per_ml, "g/mL");
}

fn phase(parts: &mut Parts, one: &Phase) {
    let of = |what: &str| format!("Phase “{}”: {what}", one.name);
    parts.words(of("steps"), if one.is_in_any_order { "in any order" } else { "in their order" });
    if let Some(theory) = &one.theory {
        parts.number(
            of("theoretical yield for one unit of batch size"),
            Some(theory.per_size_unit),
            &theory.unit,
        );
        parts.number(of("least yield"), Some(theory.least_percent), "%");
        parts.number(of("most yield"), Some(theory.most_percent), "%");
    }
    for (at, one) in one.steps.iter().enumerate() {
        step(parts, at + 1, one);
    }
}

fn step(parts: &mut Parts, number: usize, one: &Step) {
    let of = |what: &str| format!("Step “{}”: {what}", one.title);
    parts.words(of("place"), format!("{number}, {}", one.kind.words()));
    parts.words(of("instruction"), one.instruction.as_str());
    parts.words(of("equipment"), one.equipment_class.as_str());
    parts.number(of("share that is dispensed"), one.dispense.map(|dispense| dispense.share_percent), "%");
    for value in &one.values {
        if value.is_words {
            parts.words(of(&value.name), "conforms");
        }
        parts.number(of(&format!("{}, least", value.name)), value.least, &value.unit);
        parts.number(of(&format!("{}, most", value.name)), value.most, &value.unit);
        if !value.is_words && value.least.is_none() && value.most.is_none() {
            parts.words(of(&value.name), "recorded, no limit");
        }
    }
    let minutes = |minutes: Option<u32>| minutes.map(Decimal::from);
    parts.number(of("shortest time"), minutes(one.least_minutes), "min");
    parts.number(of("longest time"), minutes(one.most_minutes), "min");
    parts.number(of("longest stop"), minutes(one.stop_minutes_most), "min");
    parts.is_so(of("checked by a second person"), one.needs_check);
    parts.number(of("blind second weighing within"), one.blind_within, "");
    parts.is_so(of("may be repeated"), one.may_repeat);
    parts.is_so(of("may be skipped"), one.may_skip);
}
