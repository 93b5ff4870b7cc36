//! Materials: what goes into a suspension, and what for.

use rust_decimal::Decimal;

use super::refusal::NamedReason;

/// Functions of a material in a suspension (terms of the trade).
pub const FUNCTIONS: [&str; 12] = [
    "active",
    "suspending agent",
    "wetting agent",
    "flocculating agent",
    "vehicle",
    "buffer",
    "preservative",
    "sweetener",
    "flavour",
    "colour",
    "humectant",
    "other",
];

#[derive(Clone, Debug)]
pub struct NewMaterial {
    pub code: String,
    pub name: String,
    pub function: String,
    pub density_g_per_ml: Option<Decimal>,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum MaterialRefusal {
    #[error("The code {0} is in use already. Codes are never used twice; choose another.")]
    MaterialCodeTaken(String),
    #[error("A density is more than 0 g/mL and at most 25 g/mL. Type it, or leave the box empty.")]
    DensityImpossible,
}

impl NamedReason for MaterialRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            MaterialRefusal::MaterialCodeTaken(_) => "code",
            MaterialRefusal::DensityImpossible => "density_g_per_ml",
        };
        Some(field.to_string())
    }
}

/// Refuses in this order: the code, the density. No element is denser than 22.6 g/mL, so 25 is beyond what can be.
pub fn may_add(new: &NewMaterial, is_taken: bool) -> Result<(), MaterialRefusal> {
    if is_taken {
        return Err(MaterialRefusal::MaterialCodeTaken(new.code.clone()));
    }
    match new.density_g_per_ml {
        Some(density) if density <= Decimal::ZERO || density > Decimal::from(25) => {
            Err(MaterialRefusal::DensityImpossible)
        }
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_density_is_one_that_can_be() {
        let table = [
            (None, true),
            (Some("2.36"), true),
            (Some("0"), false),
            (Some("-1"), false),
            (Some("26"), false),
        ];
        for (density, is_good) in table {
            let new = NewMaterial {
                code: "M-001".to_string(),
                name: "magnesium hydroxide".to_string(),
                function: "active".to_string(),
                density_g_per_ml: density.map(|text| text.parse().unwrap()),
            };
            assert_eq!(may_add(&new, false).is_ok(), is_good, "{density:?}");
            assert!(matches!(may_add(&new, true), Err(MaterialRefusal::MaterialCodeTaken(_))));
        }
    }
}
