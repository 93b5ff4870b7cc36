//! What an invented bottle shows: typed texts for the slots of a test, from the trends of the demo.

use rust_decimal::{Decimal, RoundingStrategy};

use super::player::Player;
use crate::domain::age::actual_months;
use crate::domain::method::{Settings, TestKind};
use crate::domain::slot::Slot;
use crate::store::bench::{BenchSample, BenchTest};

/// Where a sample stands: what its trends are looked up by.
pub struct Place {
    pub lot: String,
    pub condition: String,
    pub orientation: String,
    /// Age in months; zero at release.
    pub months: Decimal,
}

impl Place {
    pub fn of(player: &Player<'_>, sample: &BenchSample, made_on: chrono::NaiveDate) -> Place {
        let pull = sample.pull.as_ref();
        Place {
            lot: sample.lot_number.clone(),
            condition: pull.map(|pull| condition_code(&pull.condition)).unwrap_or_default(),
            orientation: pull.map(|pull| pull.orientation.clone()).unwrap_or_default(),
            months: if pull.is_some() { actual_months(made_on, player.now.date()) } else { Decimal::ZERO },
        }
    }
}

/// `25/60` of `25 °C/60 % RH`.
pub fn condition_code(name: &str) -> String {
    name.chars().filter(|c| c.is_ascii_digit() || *c == '/').collect()
}

/// The value of one test at one age, with scatter.
pub fn value(player: &mut Player<'_>, place: &Place, test: &str) -> Decimal {
    let drawn = player.scatter.value();
    let Some(trend) = player.seed.trend(&place.lot, &place.condition, &place.orientation, test) else {
        return Decimal::ZERO;
    };
    trend.at(place.months) + trend.scatter * drawn
}

/// The text an analyst would type into a slot. `level` is the value of the test drawn once for the sample, so
/// that replicates lie near each other.
pub fn typed(
    player: &mut Player<'_>,
    place: &Place,
    test: &BenchTest,
    slot: &Slot,
    level: Decimal,
) -> Option<String> {
    let near = |player: &mut Player<'_>, part: Decimal| level + level * part * player.scatter.value();
    let thousandth = Decimal::new(1, 3);
    let field = slot.key.field.split('@').next().unwrap_or_default();
    let minute = slot.due_minute.unwrap_or_default();
    Some(match (test.kind, field) {
        (TestKind::Ph, "value") => shown(near(player, thousandth), 2),
        (TestKind::Ph, "temperature_c") => {
            shown(Decimal::from(22) + player.scatter.value() / Decimal::TWO, 1)
        }
        (_, "temperature_c") => shown(Decimal::from(20) + player.scatter.value() / Decimal::from(5), 1),
        (TestKind::Viscosity, "value") => shown(near(player, thousandth * Decimal::from(12)), 0),
        (_, "torque_percent") => shown(torque(level), 1),
        (_, "rest_minutes") => "30".to_string(),
        (_, "spindle" | "speed_rpm") => setting(test, field)?,
        (TestKind::Redispersibility, "inversions") => {
            let counted = near(player, thousandth * Decimal::from(90)).round();
            shown(counted.max(Decimal::ONE), 0)
        }
        (TestKind::Redispersibility, "seconds") => shown((level * Decimal::new(11, 1)).max(Decimal::ONE), 0),
        (TestKind::AsStoredSediment, _) => height(place, field, level)?,
        (TestKind::Sedimentation, "total_ml") => "100.0".to_string(),
        (TestKind::Sedimentation, "sediment_ml") => sediment(level, minute),
        (TestKind::Sedimentation, "clarity") => if minute == 0 { "3" } else { "1" }.to_string(),
        (TestKind::Appearance, "colour" | "foreign_matter") => "0".to_string(),
        (TestKind::Appearance, "clarity") => "1".to_string(),
        (TestKind::Appearance, "caking") => caking(player, place).to_string(),
        (TestKind::Numeric, "weight") => {
            shown(Decimal::from(5) + player.scatter.value() / Decimal::from(20), 4)
        }
        (TestKind::Numeric, "volume") => "100.0".to_string(),
        (TestKind::Numeric, "value") => shown(near(player, thousandth * Decimal::from(6)), 2),
        _ => return None,
    })
}

/// The concentration that makes the assay's formula give about the wanted content: found × 100 ÷ weight ÷ 40 × 100.
pub fn found(player: &mut Player<'_>, level: Decimal, weight: Decimal) -> String {
    let content = level + level * Decimal::new(2, 3) * player.scatter.value();
    shown(content * weight * Decimal::from(40) / Decimal::from(10_000), 4)
}

fn shown(value: Decimal, decimals: u32) -> String {
    let mut rounded = value.round_dp_with_strategy(decimals, RoundingStrategy::MidpointAwayFromZero);
    rounded.rescale(decimals);
    rounded.to_string()
}

/// Torque in proportion to the viscosity, inside the window of the method.
fn torque(level: Decimal) -> Decimal {
    (level / Decimal::from(100)).clamp(Decimal::from(12), Decimal::from(88))
}

fn setting(test: &BenchTest, field: &str) -> Option<String> {
    let Settings::Viscosity { spindle, speed_rpm, .. } = &test.content.settings else { return None };
    Some(if field == "spindle" { spindle.clone() } else { speed_rpm.normalize().to_string() })
}

/// Base at 2 mm, fill line at 102 mm; the bed between them.
fn height(place: &Place, field: &str, level: Decimal) -> Option<String> {
    Some(match field {
        "base_mm" => "2".to_string(),
        "fill_line_mm" => "102".to_string(),
        "bed_top_mm" => shown(Decimal::from(2) + level.min(Decimal::ONE) * Decimal::from(100), 0),
        "days_undisturbed" => shown(place.months * Decimal::from(30), 0),
        _ => return None,
    })
}

/// The boundary falls half its way in the first hour.
fn sediment(level: Decimal, minute: u32) -> String {
    let share = match minute {
        0 => Decimal::ONE,
        60 => (Decimal::ONE + level) / Decimal::TWO,
        _ => level,
    };
    shown(share.min(Decimal::ONE) * Decimal::from(100), 1)
}

/// The caking grade follows the inversions of the same bottle.
fn caking(player: &mut Player<'_>, place: &Place) -> u8 {
    let inversions = player
        .seed
        .trend(&place.lot, &place.condition, &place.orientation, "redispersibility")
        .map(|trend| trend.at(place.months))
        .unwrap_or_default();
    match inversions {
        few if few < Decimal::from(9) => 0,
        some if some < Decimal::from(17) => 1,
        _ => 2,
    }
}
