//! Flow curves: five models fitted so that they can be compared, and thixotropy.
//!
//! Stress τ in Pa, shear rate γ̇ in 1/s. R² is always that of τ itself, so that a log fit and a direct fit
//! compare; Herschel–Bulkley contains the power law, so its R² cannot be lower.

use super::regression::{Line, Point};

/// One reading of a flow curve.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// Shear rate, 1/s.
    pub rate: f64,
    /// Shear stress, Pa.
    pub stress: f64,
    /// Torque in % of full scale, where the instrument gives it.
    pub torque_percent: Option<f64>,
}

/// A model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Model {
    /// τ = ηγ̇.
    Newton,
    /// τ = Kγ̇ⁿ.
    PowerLaw,
    /// τ = τ₀ + η_p γ̇.
    Bingham,
    /// √τ = √τ₀ + √(η_c γ̇).
    Casson,
    /// τ = τ₀ + Kγ̇ⁿ.
    HerschelBulkley,
}

/// All models.
pub const MODELS: [Model; 5] =
    [Model::Newton, Model::PowerLaw, Model::Bingham, Model::Casson, Model::HerschelBulkley];

/// A fitted model: τ = yield + consistency·γ̇^index (Casson: √τ = √yield + √(consistency·γ̇)).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Fit {
    /// The model.
    pub model: Model,
    /// τ₀, Pa; 0 where there is no yield stress.
    pub yield_stress: f64,
    /// η, K, η_p or η_c.
    pub consistency: f64,
    /// n; 1 for all but power law and Herschel–Bulkley.
    pub index: f64,
    /// R² of τ.
    pub r_squared: f64,
    /// Corrected Akaike criterion of τ; none with too few readings for it, or an exact fit.
    pub aicc: Option<f64>,
    /// The fitted yield stress is above the lowest stress measured: do not trust it.
    pub yield_above_lowest: bool,
    /// A yield stress came out negative and was set to 0: no yield stress detected.
    pub no_yield_detected: bool,
}

/// Readings that took part, those that did not, and the fits of the models.
#[derive(Clone, Debug, PartialEq)]
pub struct FlowCurve {
    /// Indices of the readings left out: torque outside the window, or stress or rate not above 0.
    pub left_out: Vec<usize>,
    /// Fits, in the order of [`MODELS`].
    pub fits: Vec<Fit>,
}

/// Why a curve is not fitted.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoFlow {
    /// Fewer than five usable readings.
    NeedsFiveReadings,
    /// They span less than one decade of shear rate.
    NeedsADecade,
}

/// Torque in % of full scale: below 10 or above 100 not used, 10–20 of low confidence.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Torque {
    /// Below 10 or above 100.
    OutsideWindow,
    /// 10 to 20: the error is 5 to 10 % of the reading.
    LowConfidence,
    /// 20 to 100.
    Good,
}

/// The window, and the relative error in % that an error of 1 % of full scale makes.
pub fn torque(percent: f64) -> (Torque, Option<f64>) {
    let kind = match percent {
        p if !(10.0..=100.0).contains(&p) => Torque::OutsideWindow,
        p if p < 20.0 => Torque::LowConfidence,
        _ => Torque::Good,
    };
    (kind, (percent > 0.0 && percent.is_finite()).then(|| 100.0 / percent))
}

/// Fits all five models to the usable readings.
pub fn fit(readings: &[Reading]) -> Result<FlowCurve, NoFlow> {
    let usable = |r: &Reading| {
        let in_window = r.torque_percent.is_none_or(|percent| torque(percent).0 != Torque::OutsideWindow);
        in_window && r.stress > 0.0 && r.rate > 0.0 && r.stress.is_finite() && r.rate.is_finite()
    };
    let left_out: Vec<usize> = (0..readings.len()).filter(|&index| !usable(&readings[index])).collect();
    let points: Vec<Point> =
        readings.iter().filter(|r| usable(r)).map(|r| Point { x: r.rate, y: r.stress }).collect();
    if points.len() < 5 {
        return Err(NoFlow::NeedsFiveReadings);
    }
    let (low, high) = points.iter().fold((f64::INFINITY, 0.0_f64), |(l, h), p| (l.min(p.x), h.max(p.x)));
    if high < 10.0 * low {
        return Err(NoFlow::NeedsADecade);
    }
    Ok(FlowCurve { left_out, fits: MODELS.into_iter().filter_map(|model| one(model, &points)).collect() })
}

fn one(model: Model, points: &[Point]) -> Option<Fit> {
    let mapped =
        |f: fn(f64) -> f64| -> Vec<Point> { points.iter().map(|p| Point { x: f(p.x), y: f(p.y) }).collect() };
    match model {
        Model::Newton => {
            let (top, bottom) = points.iter().fold((0.0, 0.0), |(t, b), p| (t + p.x * p.y, b + p.x * p.x));
            finish(model, points, 0.0, top / bottom, 1.0)
        }
        Model::PowerLaw => {
            let line = Line::fit(&mapped(f64::ln)).ok()?;
            finish(model, points, 0.0, line.intercept().exp(), line.slope)
        }
        Model::Bingham => {
            let line = Line::fit(points).ok()?;
            finish(model, points, line.intercept(), line.slope, 1.0)
        }
        Model::Casson => {
            let line = Line::fit(&mapped(f64::sqrt)).ok()?;
            let intercept = line.intercept();
            finish(model, points, intercept.abs() * intercept, line.slope * line.slope, 1.0)
        }
        Model::HerschelBulkley => herschel_bulkley(points),
    }
}

impl Fit {
    /// The stress the model gives at a shear rate.
    pub fn stress(&self, rate: f64) -> f64 {
        match self.model {
            Model::Casson => (self.yield_stress.sqrt() + (self.consistency * rate).sqrt()).powi(2),
            _ => self.yield_stress + self.consistency * rate.powf(self.index),
        }
    }
}

/// R² and AICc of τ; a negative yield stress is 0, with the rest fitted again through it.
fn finish(model: Model, points: &[Point], yield_stress: f64, consistency: f64, index: f64) -> Option<Fit> {
    let no_yield_detected = yield_stress < 0.0;
    let consistency = if no_yield_detected && matches!(model, Model::Bingham | Model::Casson) {
        let (top, bottom) = points.iter().fold((0.0, 0.0), |(t, b), p| (t + p.x * p.y, b + p.x * p.x));
        top / bottom
    } else {
        consistency
    };
    let lowest = points.iter().map(|p| p.y).fold(f64::INFINITY, f64::min);
    let mut fit = Fit {
        model,
        yield_stress: yield_stress.max(0.0),
        consistency,
        index,
        r_squared: 0.0,
        aicc: None,
        yield_above_lowest: yield_stress > lowest,
        no_yield_detected,
    };
    let n = points.len() as f64;
    let mean = points.iter().map(|p| p.y).sum::<f64>() / n;
    let total: f64 = points.iter().map(|p| (p.y - mean).powi(2)).sum();
    let sse: f64 = points.iter().map(|p| (p.y - fit.stress(p.x)).powi(2)).sum();
    fit.r_squared = 1.0 - sse / total;
    let parameters = match model {
        Model::Newton => 2.0,
        Model::HerschelBulkley => 4.0,
        _ => 3.0,
    };
    let spare = n - parameters - 1.0;
    fit.aicc = (spare > 0.0 && sse > 0.0)
        .then(|| n * (sse / n).ln() + 2.0 * parameters + 2.0 * parameters * (parameters + 1.0) / spare);
    (fit.r_squared.is_finite() && fit.consistency.is_finite() && fit.index.is_finite()).then_some(fit)
}

/// Least squares in τ: for a given n the model is a line in γ̇ⁿ, so n alone is searched, first on a grid,
/// then by golden section. 0 ≤ τ₀ ≤ lowest stress.
fn herschel_bulkley(points: &[Point]) -> Option<Fit> {
    let lowest = points.iter().map(|p| p.y).fold(f64::INFINITY, f64::min);
    let best = |index: f64| {
        let powers: Vec<Point> = points.iter().map(|p| Point { x: p.x.powf(index), y: p.y }).collect();
        let line = Line::fit(&powers).ok()?;
        let free = line.intercept();
        let yield_stress = free.clamp(0.0, lowest);
        let consistency = if free == yield_stress {
            line.slope
        } else {
            let (top, bottom) =
                powers.iter().fold((0.0, 0.0), |(t, b), p| (t + p.x * (p.y - yield_stress), b + p.x * p.x));
            top / bottom
        };
        let error = |p: &Point| (p.y - yield_stress - consistency * p.x).powi(2);
        let sse: f64 = powers.iter().map(error).sum();
        Some((sse, yield_stress, consistency))
    };
    let sse = |index: f64| best(index).map_or(f64::INFINITY, |found| found.0);
    let grid = |k: usize| 0.05 * (1.1_f64).powi(k as i32);
    let start = (0..48).min_by(|&a, &b| sse(grid(a)).total_cmp(&sse(grid(b))))?;
    let (mut low, mut high) = (grid(start) / 1.1, grid(start) * 1.1);
    let golden = 0.618_033_988_749_894_9;
    for _ in 0..80 {
        let (a, b) = (high - golden * (high - low), low + golden * (high - low));
        if sse(a) < sse(b) { high = b } else { low = a }
    }
    let index = 0.5 * (low + high);
    let (_, yield_stress, consistency) = best(index)?;
    finish(Model::HerschelBulkley, points, yield_stress, consistency, index)
}

/// A loop of rising and falling shear rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Loop {
    /// ∫τ up − ∫τ down over the common shear rates, Pa/s; negative for rheopexy.
    pub area: f64,
    /// The same in % of the area under the way up.
    pub percent: f64,
}

/// Area between the way up and the way down, both (γ̇, τ) in rising order of γ̇, by trapezoids over their
/// common range. `None` without a common range.
pub fn thixotropy(up: &[(f64, f64)], down: &[(f64, f64)]) -> Option<Loop> {
    let range = |curve: &[(f64, f64)]| Some((curve.first()?.0, curve.last()?.0));
    let ((a, b), (c, d)) = (range(up)?, range(down)?);
    let (low, high) = (a.max(c), b.min(d));
    let rising = |curve: &[(f64, f64)]| curve.windows(2).all(|pair| pair[1].0 > pair[0].0);
    if !(rising(up) && rising(down) && high > low) {
        return None;
    }
    let (above, below) = (area(up, low, high), area(down, low, high));
    (above > 0.0).then(|| Loop { area: above - below, percent: 100.0 * (above - below) / above })
}

fn area(curve: &[(f64, f64)], low: f64, high: f64) -> f64 {
    let at = |pair: &[(f64, f64)], x: f64| {
        pair[0].1 + (x - pair[0].0) / (pair[1].0 - pair[0].0) * (pair[1].1 - pair[0].1)
    };
    curve
        .windows(2)
        .map(|pair| {
            let (from, to) = (pair[0].0.max(low), pair[1].0.min(high));
            if to > from { 0.5 * (to - from) * (at(pair, from) + at(pair, to)) } else { 0.0 }
        })
        .sum()
}

/// Shear-thinning index η(rpm)/η(10·rpm) (common practice). `None` unless both are positive.
pub fn thinning_index(slow: f64, ten_times_faster: f64) -> Option<f64> {
    let index = slow / ten_times_faster;
    (slow > 0.0 && ten_times_faster > 0.0 && index.is_finite()).then_some(index)
}

/// Recovery after shear in % of the viscosity at rest. `None` unless both are positive.
pub fn recovery_percent(after: f64, rest: f64) -> Option<f64> {
    thinning_index(after, rest).map(|share| 100.0 * share)
}

#[cfg(test)]
mod tests {
    use super::*;

    const RATES: [f64; 8] = [1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 200.0];

    fn curve(stress: impl Fn(f64) -> f64) -> Vec<Reading> {
        RATES.map(|rate| Reading { rate, stress: stress(rate), torque_percent: Some(50.0) }).to_vec()
    }

    fn of(found: &FlowCurve, model: Model) -> Fit {
        *found.fits.iter().find(|fit| fit.model == model).unwrap()
    }

    fn near(got: f64, want: f64) -> bool {
        (got - want).abs() <= 1e-7 * want.abs().max(1e-9)
    }

    #[test]
    fn every_model_finds_itself() {
        let newton = of(&fit(&curve(|g| 0.5 * g)).unwrap(), Model::Newton);
        assert!(near(newton.consistency, 0.5));
        let power = of(&fit(&curve(|g| 2.0 * g.powf(0.6))).unwrap(), Model::PowerLaw);
        assert!(near(power.consistency, 2.0) && near(power.index, 0.6));
        let bingham = of(&fit(&curve(|g| 3.0 + 0.2 * g)).unwrap(), Model::Bingham);
        assert!(near(bingham.yield_stress, 3.0) && near(bingham.consistency, 0.2));
        let casson =
            of(&fit(&curve(|g| (2.0_f64.sqrt() + (0.1 * g).sqrt()).powi(2))).unwrap(), Model::Casson);
        assert!(near(casson.yield_stress, 2.0) && near(casson.consistency, 0.1));
        let hb = of(&fit(&curve(|g| 1.5 * g.powf(0.55) + 0.9)).unwrap(), Model::HerschelBulkley);
        assert!((hb.yield_stress - 0.9).abs() < 1e-5 && (hb.index - 0.55).abs() < 1e-6, "{hb:?}");
    }

    #[test]
    fn herschel_bulkley_is_never_worse_than_the_power_law() {
        let noise = [0.03, -0.05, 0.02, 0.06, -0.04, 0.01, -0.06, 0.05];
        let mut readings = curve(|g| 1.2 * g.powf(0.5));
        readings.iter_mut().zip(noise).for_each(|(r, e)| r.stress *= 1.0 + e);
        let found = fit(&readings).unwrap();
        assert!(of(&found, Model::HerschelBulkley).r_squared >= of(&found, Model::PowerLaw).r_squared);
    }

    #[test]
    fn readings_outside_the_window_are_listed() {
        let mut readings = curve(|g| 0.5 * g);
        readings[0].torque_percent = Some(4.0);
        readings[1].stress = -0.1;
        assert_eq!(fit(&readings).unwrap().left_out, [0, 1]);
        assert_eq!(fit(&readings[..6]), Err(NoFlow::NeedsFiveReadings));
        let narrow: Vec<Reading> =
            (1..=6).map(|i| Reading { rate: f64::from(i), stress: 1.0, torque_percent: None }).collect();
        assert_eq!(fit(&narrow), Err(NoFlow::NeedsADecade));
        assert_eq!(
            (torque(9.9).0, torque(15.0).0, torque(50.0)),
            (Torque::OutsideWindow, Torque::LowConfidence, (Torque::Good, Some(2.0)))
        );
    }

    #[test]
    fn a_negative_yield_stress_is_none() {
        let bingham = of(&fit(&curve(|g| 0.1 * g.powf(1.3))).unwrap(), Model::Bingham);
        assert!(bingham.no_yield_detected && bingham.yield_stress == 0.0);
    }

    #[test]
    fn loop_area() {
        let up = [(0.0, 0.0), (100.0, 100.0)];
        let down = [(0.0, 0.0), (50.0, 30.0), (100.0, 100.0)];
        let found = thixotropy(&up, &down).unwrap();
        assert!((found.area - 1000.0).abs() < 1e-9 && (found.percent - 20.0).abs() < 1e-12);
        assert_eq!(thixotropy(&up, &[(200.0, 1.0), (300.0, 2.0)]), None);
    }
}
