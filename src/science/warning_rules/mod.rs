//! Fifteen rules that read several tests of one lot together and suggest what may be going on.
//!
//! Each answers with a level, its evidence (values and ages it used), what is missing, and a sentence that
//! begins with "suggests": a rule never says that something is so. Thresholds are settings; their defaults
//! are common practice, set with published series in view.

mod content;
pub mod facts;
mod label;
mod particles;
mod readings;
mod settling;
mod thickener;

use facts::Lot;

/// A rule.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Rule {
    /// Early caking.
    R1,
    /// Delayed collapse.
    R2,
    /// Flocculated or deflocculated.
    R3,
    /// Particle growth.
    R4,
    /// Ripening or aggregation.
    R5,
    /// Viscosity loss explains settling.
    R6,
    /// Why the thickener failed.
    R7,
    /// Preservative at risk.
    R8,
    /// Water loss looks like stability.
    R9,
    /// Assay scatter from poor resuspension.
    R10,
    /// Label shake too short.
    R11,
    /// pH drift with assay or colour.
    R12,
    /// Orientation or closure.
    R13,
    /// Point passes, bound does not.
    R14,
    /// Implausible reading.
    R15,
}

/// What a rule found.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Level {
    /// Inputs are missing; they are named.
    NotEvaluable,
    /// The condition does not hold.
    Quiet,
    /// Worth knowing; no warning.
    Note,
    /// A warning.
    Watch,
    /// A warning that a limit or the label is already missed.
    Fail,
}

/// A value a rule used.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Evidence {
    /// What it is.
    pub name: &'static str,
    /// The value.
    pub value: f64,
    /// Age of the pull in days, where it belongs to one.
    pub age_days: Option<f64>,
}

/// The answer of a rule.
#[derive(Clone, Debug, PartialEq)]
pub struct Finding {
    /// The rule.
    pub rule: Rule,
    /// The level.
    pub level: Level,
    /// What it suggests, beginning with "suggests"; empty where it is quiet or not evaluable.
    pub suggests: &'static str,
    /// Values used.
    pub evidence: Vec<Evidence>,
    /// Inputs that were missing.
    pub missing: Vec<&'static str>,
}

impl Finding {
    fn new(rule: Rule) -> Self {
        let (evidence, missing) = (Vec::new(), Vec::new());
        Self { rule, level: Level::Quiet, suggests: "", evidence, missing }
    }

    fn lacking(rule: Rule, missing: &[&'static str]) -> Self {
        Self { level: Level::NotEvaluable, missing: missing.to_vec(), ..Self::new(rule) }
    }

    /// Adds evidence; what is too large for a number is the largest, what is none is left out.
    fn with(mut self, name: &'static str, value: f64, age_days: Option<f64>) -> Self {
        if value.is_nan() {
            return self;
        }
        let value = value.clamp(f64::MIN, f64::MAX);
        self.evidence.push(Evidence { name, value, age_days });
        self
    }

    fn fires(mut self, level: Level, suggests: &'static str) -> Self {
        (self.level, self.suggests) = (level, suggests);
        self
    }

    /// Whether it says anything.
    pub fn speaks(&self) -> bool {
        self.level > Level::Quiet
    }
}

/// Thresholds; shares as numbers, 0.85 for 85 %.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Settings {
    /// R1: F at or below this share of the baseline.
    pub caking_f_share: f64,
    /// R1: inversions at or above this share of the baseline …
    pub caking_inversion_share: f64,
    /// R1: … and at least so many more.
    pub caking_inversions_more: f64,
    /// R2: drop in one interval.
    pub collapse_drop: f64,
    /// R2: share of the whole loss.
    pub collapse_share: f64,
    /// R2: F before.
    pub collapse_before: f64,
    /// R3: |ζ| in mV above which a suspension counts as charged.
    pub charged_zeta: f64,
    /// R3: inversions up to which redispersion is easy.
    pub easy_inversions: f64,
    /// R4: growth that is watched.
    pub growth_watch: f64,
    /// R4: growth that fails.
    pub growth_fail: f64,
    /// R5: share of |ζ| lost.
    pub zeta_loss: f64,
    /// R5: share by which the spread of sizes grew.
    pub spread_share: f64,
    /// R6: viscosity at or below this share of the baseline.
    pub thinning_share: f64,
    /// R6: how far predicted and observed rate ratio may lie apart.
    pub rate_factor: f64,
    /// R7: growth of counts in log₁₀.
    pub microbial_logs: f64,
    /// R9: rise of the assay in % of the baseline.
    pub assay_rise: f64,
    /// R9: weight loss in %.
    pub weight_loss: f64,
    /// R10: relative standard deviation against the baseline …
    pub scatter_share: f64,
    /// R10: … and at least so many %.
    pub scatter_least: f64,
    /// R10: top and bottom apart, in %.
    pub top_bottom: f64,
    /// R10: first assay below so many % of theory.
    pub first_assay: f64,
    /// R11: share of the label that is watched.
    pub label_share: f64,
    /// R12: change of pH.
    pub ph_change: f64,
    /// R13: difference in pooled standard deviations …
    pub arm_sds: f64,
    /// R13: … that comes by chance less often than this, over all pairs compared.
    pub arm_level: f64,
    /// R15: largest F.
    pub largest_f: f64,
    /// R15: rise of F between readings without shaking.
    pub f_rise: f64,
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            caking_f_share: 0.85,
            caking_inversion_share: 1.5,
            caking_inversions_more: 3.0,
            collapse_drop: 0.20,
            collapse_share: 0.5,
            collapse_before: 0.80,
            charged_zeta: 25.0,
            easy_inversions: 10.0,
            growth_watch: 1.10,
            growth_fail: 1.50,
            zeta_loss: 0.30,
            spread_share: 1.5,
            thinning_share: 0.8,
            rate_factor: 2.0,
            microbial_logs: 1.0,
            assay_rise: 3.0,
            weight_loss: 1.0,
            scatter_share: 2.0,
            scatter_least: 3.0,
            top_bottom: 5.0,
            first_assay: 90.0,
            label_share: 0.8,
            ph_change: 0.5,
            arm_sds: 2.0,
            arm_level: 0.01,
            largest_f: 1.1,
            f_rise: 0.05,
        }
    }
}

/// All rules on one lot, R1 to R15.
pub fn all(lot: &Lot, settings: &Settings) -> Vec<Finding> {
    vec![
        settling::early_caking(lot, settings),
        settling::delayed_collapse(lot, settings),
        settling::state(lot, settings),
        particles::growth(lot, settings),
        particles::cause(lot, settings),
        thickener::loss_explains_settling(lot, settings),
        thickener::why(lot, settings),
        content::preservative(lot),
        content::water_loss(lot, settings),
        content::scatter(lot, settings),
        label::shake(lot, settings),
        content::ph_drift(lot, settings),
        label::orientation(lot, settings),
        label::bound(lot),
        readings::implausible(lot, settings),
    ]
}

/// A comparison that a threshold meets in spite of rounding.
const CLOSE: f64 = 1e-9;

#[cfg(test)]
mod tests;
