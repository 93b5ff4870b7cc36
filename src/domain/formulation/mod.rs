//! A formulation version: what a suspension is made of, and what it is meant to be.

pub mod compare;

use rust_decimal::{Decimal, RoundingStrategy};
use serde::{Deserialize, Serialize};

use super::master::MasterRecord;
use super::refusal::NamedReason;

/// The content of a formulation version: one document, signed as a whole, frozen at approval.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct FormulationContent {
    /// Oral suspension, powder for oral suspension, lotion …
    pub dosage_form: String,
    pub intended_state: IntendedState,
    pub ingredients: Vec<Ingredient>,
    /// What the quantities are stated per: "100 mL", "100 g".
    pub quantity_basis: String,
    /// The sum the quantities should reach, in the basis' own unit; `None` where units differ by nature.
    pub target_total: Option<Decimal>,
    pub physical: PhysicalData,
    /// How it is made; versions from before, and those whose lots are made elsewhere, have none.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub master: Option<MasterRecord>,
}

/// How the particles are kept (terms of the trade).
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum IntendedState {
    #[default]
    Flocculated,
    Deflocculated,
    StructuredVehicle,
    /// A dry powder that becomes a suspension on constitution.
    Powder,
    /// Only in imported versions: the file did not say.
    NotStated,
}

impl IntendedState {
    pub const ALL: [IntendedState; 4] = [
        IntendedState::Flocculated,
        IntendedState::Deflocculated,
        IntendedState::StructuredVehicle,
        IntendedState::Powder,
    ];

    pub fn words(self) -> &'static str {
        match self {
            IntendedState::Flocculated => "flocculated",
            IntendedState::Deflocculated => "deflocculated",
            IntendedState::StructuredVehicle => "structured vehicle",
            IntendedState::Powder => "powder for constitution",
            IntendedState::NotStated => "not stated",
        }
    }
}

/// One ingredient with the material as it was named when the version was written.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Ingredient {
    pub material: i64,
    pub material_code: String,
    pub name: String,
    /// Vehicle, suspending agent, wetting agent, flocculating agent, buffer, preservative …
    pub function: String,
    pub quantity: Decimal,
    pub unit: String,
    /// Quantity sufficient: made up to the total.
    pub is_quantity_sufficient: bool,
}

/// Physical data that settling and flow are computed from; each may be missing.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct PhysicalData {
    pub solids_density_g_per_ml: Option<Decimal>,
    pub particle_size_d50_um: Option<Decimal>,
    pub vehicle_density_g_per_ml: Option<Decimal>,
    pub vehicle_low_shear_viscosity_mpa_s: Option<Decimal>,
    /// Share of the active that is dissolved in the vehicle; versions from before do not state it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub dissolved_percent: Option<Decimal>,
}

/// A formulation about to be added; its first version is written after it.
#[derive(Clone, Debug)]
pub struct NewFormulation {
    pub product: i64,
    pub code: String,
    pub name: String,
}

/// Units in which ingredients are stated.
pub const UNITS: [&str; 8] = ["g", "mg", "kg", "mL", "L", "% (w/w)", "% (w/v)", "% (v/v)"];

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum FormulationRefusal {
    #[error("The code {0} is in use already. Codes are never used twice; choose another.")]
    FormulationCodeTaken(String),
    #[error("A formulation version has at least one ingredient. Choose a material and type its quantity.")]
    NoIngredient,
    #[error("{name} stands twice. Put its whole quantity into one row.")]
    MaterialDoubled { position: usize, name: String },
    #[error(
        "The quantity of {name} is not more than 0. Type what goes in, or mark it as quantity sufficient."
    )]
    QuantityNotPositive { position: usize, name: String },
    #[error(
        "{name} is the second ingredient marked as quantity sufficient. Only one can make up to the total."
    )]
    SecondQuantitySufficient { position: usize, name: String },
    #[error("An ingredient that makes up to the total needs the total. Type the target.")]
    TargetMissing,
    #[error("The target is more than 0.")]
    TargetNotPositive,
    #[error("{0} is more than 0. Type it, or leave the box empty.")]
    PhysicalDataNotPositive(&'static str),
}

impl NamedReason for FormulationRefusal {
    /// Ingredients are counted from 1 in the order of the content.
    fn field(&self) -> Option<String> {
        match self {
            FormulationRefusal::FormulationCodeTaken(_) => Some("code".to_string()),
            FormulationRefusal::NoIngredient => Some("ingredient.1.material".to_string()),
            FormulationRefusal::MaterialDoubled { position, .. } => {
                Some(format!("ingredient.{position}.material"))
            }
            FormulationRefusal::QuantityNotPositive { position, .. } => {
                Some(format!("ingredient.{position}.quantity"))
            }
            FormulationRefusal::SecondQuantitySufficient { position, .. } => {
                Some(format!("ingredient.{position}.qs"))
            }
            FormulationRefusal::TargetMissing | FormulationRefusal::TargetNotPositive => {
                Some("target_total".to_string())
            }
            FormulationRefusal::PhysicalDataNotPositive(name) => {
                PHYSICAL.iter().find(|(_, label)| label == name).map(|(field, _)| field.to_string())
            }
        }
    }
}

/// The physical data by their field and their label with its unit.
pub const PHYSICAL: [(&str, &str); 5] = [
    ("solids_density", "Density of the solids, g/mL"),
    ("particle_size", "Particle size D50, µm"),
    ("vehicle_density", "Density of the vehicle, g/mL"),
    ("vehicle_viscosity", "Low-shear viscosity of the vehicle, mPa·s"),
    ("dissolved", "Active dissolved in the vehicle, % of the label"),
];

impl PhysicalData {
    /// The values in the order of [`PHYSICAL`].
    pub fn values(&self) -> [Option<Decimal>; 5] {
        [
            self.solids_density_g_per_ml,
            self.particle_size_d50_um,
            self.vehicle_density_g_per_ml,
            self.vehicle_low_shear_viscosity_mpa_s,
            self.dissolved_percent,
        ]
    }

    /// The reverse of [`PhysicalData::values`].
    pub fn from_values(values: [Option<Decimal>; 5]) -> PhysicalData {
        PhysicalData {
            solids_density_g_per_ml: values[0],
            particle_size_d50_um: values[1],
            vehicle_density_g_per_ml: values[2],
            vehicle_low_shear_viscosity_mpa_s: values[3],
            dissolved_percent: values[4],
        }
    }
}

/// Refuses in this order: no ingredient; then row by row a doubled material, a quantity that is not positive, a
/// second quantity sufficient; then the target, then physical data. Whether the sum meets the target is told in
/// words by [`sum_words`] and refuses nothing.
pub fn may_write(content: &FormulationContent) -> Result<(), FormulationRefusal> {
    if content.ingredients.is_empty() {
        return Err(FormulationRefusal::NoIngredient);
    }
    let mut has_sufficient = false;
    for (at, ingredient) in content.ingredients.iter().enumerate() {
        let (position, name) = (at + 1, ingredient.name.clone());
        if content.ingredients[..at].iter().any(|earlier| earlier.material == ingredient.material) {
            return Err(FormulationRefusal::MaterialDoubled { position, name });
        }
        let is_missing = ingredient.quantity.is_zero() && ingredient.is_quantity_sufficient;
        if ingredient.quantity <= Decimal::ZERO && !is_missing {
            return Err(FormulationRefusal::QuantityNotPositive { position, name });
        }
        if ingredient.is_quantity_sufficient && has_sufficient {
            return Err(FormulationRefusal::SecondQuantitySufficient { position, name });
        }
        has_sufficient |= ingredient.is_quantity_sufficient;
    }
    match content.target_total {
        None if has_sufficient => return Err(FormulationRefusal::TargetMissing),
        Some(target) if target <= Decimal::ZERO => return Err(FormulationRefusal::TargetNotPositive),
        _ => {}
    }
    for (value, (_, label)) in content.physical.values().iter().zip(PHYSICAL) {
        if value.is_some_and(|value| value <= Decimal::ZERO) {
            return Err(FormulationRefusal::PhysicalDataNotPositive(label));
        }
    }
    Ok(())
}

/// The unit of the basis and the target: the last word of `100 mL`, or the whole of `% (w/w)`.
pub fn basis_unit(basis: &str) -> &str {
    let basis = basis.trim();
    if basis.starts_with('%') { basis } else { basis.rsplit(' ').next().unwrap_or(basis) }
}

/// How the sum of the quantities stands to the target, in words: `Total 100.00 g of 100.00 g`, `Total 99.98 g of
/// 100.00 g, 0.02 g short`. The sum is exact and is compared after rounding to the target's decimals.
pub fn sum_words(content: &FormulationContent) -> String {
    let stated: Vec<&Ingredient> =
        content.ingredients.iter().filter(|ingredient| !ingredient.is_quantity_sufficient).collect();
    let filler = content.ingredients.iter().find(|ingredient| ingredient.is_quantity_sufficient);
    let unit = basis_unit(&content.quantity_basis);
    let mut units: Vec<&str> = Vec::new();
    for ingredient in &stated {
        if !units.contains(&ingredient.unit.as_str()) {
            units.push(&ingredient.unit);
        }
    }
    let of_unit = |unit: &str| -> Decimal {
        stated.iter().filter(|ingredient| ingredient.unit == unit).map(|ingredient| ingredient.quantity).sum()
    };
    let sums: Vec<String> = units.iter().map(|unit| format!("{}\u{202f}{unit}", of_unit(unit))).collect();
    let sums = sums.join(" + ");
    match (content.target_total, filler) {
        (Some(target), Some(filler)) => {
            let rest = units.iter().all(|one| *one == unit).then(|| target - of_unit(unit));
            let made_up = format!("made up to {target}\u{202f}{unit} with {}", filler.name);
            match rest {
                Some(rest) if rest < Decimal::ZERO => {
                    format!(
                        "Total {sums} before {}, {}\u{202f}{unit} over {target}\u{202f}{unit}",
                        filler.name, -rest
                    )
                }
                _ if sums.is_empty() => format!("All {made_up}"),
                _ => format!("Total {sums}, {made_up}"),
            }
        }
        (Some(target), None) if units == [unit] => {
            let sum = of_unit(unit);
            let difference =
                sum.round_dp_with_strategy(target.scale(), RoundingStrategy::MidpointAwayFromZero) - target;
            let told = format!("Total {sum}\u{202f}{unit} of {target}\u{202f}{unit}");
            if difference.is_zero() {
                told
            } else if difference < Decimal::ZERO {
                format!("{told}, {}\u{202f}{unit} short", -difference)
            } else {
                format!("{told}, {difference}\u{202f}{unit} over")
            }
        }
        (Some(target), None) => {
            format!(
                "{sums}: in other units than the target of {target}\u{202f}{unit}, so they are not compared"
            )
        }
        (None, _) if sums.is_empty() => "No quantity is stated".to_string(),
        (None, _) => format!("Total {sums}; no target is stated"),
    }
}

/// Whether the sum misses its target, so that the words deserve attention.
pub fn is_sum_off(content: &FormulationContent) -> bool {
    let words = sum_words(content);
    words.ends_with("short") || words.ends_with("over") || words.contains(" over ")
}

fn ingredient_words(ingredient: &Ingredient) -> String {
    let quantity = format!("{}\u{202f}{}", ingredient.quantity, ingredient.unit);
    match (ingredient.is_quantity_sufficient, ingredient.quantity.is_zero()) {
        (true, true) => "q.s.".to_string(),
        (true, false) => format!("q.s., about {quantity}"),
        (false, _) => quantity,
    }
}

impl Ingredient {
    /// `8.00 g`, `q.s.`.
    pub fn words(&self) -> String {
        ingredient_words(self)
    }
}

/// The ingredients in one line, for a notice that a draft has changed.
pub fn in_one_line(content: &FormulationContent) -> String {
    let parts: Vec<String> = content
        .ingredients
        .iter()
        .map(|ingredient| format!("{} {}", ingredient.name, ingredient_words(ingredient)))
        .collect();
    let state = content.intended_state.words();
    format!("{}, {state}, per {}: {}", content.dosage_form, content.quantity_basis, parts.join("; "))
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn decimal(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn row(material: i64, quantity: &str, unit: &str, is_quantity_sufficient: bool) -> Ingredient {
        Ingredient {
            material,
            material_code: format!("M-{material:03}"),
            name: format!("material {material}"),
            function: "active".to_string(),
            quantity: decimal(quantity),
            unit: unit.to_string(),
            is_quantity_sufficient,
        }
    }

    pub(super) fn content(
        basis: &str,
        target: Option<&str>,
        rows: &[(i64, &str, &str, bool)],
    ) -> FormulationContent {
        FormulationContent {
            quantity_basis: basis.to_string(),
            target_total: target.map(decimal),
            ingredients: rows.iter().map(|one| row(one.0, one.1, one.2, one.3)).collect(),
            ..FormulationContent::default()
        }
    }

    /// req_U5, screen 15e: reasons in their order.
    #[test]
    fn a_version_is_refused_for_what_cannot_be_made() {
        use FormulationRefusal as R;
        type Case<'a> = (&'a [(i64, &'a str, &'a str, bool)], Option<&'a str>, Result<(), R>);
        let name = |number: i64| format!("material {number}");
        let table: [Case<'_>; 8] = [
            (&[], Some("100"), Err(R::NoIngredient)),
            (&[(1, "8", "g", false), (2, "0", "g", true)], Some("100"), Ok(())),
            (
                &[(1, "8", "g", false), (1, "0", "g", false)],
                None,
                Err(R::MaterialDoubled { position: 2, name: name(1) }),
            ),
            (&[(1, "0", "g", false)], None, Err(R::QuantityNotPositive { position: 1, name: name(1) })),
            (&[(1, "-1", "g", true)], None, Err(R::QuantityNotPositive { position: 1, name: name(1) })),
            (
                &[(1, "8", "g", true), (2, "0", "g", true)],
                Some("100"),
                Err(R::SecondQuantitySufficient { position: 2, name: name(2) }),
            ),
            (&[(1, "8", "g", true)], None, Err(R::TargetMissing)),
            (&[(1, "8", "g", false)], Some("0"), Err(R::TargetNotPositive)),
        ];
        for (rows, target, expected) in table {
            assert_eq!(may_write(&content("100 g", target, rows)), expected, "{rows:?}");
        }
        let mut thin = content("100 g", None, &[(1, "8", "g", false)]);
        thin.physical.particle_size_d50_um = Some(Decimal::ZERO);
        assert_eq!(may_write(&thin), Err(R::PhysicalDataNotPositive("Particle size D50, µm")));
    }

    /// screen 15e: the sum against the target, in words, by exact decimals.
    #[test]
    fn the_sum_is_told_in_words() {
        type Case<'a> = (&'a str, Option<&'a str>, &'a [(i64, &'a str, &'a str, bool)], &'a str);
        let table: [Case<'_>; 9] = [
            (
                "100 g",
                Some("100.00"),
                &[(1, "60.00", "g", false), (2, "40.00", "g", false)],
                "Total 100.00 g of 100.00 g",
            ),
            (
                "100 g",
                Some("100.00"),
                &[(1, "60.00", "g", false), (2, "39.98", "g", false)],
                "Total 99.98 g of 100.00 g, 0.02 g short",
            ),
            (
                "100 g",
                Some("100.0"),
                &[(1, "60.00", "g", false), (2, "39.98", "g", false)],
                "Total 99.98 g of 100.0 g",
            ),
            (
                "% (w/w)",
                Some("100.00"),
                &[(1, "100.07", "% (w/w)", false)],
                "Total 100.07 % (w/w) of 100.00 % (w/w), 0.07 % (w/w) over",
            ),
            (
                "100 mL",
                Some("100"),
                &[(1, "8.00", "g", false), (2, "0", "mL", true)],
                "Total 8.00 g, made up to 100 mL with material 2",
            ),
            (
                "100 g",
                Some("100"),
                &[(1, "101.5", "g", false), (2, "0", "g", true)],
                "Total 101.5 g before material 2, 1.5 g over 100 g",
            ),
            (
                "100 mL",
                Some("100"),
                &[(1, "8", "g", false), (2, "3", "mL", false)],
                "8 g + 3 mL: in other units than the target of 100 mL, so they are not compared",
            ),
            ("100 g", None, &[(1, "8", "g", false)], "Total 8 g; no target is stated"),
            ("100 mL", Some("100"), &[(1, "0", "mL", true)], "All made up to 100 mL with material 1"),
        ];
        for (basis, target, rows, expected) in table {
            let told = sum_words(&content(basis, target, rows)).replace('\u{202f}', " ");
            assert_eq!(told, expected);
        }
        assert!(is_sum_off(&content("100 g", Some("100.00"), &[(1, "99.98", "g", false)])));
        assert!(!is_sum_off(&content("100 g", Some("100.00"), &[(1, "100.00", "g", false)])));
    }

    proptest! {
        /// screen 15e: the sum of any recipe is exact.
        #[test]
        fn a_recipe_short_by_the_last_digit_is_told_so(parts in proptest::collection::vec(1_i64..5_000, 1..12)) {
            let total: i64 = parts.iter().sum();
            let rows: Vec<Ingredient> = parts
                .iter()
                .zip(1_i64..)
                .map(|(units, number)| {
                    let quantity = Decimal::new(*units, 2).to_string();
                    row(number, &quantity, "g", false)
                })
                .collect();
            let with = |target: i64| FormulationContent {
                ingredients: rows.clone(),
                target_total: Some(Decimal::new(target, 2)),
                ..content("100 g", None, &[])
            };
            prop_assert!(!is_sum_off(&with(total)));
            let short = sum_words(&with(total + 1)).replace('\u{202f}', " ");
            prop_assert!(short.ends_with(", 0.01 g short"), "{}", short);
            let over = sum_words(&with(total - 1)).replace('\u{202f}', " ");
            prop_assert!(total == 1 || over.ends_with(", 0.01 g over"), "{}", over);
        }
    }
}
