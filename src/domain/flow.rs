//! Flow from viscosity readings at several speeds of one spindle.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use crate::science::flow::{self, Model, NoFlow, Reading};

/// One viscosity at one speed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SpeedReading {
    pub arm: i64,
    pub sample: i64,
    pub age: String,
    pub spindle: String,
    pub speed_rpm: Decimal,
    pub viscosity_mpa_s: Decimal,
    pub torque_percent: Option<Decimal>,
}

/// A fitted model in words: name, R² of the stress, flow index, and what to know.
#[derive(Clone, Debug, PartialEq)]
pub struct FlowFit {
    pub model: &'static str,
    pub r_squared: f64,
    pub index: Option<f64>,
    /// Yield as a share of the lowest stress measured; none for models without.
    pub yield_share: Option<f64>,
    pub note: &'static str,
}

/// The fits of one sample and spindle, best first, or what they need.
///
/// The speed stands for the shear rate, since no factor of the spindle is recorded: R², index and the yield's share
/// of the lowest stress do not depend on that factor; yield stress and consistency would, and are not given.
pub fn fits(readings: &[SpeedReading]) -> Result<Vec<FlowFit>, &'static str> {
    let reading = |one: &SpeedReading| {
        let rate = one.speed_rpm.to_f64().unwrap_or(0.0);
        Reading {
            rate,
            stress: rate * one.viscosity_mpa_s.to_f64().unwrap_or(0.0) / 1000.0,
            torque_percent: one.torque_percent.and_then(|percent| percent.to_f64()),
        }
    };
    let all: Vec<Reading> = readings.iter().map(reading).collect();
    let curve = flow::fit(&all).map_err(|why| match why {
        NoFlow::NeedsFiveReadings => "needs five readings inside the torque window",
        NoFlow::NeedsADecade => "needs speeds over at least one decade",
    })?;
    let lowest = all
        .iter()
        .enumerate()
        .filter(|(at, _)| !curve.left_out.contains(at))
        .map(|(_, reading)| reading.stress)
        .fold(f64::INFINITY, f64::min);
    let mut fits: Vec<FlowFit> = curve
        .fits
        .iter()
        .map(|fit| FlowFit {
            model: name(fit.model),
            r_squared: fit.r_squared,
            index: matches!(fit.model, Model::PowerLaw | Model::HerschelBulkley).then_some(fit.index),
            yield_share: (!matches!(fit.model, Model::Newton | Model::PowerLaw))
                .then_some(fit.yield_stress / lowest),
            note: match (fit.no_yield_detected, fit.yield_above_lowest) {
                (true, _) => "no yield stress detected",
                (_, true) => "the yield lies above the lowest stress measured: do not trust it",
                _ => "",
            },
        })
        .collect();
    fits.sort_by(|one, other| other.r_squared.total_cmp(&one.r_squared));
    Ok(fits)
}

/// The viscosity at the slowest speed against that at one ten times faster, where both were read.
pub fn thinning_index(readings: &[SpeedReading]) -> Option<f64> {
    let slow = readings.iter().min_by_key(|one| one.speed_rpm)?;
    let fast = readings.iter().find(|one| one.speed_rpm == slow.speed_rpm * Decimal::TEN)?;
    flow::thinning_index(slow.viscosity_mpa_s.to_f64()?, fast.viscosity_mpa_s.to_f64()?)
}

fn name(model: Model) -> &'static str {
    match model {
        Model::Newton => "Newton",
        Model::PowerLaw => "power law",
        Model::Bingham => "Bingham",
        Model::Casson => "Casson",
        Model::HerschelBulkley => "Herschel–Bulkley",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn reading(speed: i64, viscosity: f64) -> SpeedReading {
        SpeedReading {
            arm: 1,
            sample: 1,
            age: "Initial".to_string(),
            spindle: "2".to_string(),
            speed_rpm: Decimal::from(speed),
            viscosity_mpa_s: Decimal::try_from(viscosity).unwrap(),
            torque_percent: Some(Decimal::from(50)),
        }
    }

    /// η = 1000·N^(−0.5): a power law of index 0.5 whatever the spindle's factor.
    #[test]
    fn a_power_law_is_found_without_the_spindles_factor() {
        let readings: Vec<SpeedReading> =
            [1, 2, 5, 10, 20].map(|n| reading(n, 1000.0 / (n as f64).sqrt())).into();
        let found = fits(&readings).unwrap();
        let power = found.iter().find(|fit| fit.model == "power law").unwrap();
        assert!((power.index.unwrap() - 0.5).abs() < 1e-9 && (power.r_squared - 1.0).abs() < 1e-9);
        assert!((thinning_index(&readings).unwrap() - 10_f64.sqrt()).abs() < 1e-9);
        assert_eq!(fits(&readings[..4]), Err("needs five readings inside the torque window"));
    }
}
