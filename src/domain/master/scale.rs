//! Scaling: the amounts of one batch size by exact decimals, with what they sum up to.

use rust_decimal::prelude::ToPrimitive;
use rust_decimal::{Decimal, RoundingStrategy};
use serde::{Deserialize, Serialize};

use super::{MasterIngredient, MasterRecord};
use crate::domain::formulation::{FormulationContent, Ingredient};
use crate::science::density;

/// What a quantity measures.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Dimension {
    Mass,
    Volume,
}

/// A unit with its dimension and its size in g or mL; `% (w/w)` and its like have none.
pub fn unit_of(unit: &str) -> Option<(Dimension, Decimal)> {
    Some(match unit {
        "kg" => (Dimension::Mass, Decimal::ONE_THOUSAND),
        "g" => (Dimension::Mass, Decimal::ONE),
        "mg" => (Dimension::Mass, Decimal::new(1, 3)),
        "L" => (Dimension::Volume, Decimal::ONE_THOUSAND),
        "mL" => (Dimension::Volume, Decimal::ONE),
        _ => return None,
    })
}

/// What the quantities are stated per: `100 mL`, `1 kg`, or 100 g for `% (w/w)` and 100 mL for the other two.
pub fn basis_of(text: &str) -> Option<(Dimension, Decimal)> {
    match text.trim() {
        "% (w/w)" => return Some((Dimension::Mass, Decimal::ONE_HUNDRED)),
        "% (w/v)" | "% (v/v)" => return Some((Dimension::Volume, Decimal::ONE_HUNDRED)),
        _ => {}
    }
    let (number, unit) = text.trim().rsplit_once([' ', '\u{a0}', '\u{202f}'])?;
    let (dimension, factor) = unit_of(unit.trim())?;
    let number: Decimal = number.trim().parse().ok().filter(|number| *number > Decimal::ZERO)?;
    Some((dimension, number * factor))
}

/// A stated quantity in g or mL.
fn base_quantity(ingredient: &Ingredient) -> Option<(Dimension, Decimal)> {
    match ingredient.unit.as_str() {
        "% (w/w)" | "% (w/v)" => Some((Dimension::Mass, ingredient.quantity)),
        "% (v/v)" => Some((Dimension::Volume, ingredient.quantity)),
        unit => unit_of(unit).map(|(dimension, factor)| (dimension, ingredient.quantity * factor)),
    }
}

/// The amount of one ingredient at one batch size.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Amount {
    pub material: i64,
    pub name: String,
    pub unit: String,
    /// As computed, unrounded. `None` for a filler whose amount cannot be known before.
    pub exact: Option<Decimal>,
    /// Rounded to the balance's step, halves away from zero.
    pub target: Option<Decimal>,
    pub rounding_step: Decimal,
    pub is_quantity_sufficient: bool,
    /// How the amount came about, in words.
    pub formula: String,
}

/// All amounts of one batch size, and what follows from them.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Scaled {
    pub size: Decimal,
    pub size_unit: String,
    pub amounts: Vec<Amount>,
    /// How the sum of the rounded amounts stands to the size.
    pub sum: String,
    /// g/mL, three decimals, without contraction; `None` where a density is missing.
    pub density_g_per_ml: Option<Decimal>,
    /// Share of the volume that stays solid, in percent, two decimals.
    pub solid_volume_percent: Option<Decimal>,
}

impl Scaled {
    pub fn amount(&self, material: i64) -> Option<&Amount> {
        self.amounts.iter().find(|one| one.material == material)
    }
}

/// Why a size cannot be scaled.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ScaleFault {
    #[error("“{0}” is not a quantity such as 100 mL or 100 g, so nothing can be scaled from it.")]
    BasisUnknown(String),
    #[error(
        "The batch size is in {size_unit} and the quantities are stated per {basis}: one is a mass, the other a volume."
    )]
    OtherDimension { size_unit: String, basis: String },
    #[error("The batch size is more than 0.")]
    SizeNotPositive,
    #[error("{0} has no row in the master record, so it is not known how it is weighed.")]
    NotInMaster(String),
    #[error(
        "{name} is stated in {stated} and weighed in {weighed}. That needs its density, which is not known."
    )]
    DensityMissing { name: String, stated: String, weighed: String },
    #[error("{name}: the amount is too large or too fine to be computed exactly.")]
    TooLarge { name: String },
}

/// The nearest multiple of a step, halves away from zero; a step of 0 rounds nothing.
pub fn to_step(value: Decimal, step: Decimal) -> Decimal {
    if step <= Decimal::ZERO {
        return value;
    }
    let steps = (value / step).round_dp_with_strategy(0, RoundingStrategy::MidpointAwayFromZero);
    let mut rounded = steps * step;
    rounded.rescale(step.scale());
    rounded
}

/// An amount in g or mL in the unit it is weighed in.
fn in_unit(
    name: &str,
    (dimension, base): (Dimension, Decimal),
    row: &MasterIngredient,
) -> Result<Decimal, ScaleFault> {
    let missing = || ScaleFault::DensityMissing {
        name: name.to_string(),
        stated: if dimension == Dimension::Mass { "a mass" } else { "a volume" }.to_string(),
        weighed: row.unit.clone(),
    };
    let (wanted, factor) = unit_of(&row.unit).ok_or_else(missing)?;
    let base = match (dimension, wanted) {
        (Dimension::Mass, Dimension::Volume) => base.checked_div(row.density_g_per_ml.ok_or_else(missing)?),
        (Dimension::Volume, Dimension::Mass) => base.checked_mul(row.density_g_per_ml.ok_or_else(missing)?),
        _ => Some(base),
    };
    let too_large = || ScaleFault::TooLarge { name: name.to_string() };
    base.and_then(|base| base.checked_div(factor)).ok_or_else(too_large)
}

/// The amounts of all ingredients at one batch size.
///
/// Refuses in this order: size, basis, dimension, then ingredient by ingredient.
pub fn scale(
    content: &FormulationContent,
    master: &MasterRecord,
    size: Decimal,
) -> Result<Scaled, ScaleFault> {
    if size <= Decimal::ZERO {
        return Err(ScaleFault::SizeNotPositive);
    }
    let basis = || ScaleFault::BasisUnknown(content.quantity_basis.clone());
    let (dimension, per) = basis_of(&content.quantity_basis).ok_or_else(basis)?;
    let (size_dimension, factor) = unit_of(&master.size_unit).ok_or_else(basis)?;
    if dimension != size_dimension {
        return Err(ScaleFault::OtherDimension {
            size_unit: master.size_unit.clone(),
            basis: content.quantity_basis.clone(),
        });
    }
    let total = size * factor;
    let mut amounts = Vec::new();
    for ingredient in content.ingredients.iter().filter(|one| !one.is_quantity_sufficient) {
        amounts.push(amount(content, master, ingredient, per, total)?);
    }
    if let Some(filler) = content.ingredients.iter().find(|one| one.is_quantity_sufficient) {
        let made_up = fill_up(master, filler, &amounts, dimension, total, size)?;
        amounts.push(made_up);
    }
    amounts.sort_by_key(|one| {
        content.ingredients.iter().position(|ingredient| ingredient.material == one.material)
    });
    let sum = sum_words(master, &amounts, dimension, total, factor);
    let (density_g_per_ml, solid_volume_percent) = computed(master, &amounts, dimension, total);
    let size_unit = master.size_unit.clone();
    Ok(Scaled { size, size_unit, amounts, sum, density_g_per_ml, solid_volume_percent })
}

fn row_of<'a>(master: &'a MasterRecord, ingredient: &Ingredient) -> Result<&'a MasterIngredient, ScaleFault> {
    let missing = || ScaleFault::NotInMaster(ingredient.name.clone());
    master.ingredient(ingredient.material).ok_or_else(missing)
}

fn amount(
    content: &FormulationContent,
    master: &MasterRecord,
    ingredient: &Ingredient,
    per: Decimal,
    total: Decimal,
) -> Result<Amount, ScaleFault> {
    let row = row_of(master, ingredient)?;
    let name = &ingredient.name;
    let too_large = || ScaleFault::TooLarge { name: name.clone() };
    let (dimension, base) = base_quantity(ingredient).ok_or_else(too_large)?;
    let with_overage = Decimal::ONE_HUNDRED + row.overage_percent;
    let base = base
        .checked_mul(total)
        .and_then(|product| product.checked_mul(with_overage))
        .and_then(|product| product.checked_div(per * Decimal::ONE_HUNDRED))
        .ok_or_else(too_large)?;
    let exact = in_unit(name, (dimension, base), row)?;
    let mut formula = format!(
        "{} {} × {} {} ÷ {}",
        ingredient.quantity,
        ingredient.unit,
        total / unit_of(&master.size_unit).map_or(Decimal::ONE, |(_, factor)| factor),
        master.size_unit,
        content.quantity_basis
    );
    if !row.overage_percent.is_zero() {
        formula.push_str(&format!(", with {} % overage", row.overage_percent));
    }
    Ok(Amount {
        material: ingredient.material,
        name: name.clone(),
        unit: row.unit.clone(),
        exact: Some(exact),
        target: Some(to_step(exact, row.rounding_step)),
        rounding_step: row.rounding_step,
        is_quantity_sufficient: false,
        formula,
    })
}

/// A rounded amount in g or mL, in the dimension of the batch size; `None` without the density it needs.
fn in_base(master: &MasterRecord, amount: &Amount, wanted: Dimension) -> Option<Decimal> {
    let (dimension, factor) = unit_of(&amount.unit)?;
    let base = amount.target?.checked_mul(factor)?;
    let density = master.ingredient(amount.material).and_then(|row| row.density_g_per_ml);
    match (dimension, wanted) {
        (Dimension::Mass, Dimension::Volume) => base.checked_div(density?),
        (Dimension::Volume, Dimension::Mass) => base.checked_mul(density?),
        _ => Some(base),
    }
}

/// The ingredient that makes up to the total: what the rounded others leave of it. By mass it is exact; by volume
/// it takes no contraction into account and is told as about.
fn fill_up(
    master: &MasterRecord,
    filler: &Ingredient,
    others: &[Amount],
    dimension: Dimension,
    total: Decimal,
    size: Decimal,
) -> Result<Amount, ScaleFault> {
    let row = row_of(master, filler)?;
    let parts: Option<Vec<Decimal>> = others.iter().map(|one| in_base(master, one, dimension)).collect();
    let rest = parts.map(|parts| total - parts.iter().sum::<Decimal>());
    let exact = rest.and_then(|rest| in_unit(&filler.name, (dimension, rest), row).ok());
    let whole = format!("{size} {}", master.size_unit);
    let formula = match (exact, dimension) {
        (Some(_), Dimension::Mass) => format!("{whole} less the rounded amounts of the others"),
        (Some(_), Dimension::Volume) => {
            format!("about: {whole} less the volumes of the others, without contraction; made up to the mark")
        }
        (None, _) => format!("made up to {whole}; its amount needs the densities of the others"),
    };
    let target = match dimension {
        Dimension::Mass => exact,
        Dimension::Volume => exact.map(|exact| to_step(exact, row.rounding_step)),
    };
    Ok(Amount {
        material: filler.material,
        name: filler.name.clone(),
        unit: row.unit.clone(),
        exact,
        target,
        rounding_step: row.rounding_step,
        is_quantity_sufficient: true,
        formula,
    })
}

/// The sum of the rounded amounts against the size: exact, over or short, or why it cannot be summed.
fn sum_words(
    master: &MasterRecord,
    amounts: &[Amount],
    dimension: Dimension,
    total: Decimal,
    factor: Decimal,
) -> String {
    let unit = &master.size_unit;
    let whole = (total / factor).normalize();
    let parts: Option<Vec<Decimal>> = amounts.iter().map(|one| in_base(master, one, dimension)).collect();
    let Some(parts) = parts else {
        return format!("Not summed to {whole}\u{202f}{unit}: a density or an amount is not known");
    };
    let sum = (parts.iter().sum::<Decimal>() / factor).round_dp(6).normalize();
    let difference = (sum - whole).normalize();
    let told = format!("Sum {sum}\u{202f}{unit} of {whole}\u{202f}{unit}");
    if difference.is_zero() {
        return told;
    }
    let side = if difference.is_sign_negative() { "short" } else { "over" };
    let how = if dimension == Dimension::Mass { "by rounding and overage" } else { "without contraction" };
    format!("{told}, {}\u{202f}{unit} {side} {how}", difference.abs())
}

/// Density of the mixture and the share of its volume that stays solid.
fn computed(
    master: &MasterRecord,
    amounts: &[Amount],
    dimension: Dimension,
    total: Decimal,
) -> (Option<Decimal>, Option<Decimal>) {
    let part = |amount: &Amount| -> Option<density::Ingredient> {
        let row = master.ingredient(amount.material)?;
        let mass = in_base(master, amount, Dimension::Mass)?;
        Some(density::Ingredient { mass: mass.to_f64()?, density: row.density_g_per_ml?.to_f64()? })
    };
    let parts: Option<Vec<density::Ingredient>> = amounts.iter().map(part).collect();
    let mixture = parts.as_deref().and_then(density::mixture);
    let solids: Option<Vec<density::Ingredient>> = amounts
        .iter()
        .filter(|amount| master.ingredient(amount.material).is_some_and(|row| row.is_undissolved))
        .map(part)
        .collect();
    let volume = match dimension {
        Dimension::Volume => total.to_f64(),
        Dimension::Mass => mixture.zip(total.to_f64()).map(|(density, mass)| mass / density),
    };
    let fraction = solids.zip(volume).and_then(|(solids, volume)| density::volume_fraction(&solids, volume));
    let decimal =
        |value: f64, places: u32| Decimal::from_f64_retain(value).map(|value| value.round_dp(places));
    (mixture.and_then(|value| decimal(value, 3)), fraction.and_then(|value| decimal(value * 100.0, 2)))
}

/// A target corrected for the material lot at hand, with the formula shown: unrounded.
///
/// `None` unless assay > 0, 0 ≤ water < 100 and the salt factor > 0.
pub fn corrected(
    target: Decimal,
    salt_factor: Decimal,
    assay_percent: Decimal,
    water_percent: Decimal,
) -> Option<(Decimal, String)> {
    let hundred = Decimal::ONE_HUNDRED;
    let is_usable = assay_percent > Decimal::ZERO
        && water_percent >= Decimal::ZERO
        && water_percent < hundred
        && salt_factor > Decimal::ZERO;
    if !is_usable {
        return None;
    }
    let above = target.checked_mul(salt_factor)?.checked_mul(hundred)?.checked_mul(hundred)?;
    let exact = above.checked_div(assay_percent.checked_mul(hundred - water_percent)?)?;
    let salt = if salt_factor == Decimal::ONE { String::new() } else { format!(" × {salt_factor}") };
    let formula = format!("{target}{salt} × 100 ÷ ({assay_percent} × (1 − {water_percent} ÷ 100))");
    Some((exact, formula))
}

#[cfg(test)]
mod tests;
