//! The data files of the invented demo, compiled into the program.

use rust_decimal::Decimal;
use serde::Deserialize;

use crate::domain::failure::Failure;

#[derive(Clone, Debug, Deserialize)]
pub struct PersonRow {
    pub user_name: String,
    pub full_name: String,
    pub roles: String,
}

#[derive(Clone, Debug, Deserialize)]
pub struct ProductRow {
    pub code: String,
    pub name: String,
    pub dosage_form: String,
    pub customer: Option<String>,
    pub presentation: String,
    pub strength: String,
    pub pack: String,
    pub container_word: String,
    pub fill_ml: Decimal,
    pub market: String,
    pub permeability: String,
    pub shelf_months: u32,
    pub in_use_days: Option<u32>,
    pub storage: String,
    pub intended_state: String,
    pub basis: String,
    pub target_total: Option<Decimal>,
    pub solids_density: Option<Decimal>,
    pub particle_um: Option<Decimal>,
    pub vehicle_density: Option<Decimal>,
    pub vehicle_viscosity: Option<Decimal>,
}

#[derive(Clone, Debug, Deserialize)]
pub struct MaterialRow {
    pub code: String,
    pub name: String,
    pub function: String,
    pub density: Option<Decimal>,
}

#[derive(Clone, Debug, Deserialize)]
pub struct IngredientRow {
    pub product: String,
    pub version: u32,
    pub reason: String,
    pub material: String,
    pub quantity: Decimal,
    pub unit: String,
    pub quantity_sufficient: String,
}

#[derive(Clone, Debug, Deserialize)]
pub struct LimitRow {
    pub product: String,
    pub test: String,
    pub title: String,
    pub method: String,
    #[serde(deserialize_with = "as_written")]
    pub release_lower: Option<Decimal>,
    #[serde(deserialize_with = "as_written")]
    pub release_upper: Option<Decimal>,
    #[serde(deserialize_with = "as_written")]
    pub shelf_lower: Option<Decimal>,
    #[serde(deserialize_with = "as_written")]
    pub shelf_upper: Option<Decimal>,
}

/// A limit with the decimals it is written with: 0.80 is not 0.8, since values are rounded to its last place.
fn as_written<'de, D: serde::Deserializer<'de>>(reader: D) -> Result<Option<Decimal>, D::Error> {
    let text = String::deserialize(reader)?;
    if text.is_empty() {
        return Ok(None);
    }
    Decimal::from_str_exact(&text).map(Some).map_err(serde::de::Error::custom)
}

#[derive(Clone, Debug, Deserialize)]
pub struct LotRow {
    pub number: String,
    pub product: String,
    pub version: u32,
    pub made_days_ago: i64,
    pub size: Decimal,
    pub size_unit: String,
    pub scale: String,
    pub study: String,
    pub decision: String,
    /// `whole`, `low yield`, or `half`: still in the making.
    pub making: String,
}

/// How a material is weighed.
#[derive(Clone, Debug, Deserialize)]
pub struct WeighingRow {
    pub material: String,
    pub unit: String,
    #[serde(deserialize_with = "as_written")]
    pub step: Option<Decimal>,
    pub below: Option<Decimal>,
    pub above: Option<Decimal>,
    pub overage: Option<Decimal>,
    pub corrected: String,
    pub solid: String,
}

/// A step of a product's master record.
#[derive(Clone, Debug, Deserialize)]
pub struct StepRow {
    pub product: String,
    pub phase: String,
    pub any_order: String,
    pub kind: String,
    pub title: String,
    pub instruction: String,
    pub material: String,
    pub equipment: String,
    pub least_minutes: Option<u32>,
    pub most_minutes: Option<u32>,
    pub stop_minutes: Option<u32>,
    pub check: String,
    pub blind: Option<Decimal>,
    pub repeat: String,
    pub skip: String,
}

/// A value of a step with what is usually read.
#[derive(Clone, Debug, Deserialize)]
pub struct ValueRow {
    pub product: String,
    pub step: String,
    pub name: String,
    pub unit: String,
    #[serde(deserialize_with = "as_written")]
    pub least: Option<Decimal>,
    #[serde(deserialize_with = "as_written")]
    pub most: Option<Decimal>,
    pub check: String,
    pub words: String,
    pub typical: String,
}

/// The theoretical yield of a phase, and the percent that is usually reached.
#[derive(Clone, Debug, Deserialize)]
pub struct YieldRow {
    pub product: String,
    pub phase: String,
    pub unit: String,
    pub per_size_unit: Decimal,
    pub least: Decimal,
    pub most: Decimal,
    pub typical: Decimal,
}

#[derive(Clone, Debug, Deserialize)]
pub struct EquipmentRow {
    pub code: String,
    pub name: String,
    pub class: String,
    pub location: String,
}

#[derive(Clone, Debug, Deserialize)]
pub struct TrendRow {
    pub lot: String,
    pub condition: String,
    pub orientation: String,
    pub test: String,
    pub start: Decimal,
    pub per_month: Decimal,
    pub scatter: Decimal,
    /// From this age on it moves otherwise: a bed that begins to pack.
    pub from_month: Option<Decimal>,
    pub then_per_month: Option<Decimal>,
}

impl TrendRow {
    /// The value at an age, without scatter.
    pub fn at(&self, months: Decimal) -> Decimal {
        let turn = self.from_month.unwrap_or(months).min(months);
        let then = self.then_per_month.unwrap_or(self.per_month);
        self.start + self.per_month * turn + then * (months - turn)
    }
}

#[derive(Clone, Debug, Deserialize)]
pub struct EventRow {
    pub lot: String,
    pub condition: String,
    pub orientation: String,
    pub age_months: u32,
    pub event: String,
    pub test: String,
    pub detail: String,
}

/// Everything the demo is played from.
pub struct Seed {
    pub people: Vec<PersonRow>,
    pub products: Vec<ProductRow>,
    pub materials: Vec<MaterialRow>,
    pub ingredients: Vec<IngredientRow>,
    pub limits: Vec<LimitRow>,
    pub lots: Vec<LotRow>,
    pub trends: Vec<TrendRow>,
    pub events: Vec<EventRow>,
    pub weighing: Vec<WeighingRow>,
    pub steps: Vec<StepRow>,
    pub values: Vec<ValueRow>,
    pub yields: Vec<YieldRow>,
    pub equipment: Vec<EquipmentRow>,
}

impl Seed {
    pub fn read() -> Result<Seed, Failure> {
        Ok(Seed {
            people: rows(include_str!("../../../seed-demo/people.csv"))?,
            products: rows(include_str!("../../../seed-demo/products.csv"))?,
            materials: rows(include_str!("../../../seed-demo/materials.csv"))?,
            ingredients: rows(include_str!("../../../seed-demo/ingredients.csv"))?,
            limits: rows(include_str!("../../../seed-demo/limits.csv"))?,
            lots: rows(include_str!("../../../seed-demo/lots.csv"))?,
            trends: rows(include_str!("../../../seed-demo/trends.csv"))?,
            events: rows(include_str!("../../../seed-demo/events.csv"))?,
            weighing: rows(include_str!("../../../seed-demo/weighing.csv"))?,
            steps: rows(include_str!("../../../seed-demo/steps.csv"))?,
            values: rows(include_str!("../../../seed-demo/values.csv"))?,
            yields: rows(include_str!("../../../seed-demo/yields.csv"))?,
            equipment: rows(include_str!("../../../seed-demo/equipment.csv"))?,
        })
    }

    /// The most particular trend of a test: the row of the lot itself before the row of its product, a named
    /// condition and orientation before any.
    pub fn trend(&self, lot: &str, condition: &str, orientation: &str, test: &str) -> Option<&TrendRow> {
        let fits = |wanted: &str, is: &str| wanted == "*" || wanted == is;
        self.trends
            .iter()
            .filter(|row| {
                row.test == test
                    && (lot == row.lot || lot.starts_with(&format!("{}-", row.lot)))
                    && fits(&row.condition, condition)
                    && fits(&row.orientation, orientation)
            })
            .max_by_key(|row| (row.lot.len(), row.condition != "*", row.orientation != "*"))
    }
}

fn rows<T: serde::de::DeserializeOwned>(text: &str) -> Result<Vec<T>, Failure> {
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    reader.deserialize().collect::<Result<Vec<T>, _>>().map_err(Failure::fault)
}

/// A fixed sequence of scatter between −1 and 1, to four decimals (Lehmer's generator, Park and Miller 1988).
pub struct Scatter(u64);

impl Scatter {
    pub fn new(seed: u64) -> Scatter {
        Scatter(seed % 2_147_483_646 + 1)
    }

    /// The mean of three draws: more often near zero, as readings are.
    pub fn value(&mut self) -> Decimal {
        let sum: u64 = (0..3).map(|_| self.draw()).sum();
        let thousandths = i64::try_from(sum * 20_000 / (3 * 2_147_483_646)).unwrap_or(10_000) - 10_000;
        Decimal::new(thousandths, 4)
    }

    fn draw(&mut self) -> u64 {
        self.0 = self.0 * 48_271 % 2_147_483_647;
        self.0
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_files_are_whole_and_the_most_particular_trend_counts() {
        let seed = Seed::read().unwrap();
        let start = |lot, condition, orientation, test| {
            seed.trend(lot, condition, orientation, test).unwrap().per_month.to_string()
        };
        assert_eq!(start("TW-104-0617", "25/60", "inverted", "sedimentation"), "-0.0015");
        let packing = seed.trend("TW-104-0617", "25/60", "inverted", "sedimentation").unwrap();
        assert_eq!(packing.at(Decimal::from(9)), "0.9315".parse().unwrap());
        assert_eq!(packing.at(Decimal::from(12)), "0.8790".parse().unwrap());
        assert_eq!(start("TW-330-0702", "40/75", "upright", "viscosity"), "-470");
        assert_eq!(start("TW-330-0714", "40/75", "upright", "viscosity"), "-150");
        let bed = seed.limits.iter().find(|limit| limit.product == "TW-104" && limit.test == "sedimentation");
        assert_eq!(bed.unwrap().shelf_lower.unwrap().to_string(), "0.80");
        for limit in &seed.limits {
            if !["appearance"].contains(&limit.test.as_str()) {
                assert!(
                    seed.trends.iter().any(|row| row.lot == limit.product && row.test == limit.test),
                    "{} {}",
                    limit.product,
                    limit.test
                );
            }
        }
    }

    #[test]
    fn scatter_stays_between_its_bounds_and_is_alike_every_time() {
        let draw = || {
            let mut scatter = Scatter::new(7);
            (0..1000).map(|_| scatter.value()).collect::<Vec<_>>()
        };
        let drawn = draw();
        assert!(drawn.iter().all(|value| value.abs() <= Decimal::ONE));
        let mean: Decimal = drawn.iter().sum::<Decimal>() / Decimal::from(1000);
        assert!(mean.abs() < Decimal::new(5, 2), "{mean}");
        assert_eq!(drawn, draw());
    }
}
