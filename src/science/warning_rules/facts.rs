//! What the rules look at: one lot, its pulls, its formula and label.

use crate::science::distribution::student::Student;
use crate::science::regression::{Line, Point};

/// A viscosity reading.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Viscosity {
    /// Value, mPa·s.
    pub value: f64,
    /// Equal numbers mean equal spindle, speed, temperature (±1 °C) and rest: only those compare.
    pub method: u32,
    /// Whether it was taken at a shear rate like that around a settling particle (below about 0.1/s).
    pub low_shear: bool,
}

/// One pull. Everything may be missing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Pull {
    /// Age, days.
    pub age_days: f64,
    /// Sedimentation volume ratio.
    pub f: Option<f64>,
    /// Inversions to redisperse, the largest over containers.
    pub inversions: Option<f64>,
    /// Residue on the base after 50 inversions.
    pub residue: Option<bool>,
    /// Seconds to redisperse.
    pub seconds: Option<f64>,
    /// First settling rate of the interface.
    pub settling_rate: Option<f64>,
    /// Particle size, 10 % point.
    pub d10: Option<f64>,
    /// Particle size, 90 % point.
    pub d90: Option<f64>,
    /// Mean particle size.
    pub mean_size: Option<f64>,
    /// Spread of sizes: polydispersity index or span.
    pub size_spread: Option<f64>,
    /// Zeta potential, mV.
    pub zeta: Option<f64>,
    /// Viscosity.
    pub viscosity: Option<Viscosity>,
    /// pH.
    pub ph: Option<f64>,
    /// Assay, % of label.
    pub assay: Option<f64>,
    /// Relative standard deviation of assay replicates, %.
    pub assay_rsd: Option<f64>,
    /// Other analytes, % of label, always in one order.
    pub other_assays: Vec<f64>,
    /// Top minus bottom of the container, % of label.
    pub top_bottom: Option<f64>,
    /// Density.
    pub density: Option<f64>,
    /// Weight loss of the container, %.
    pub weight_loss: Option<f64>,
    /// Preservative, % of label.
    pub preservative: Option<f64>,
    /// log₁₀ of the larger microbial count.
    pub log_count: Option<f64>,
    /// Odour changed.
    pub odour_changed: Option<bool>,
    /// Colour changed.
    pub colour_changed: Option<bool>,
}

/// The first day in a cylinder.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct FirstDay {
    /// Supernatant still turbid after 24 h.
    pub turbid: Option<bool>,
    /// F after 24 h.
    pub f: Option<f64>,
    /// Interface sharp.
    pub sharp_interface: Option<bool>,
}

/// What the label says about shaking.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Label {
    /// Inversions.
    pub inversions: Option<f64>,
    /// Seconds.
    pub seconds: Option<f64>,
}

/// What the formula tells.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Formula {
    /// pH range in which the thickener keeps its viscosity.
    pub thickener_ph: Option<(f64, f64)>,
    /// Highest pH at which the preservative works.
    pub preservative_highest_ph: Option<f64>,
    /// A thickener or surfactant that binds the preservative is present.
    pub binds_preservative: Option<bool>,
    /// The effectiveness test has a result.
    pub effectiveness_tested: Option<bool>,
    /// An ionic additive or cationic preservative is present beside an anionic thickener.
    pub incompatible_ions: Option<bool>,
    /// Volume fraction of solids.
    pub solids: Option<f64>,
}

/// Limits.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Limits {
    /// Lowest pH.
    pub ph_lower: Option<f64>,
    /// Highest pH.
    pub ph_upper: Option<f64>,
    /// Lowest preservative, % of label.
    pub preservative_lower: Option<f64>,
}

/// The same reading in upright and inverted containers.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ArmPair {
    /// Upright.
    pub upright: Vec<f64>,
    /// Inverted.
    pub inverted: Vec<f64>,
}

/// A test with limits, for the bound rule; ages in days.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Attribute {
    /// (age in days, value).
    pub results: Vec<(f64, f64)>,
    /// Lower limit.
    pub lower: Option<f64>,
    /// Upper limit.
    pub upper: Option<f64>,
}

/// Something odd about a single reading.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Doubt {
    /// The interface was read above the liquid.
    InterfaceAboveLiquid,
    /// Torque in % of full scale.
    Torque(f64),
    /// A shear stress.
    Stress(f64),
    /// A pH was read without a calibration that holds.
    PhWithoutCalibration,
    /// A printed standard deviation that is no number.
    UnreadableSpread,
}

/// What two readings of the same thing differ by at most, by the method; a smaller change is none.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Repeatability {
    /// Sedimentation ratio.
    pub f: Option<f64>,
    /// Inversions.
    pub inversions: Option<f64>,
    /// Viscosity, mPa·s.
    pub viscosity: Option<f64>,
    /// pH.
    pub ph: Option<f64>,
    /// Assay, % of label.
    pub assay: Option<f64>,
    /// Density.
    pub density: Option<f64>,
}

/// One lot.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Lot {
    /// Pulls in the order they were recorded.
    pub pulls: Vec<Pull>,
    /// Pulls of the same lot stored warm or cycled.
    pub warm: Vec<Pull>,
    /// First day in a cylinder.
    pub first_day: FirstDay,
    /// Label.
    pub label: Label,
    /// Formula.
    pub formula: Formula,
    /// Limits.
    pub limits: Limits,
    /// Repeatability of the methods.
    pub repeatability: Repeatability,
    /// Claimed expiry, days.
    pub expiry_days: Option<f64>,
    /// Weight loss, F and cap residue by orientation.
    pub arms: Vec<ArmPair>,
    /// Tests with limits.
    pub attributes: Vec<Attribute>,
    /// Doubts about readings.
    pub doubts: Vec<Doubt>,
    /// F is read on a falling boundary, so that a rise is odd (not on a rising bed).
    pub falling_boundary: bool,
}

/// A value with its age.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct At {
    pub age: f64,
    pub value: f64,
}

/// All values of one kind, by age.
pub(super) fn values(pulls: &[Pull], pick: impl Fn(&Pull) -> Option<f64>) -> Vec<At> {
    let known = pulls.iter().filter_map(|pull| {
        pick(pull).filter(|value| value.is_finite()).map(|value| At { age: pull.age_days, value })
    });
    let mut all: Vec<At> = known.collect();
    all.sort_by(|a, b| a.age.total_cmp(&b.age));
    all
}

/// First and last value, if there are two ages.
pub(super) fn ends(values: &[At]) -> Option<(At, At)> {
    let (first, last) = (*values.first()?, *values.last()?);
    (last.age > first.age).then_some((first, last))
}

/// The line through values, per day.
pub(super) fn line(values: &[At]) -> Option<Line> {
    let points: Vec<Point> = values.iter().map(|at| Point { x: at.age, y: at.value }).collect();
    Line::fit(&points).ok()
}

/// Whether a slope differs from zero: −1 falls, 1 rises, 0 neither, by its 90 % confidence interval.
pub(super) fn significant(line: &Line) -> i8 {
    let half = (line.df > 0)
        .then(|| Some(Student::new(line.df as f64)?.upper_quantile(0.05)? * line.se_slope()?))
        .flatten();
    match half {
        Some(half) if line.slope - half > 0.0 => 1,
        Some(half) if line.slope + half < 0.0 => -1,
        _ => 0,
    }
}

/// Whether the change from first to last exceeds what the method itself scatters by, where that is known.
pub(super) fn exceeds(values: &[At], repeatability: Option<f64>) -> bool {
    let change = ends(values).map_or(0.0, |(first, last)| (last.value - first.value).abs());
    repeatability.is_none_or(|least| change > least)
}

/// −1 for a fall, 1 for a rise that is significant and exceeds the repeatability of the method.
pub(super) fn significant_change(values: &[At], repeatability: Option<f64>) -> i8 {
    if !exceeds(values, repeatability) {
        return 0;
    }
    line(values).map_or(0, |line| significant(&line))
}

/// Whether values rose: the last above the first by more than the repeatability, and with three values or more a
/// slope that differs from zero. None with fewer than two ages.
pub(super) fn rose(values: &[At], repeatability: Option<f64>) -> Option<bool> {
    let (first, last) = ends(values)?;
    let real = values.len() < 3 || significant_change(values, repeatability) > 0;
    Some(last.value > first.value && exceeds(values, repeatability) && real)
}

/// R² of a power of the values against age.
pub(super) fn r_squared(values: &[At], power: i32) -> Option<f64> {
    let raised: Vec<At> = values.iter().map(|at| At { age: at.age, value: at.value.powi(power) }).collect();
    line(&raised)?.r_squared()
}
