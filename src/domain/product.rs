//! Customers, products and presentations: what is made, in which pack, for which market.

use rust_decimal::Decimal;

use super::refusal::NamedReason;

/// Dosage forms of suspension products (terms of the trade).
pub const DOSAGE_FORMS: [&str; 6] = [
    "oral suspension",
    "powder for oral suspension",
    "topical suspension",
    "lotion",
    "nasal suspension",
    "other suspension",
];

/// How a pack lets water vapour through: decides which conditions hold for it (req_A3, req_A4).
pub const PERMEABILITIES: [&str; 3] = ["impermeable", "semi-permeable", "not stated"];

#[derive(Clone, Debug)]
pub struct NewCustomer {
    pub code: String,
    pub name: String,
}

#[derive(Clone, Debug)]
pub struct NewProduct {
    pub code: String,
    pub name: String,
    pub dosage_form: String,
    pub customer: Option<i64>,
}

#[derive(Clone, Debug)]
pub struct NewPresentation {
    pub product: i64,
    pub code: String,
    pub strength: String,
    pub pack: String,
    /// How one container is called: bottle, sachet, tube.
    pub container_word: String,
    pub fill_ml: Option<Decimal>,
    pub market: String,
    pub permeability: String,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ProductRefusal {
    #[error("The code {0} is in use already. Codes are never used twice; choose another.")]
    CodeTaken(String),
    #[error("The fill of a container is more than 0 mL. Type it, or leave the box empty.")]
    FillNotPositive,
}

impl NamedReason for ProductRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            ProductRefusal::CodeTaken(_) => "code",
            ProductRefusal::FillNotPositive => "fill_ml",
        };
        Some(field.to_string())
    }
}

/// Refuses a code that is or was in use.
pub fn may_take_code(code: &str, is_taken: bool) -> Result<(), ProductRefusal> {
    if is_taken { Err(ProductRefusal::CodeTaken(code.to_string())) } else { Ok(()) }
}

/// Refuses in this order: the code, the fill.
pub fn may_add_presentation(new: &NewPresentation, is_taken: bool) -> Result<(), ProductRefusal> {
    may_take_code(&new.code, is_taken)?;
    match new.fill_ml {
        Some(fill) if fill <= Decimal::ZERO => Err(ProductRefusal::FillNotPositive),
        _ => Ok(()),
    }
}

/// The attributes that are recommended for a dosage form on stability (req_C9: WHO TRS 953, appendix 2, with
/// ASEAN and FDA lists). A protocol that leaves one out says why.
pub fn recommended_attributes(dosage_form: &str) -> &'static [&'static str] {
    match dosage_form {
        "powder for oral suspension" => &[
            "water content",
            "reconstitution time",
            "appearance",
            "assay",
            "degradation products",
            "pH",
            "viscosity",
            "redispersibility",
            "particle size",
            "preservative content",
            "microbial limits",
            "sedimentation and caking",
        ],
        "topical suspension" | "lotion" => &[
            "appearance",
            "homogeneity",
            "resuspendability",
            "viscosity",
            "pH",
            "particle size",
            "weight loss",
        ],
        _ => &[
            "appearance",
            "assay",
            "degradation products",
            "pH",
            "viscosity",
            "redispersibility",
            "particle size",
            "preservative content",
            "microbial limits",
            "sedimentation and caking",
        ],
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_code_is_used_once_and_a_fill_is_more_than_nothing() {
        let new = NewPresentation {
            product: 1,
            code: "TW-104-200".to_string(),
            strength: "400 mg/5 mL".to_string(),
            pack: "200 mL amber PET bottle".to_string(),
            container_word: "bottle".to_string(),
            fill_ml: Some(Decimal::from(200)),
            market: "United Kingdom".to_string(),
            permeability: "semi-permeable".to_string(),
        };
        let empty = NewPresentation { fill_ml: Some(Decimal::ZERO), ..new.clone() };
        let unstated = NewPresentation { fill_ml: None, ..new.clone() };
        let table = [
            (&new, false, Ok(())),
            (&unstated, false, Ok(())),
            (&new, true, Err(ProductRefusal::CodeTaken("TW-104-200".to_string()))),
            (&empty, true, Err(ProductRefusal::CodeTaken("TW-104-200".to_string()))),
            (&empty, false, Err(ProductRefusal::FillNotPositive)),
        ];
        for (new, is_taken, expected) in table {
            assert_eq!(may_add_presentation(new, is_taken), expected);
        }
    }

    /// req_C9: each dosage form has its list; a powder begins with water and reconstitution.
    #[test]
    fn every_dosage_form_has_recommended_attributes() {
        for form in DOSAGE_FORMS {
            let attributes = recommended_attributes(form);
            assert!(attributes.contains(&"appearance") && attributes.contains(&"pH"), "{form}");
        }
        assert_eq!(recommended_attributes("powder for oral suspension")[1], "reconstitution time");
        assert!(recommended_attributes("lotion").contains(&"weight loss"));
    }
}
