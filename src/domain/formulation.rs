//! A formulation version: what a suspension is made of, and what it is meant to be.

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

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
}
