//! The master record: how a formulation version is made, in phases and ordered steps. It is part of the version's
//! document, so it is signed, frozen and copied with it.

pub mod compare;
pub mod rule;
pub mod scale;

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

/// How a lot is made: batch sizes, what is weighed, and the steps.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct MasterRecord {
    /// The sizes a lot may be made in.
    pub batch_sizes: Vec<Decimal>,
    /// `L`, `mL`, `kg` or `g`.
    pub size_unit: String,
    /// One for each ingredient of the version.
    pub ingredients: Vec<MasterIngredient>,
    pub phases: Vec<Phase>,
}

/// How one ingredient is weighed. Its quantity stands in the version's ingredients.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct MasterIngredient {
    pub material: i64,
    pub name: String,
    /// The unit it is weighed or measured in.
    pub unit: String,
    /// The balance's step in that unit: amounts are rounded to it.
    pub rounding_step: Decimal,
    /// A calculated excess, stated as such; 0 without one.
    pub overage_percent: Decimal,
    pub tolerance: Tolerance,
    /// The weighed amount is corrected by assay and water of the material lot.
    pub potency: Option<Potency>,
    /// Stays solid in the vehicle: counts to the volume fraction.
    pub is_undissolved: bool,
    /// The material's density when the record was written.
    pub density_g_per_ml: Option<Decimal>,
}

/// How far a weighed amount may lie from its target; an open side has no bound.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Tolerance {
    pub below: Option<Decimal>,
    pub above: Option<Decimal>,
    /// In percent of the target, else in the unit it is weighed in.
    pub is_percent: bool,
}

/// Correction of a weighed amount: target × salt factor × 100 ÷ (assay × (1 − loss on drying ÷ 100)).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Potency {
    /// Molar mass of what is weighed over what is declared; 1 without a salt.
    pub salt_factor: Decimal,
}

/// A part of the making that ends with a yield.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct Phase {
    pub name: String,
    /// Its steps may be carried out in any order, such as the weighings.
    pub is_in_any_order: bool,
    pub theory: Option<TheoreticalYield>,
    pub steps: Vec<Step>,
}

/// What a phase should give, and the limits that open a deviation.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct TheoreticalYield {
    pub unit: String,
    /// Units for one unit of batch size: 1 for litres of bulk, 10 for bottles of 100 mL.
    pub per_size_unit: Decimal,
    pub least_percent: Decimal,
    pub most_percent: Decimal,
}

/// What is done in a step (terms of the trade).
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum StepKind {
    LineClearance,
    #[default]
    Dispense,
    Wet,
    Disperse,
    Mill,
    Combine,
    AdjustPh,
    MakeUp,
    Deaerate,
    Hold,
    Sample,
    Fill,
}

impl StepKind {
    pub const ALL: [StepKind; 12] = [
        StepKind::LineClearance,
        StepKind::Dispense,
        StepKind::Wet,
        StepKind::Disperse,
        StepKind::Mill,
        StepKind::Combine,
        StepKind::AdjustPh,
        StepKind::MakeUp,
        StepKind::Deaerate,
        StepKind::Hold,
        StepKind::Sample,
        StepKind::Fill,
    ];

    pub fn words(self) -> &'static str {
        match self {
            StepKind::LineClearance => "line clearance",
            StepKind::Dispense => "dispense",
            StepKind::Wet => "wet or levigate the solids",
            StepKind::Disperse => "disperse and hydrate",
            StepKind::Mill => "mill or homogenise",
            StepKind::Combine => "combine",
            StepKind::AdjustPh => "adjust pH",
            StepKind::MakeUp => "make up to volume",
            StepKind::Deaerate => "de-aerate",
            StepKind::Hold => "hold",
            StepKind::Sample => "sampling",
            StepKind::Fill => "fill",
        }
    }

    pub fn from_words(words: &str) -> Option<StepKind> {
        StepKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// One step.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct Step {
    pub kind: StepKind,
    pub title: String,
    pub instruction: String,
    /// What is weighed, in a step that dispenses.
    pub dispense: Option<Dispense>,
    /// The class of equipment it is done in; empty without one.
    pub equipment_class: String,
    /// Parameters and in-process checks.
    pub values: Vec<StepValue>,
    /// A second person checks it.
    pub needs_check: bool,
    /// The second person weighs without seeing the first figures; they may differ by this much, in the unit of
    /// the weighing.
    pub blind_within: Option<Decimal>,
    pub may_repeat: bool,
    pub may_skip: bool,
    /// From its start to its end, in minutes.
    pub least_minutes: Option<u32>,
    pub most_minutes: Option<u32>,
    /// How long a stop of the filling line may last, in minutes.
    pub stop_minutes_most: Option<u32>,
}

/// A share of an ingredient that is weighed in one step.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Dispense {
    pub material: i64,
    /// 100 where the ingredient goes in at once.
    pub share_percent: Decimal,
}

/// A parameter or an in-process check of a step. Without a unit it is answered in words.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct StepValue {
    pub name: String,
    pub unit: String,
    pub least: Option<Decimal>,
    pub most: Option<Decimal>,
    pub is_in_process_check: bool,
    /// Answered by "conforms" or "does not conform", such as an appearance.
    pub is_words: bool,
}

impl StepValue {
    /// `1200 to 1500 rpm`, `at least 30 min`, `conforms`.
    pub fn limit_words(&self) -> String {
        if self.is_words {
            return "conforms".to_string();
        }
        let unit = if self.unit.is_empty() { String::new() } else { format!("\u{202f}{}", self.unit) };
        match (self.least, self.most) {
            (Some(least), Some(most)) if least == most => format!("{least}{unit}"),
            (Some(least), Some(most)) => format!("{least} to {most}{unit}"),
            (Some(least), None) => format!("at least {least}{unit}"),
            (None, Some(most)) => format!("at most {most}{unit}"),
            (None, None) => "no limit".to_string(),
        }
    }
}

impl Tolerance {
    /// The bounds around a target, in the unit of the target.
    pub fn bounds(&self, target: Decimal) -> (Option<Decimal>, Option<Decimal>) {
        let width = |part: Decimal| {
            if self.is_percent { target * part / Decimal::ONE_HUNDRED } else { part }
        };
        (self.below.map(|part| target - width(part)), self.above.map(|part| target + width(part)))
    }

    /// `± 1 %`, `−0 / +2 %`, `at least the target`, `no tolerance`.
    pub fn words(&self, unit: &str) -> String {
        let unit = if self.is_percent { "%" } else { unit };
        match (self.below, self.above) {
            (Some(below), Some(above)) if below == above => format!("± {below}\u{202f}{unit}"),
            (Some(below), Some(above)) => format!("−{below} / +{above}\u{202f}{unit}"),
            (Some(below), None) if below.is_zero() => "at least the target".to_string(),
            (Some(below), None) => format!("at most {below}\u{202f}{unit} below"),
            (None, Some(above)) if above.is_zero() => "at most the target".to_string(),
            (None, Some(above)) => format!("at most {above}\u{202f}{unit} above"),
            (None, None) => "no tolerance".to_string(),
        }
    }
}

impl MasterRecord {
    pub fn ingredient(&self, material: i64) -> Option<&MasterIngredient> {
        self.ingredients.iter().find(|one| one.material == material)
    }

    /// Every step with its phase, in the order of the work: places of phase and step, counted from 0.
    pub fn steps(&self) -> impl Iterator<Item = (usize, usize, &Step)> {
        self.phases
            .iter()
            .enumerate()
            .flat_map(|(phase, one)| one.steps.iter().enumerate().map(move |(at, step)| (phase, at, step)))
    }
}

/// Units a batch size may have.
pub const SIZE_UNITS: [&str; 4] = ["L", "mL", "kg", "g"];
/// Units an ingredient may be weighed or measured in.
pub const WEIGHING_UNITS: [&str; 5] = ["kg", "g", "mg", "L", "mL"];

#[cfg(test)]
mod tests {
    use super::*;

    fn decimal(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    #[test]
    fn a_tolerance_has_two_sides_or_one_in_percent_or_in_units() {
        let some = |text: &str| (!text.is_empty()).then(|| decimal(text));
        let table = [
            ("1", "1", true, "39.60", "40.40", "± 1 %"),
            ("0", "2", true, "40", "40.80", "−0 / +2 %"),
            ("0.05", "0.05", false, "39.95", "40.05", "± 0.05 kg"),
            ("0", "", true, "40", "", "at least the target"),
            ("", "1", true, "", "40.40", "at most 1 % above"),
            ("", "", false, "", "", "no tolerance"),
        ];
        for (below, above, is_percent, low, high, words) in table {
            let tolerance = Tolerance { below: some(below), above: some(above), is_percent };
            assert_eq!(tolerance.bounds(decimal("40")), (some(low), some(high)), "{words}");
            assert_eq!(tolerance.words("kg").replace('\u{202f}', " "), words);
        }
    }

    #[test]
    fn a_limit_is_told_in_words() {
        let value = |least: Option<i64>, most: Option<i64>| StepValue {
            unit: "rpm".to_string(),
            least: least.map(Decimal::from),
            most: most.map(Decimal::from),
            ..StepValue::default()
        };
        let table = [
            (value(Some(1200), Some(1500)), "1200 to 1500 rpm"),
            (value(Some(30), None), "at least 30 rpm"),
            (value(None, Some(5)), "at most 5 rpm"),
            (value(Some(3), Some(3)), "3 rpm"),
            (value(None, None), "no limit"),
            (StepValue { is_words: true, ..StepValue::default() }, "conforms"),
        ];
        for (value, words) in table {
            assert_eq!(value.limit_words().replace('\u{202f}', " "), words);
        }
    }
}
