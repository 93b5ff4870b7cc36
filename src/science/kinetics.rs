//! Temperature: mean kinetic temperature, Arrhenius, and loss of drug from a suspension.

use super::distribution::student::Student;
use super::regression::{Line, MeanLine, NoLine, Point};

/// The gas constant, J/(mol K) (CODATA 2018).
pub const GAS_CONSTANT: f64 = 8.314_462_618;

/// ΔH/R of the compendial mean kinetic temperature: 83.144 kJ/mol over 8.3144·10⁻³ kJ/(mol K), in kelvin.
pub const COMPENDIAL_RATIO_KELVIN: f64 = 10_000.0;

const ZERO_CELSIUS: f64 = 273.15;

/// Mean kinetic temperature in °C of readings (°C, weight): the weight is the interval a reading stands for.
/// `ratio_kelvin` is ΔH/R. Source: USP ⟨1160⟩; Haynes, J. Pharm. Sci. 60 (1971) 927.
///
/// `None` without a reading of positive weight, below absolute zero, or with numbers that are not finite.
pub fn mean_kinetic_temperature(readings: &[(f64, f64)], ratio_kelvin: f64) -> Option<f64> {
    let usable = |&(celsius, weight): &(f64, f64)| {
        celsius.is_finite() && celsius > -ZERO_CELSIUS && weight >= 0.0 && weight.is_finite()
    };
    let total: f64 = readings.iter().map(|(_, weight)| weight).sum();
    if !(readings.iter().all(usable) && total > 0.0 && ratio_kelvin > 0.0 && ratio_kelvin.is_finite()) {
        return None;
    }
    let exponent = |celsius: f64| -ratio_kelvin / (celsius + ZERO_CELSIUS);
    let largest = readings
        .iter()
        .filter(|(_, weight)| *weight > 0.0)
        .map(|(celsius, _)| exponent(*celsius))
        .fold(f64::NEG_INFINITY, f64::max);
    let sum: f64 =
        readings.iter().map(|(celsius, weight)| weight * (exponent(*celsius) - largest).exp()).sum();
    let kelvin = ratio_kelvin / -(largest + (sum / total).ln());
    kelvin.is_finite().then_some(kelvin - ZERO_CELSIUS)
}

/// ln k = ln A − Ea/(R T), fitted by least squares on 1/T.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Arrhenius {
    /// The line of ln k on 1/T (kelvin).
    pub line: MeanLine,
    /// ln A.
    pub ln_a: f64,
    /// Standard error of ln A.
    pub se_ln_a: f64,
    /// Activation energy in kJ/mol.
    pub activation_energy: f64,
    /// Its standard error in kJ/mol.
    pub se_activation_energy: f64,
}

/// Why there is no Arrhenius line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoArrhenius {
    /// Three temperatures are needed.
    NeedsThreeTemperatures,
    /// A rate is not above zero, or a temperature not above absolute zero.
    NotUsable,
}

/// Fits rates k at temperatures (°C, k), at least three of them.
pub fn arrhenius(rates: &[(f64, f64)]) -> Result<Arrhenius, NoArrhenius> {
    let mut celsius: Vec<f64> = rates.iter().map(|(celsius, _)| *celsius).collect();
    celsius.sort_by(f64::total_cmp);
    celsius.dedup();
    if celsius.len() < 3 {
        return Err(NoArrhenius::NeedsThreeTemperatures);
    }
    let mut points = Vec::with_capacity(rates.len());
    for &(celsius, k) in rates {
        let kelvin = celsius + ZERO_CELSIUS;
        if !(kelvin > 0.0 && k > 0.0 && kelvin.is_finite() && k.is_finite()) {
            return Err(NoArrhenius::NotUsable);
        }
        points.push(Point { x: 1.0 / kelvin, y: k.ln() });
    }
    let line = Line::fit(&points).map_err(|_: NoLine| NoArrhenius::NotUsable)?;
    let mean = line.mean_line().ok_or(NoArrhenius::NeedsThreeTemperatures)?;
    let (se_ln_a, se_slope) = (line.se_intercept().unwrap_or(0.0), line.se_slope().unwrap_or(0.0));
    Ok(Arrhenius {
        line: mean,
        ln_a: line.intercept(),
        se_ln_a,
        activation_energy: -line.slope * GAS_CONSTANT / 1000.0,
        se_activation_energy: se_slope * GAS_CONSTANT / 1000.0,
    })
}

impl Arrhenius {
    /// The rate at a temperature, with its two-sided confidence limits (lower, rate, upper).
    pub fn rate_at(&self, celsius: f64, confidence: f64) -> Option<(f64, f64, f64)> {
        let limits =
            super::interval::confidence_of_mean(&self.line, 1.0 / (celsius + ZERO_CELSIUS), confidence)?;
        let rates = (limits.lower.exp(), limits.centre.exp(), limits.upper.exp());
        (rates.2.is_finite()).then_some(rates)
    }

    /// How many times faster 10 °C warmer is.
    pub fn q10(&self, celsius: f64) -> f64 {
        let kelvin = celsius + ZERO_CELSIUS;
        (self.line.slope * (1.0 / (kelvin + 10.0) - 1.0 / kelvin)).exp()
    }

    /// Student's t for the interval: with three temperatures one degree of freedom, nearly useless; shown.
    pub fn t(&self, confidence: f64) -> Option<f64> {
        Student::new(self.line.df as f64)?.upper_quantile(0.5 * (1.0 - confidence))
    }
}

/// Loss from a suspension: the dissolved drug stays at its solubility, so the loss is of zero order,
/// k₀ = k₁·S. Source: Martin, Physical Pharmacy, chapter on kinetics.
///
/// Returns (k₀ in concentration per time, t₉₀ in time); concentrations in one unit. `None` unless all are
/// positive and finite.
pub fn suspension_loss(k1: f64, solubility: f64, content: f64) -> Option<(f64, f64)> {
    let usable = [k1, solubility, content].iter().all(|v| *v > 0.0 && v.is_finite());
    let k0 = k1 * solubility;
    let t90 = 0.1 * content / k0;
    (usable && k0 > 0.0 && t90.is_finite()).then_some((k0, t90))
}
