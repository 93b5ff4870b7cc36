//! R11 label shake, R13 orientation, R14 bound against claim.

use super::content::bound_meets;
use super::facts::{ArmPair, At, Lot, values};
use super::{CLOSE, Finding, Level, Rule, Settings};
use crate::science::distribution::student::Student;
use crate::science::shelf_life::Side;

/// R11: the shake on the label is not enough, or nearly so.
pub(super) fn shake(lot: &Lot, settings: &Settings) -> Finding {
    let pairs = [
        (
            values(&lot.pulls, |pull| pull.inversions),
            lot.label.inversions,
            "inversions now",
            "inversions on the label",
        ),
        (values(&lot.pulls, |pull| pull.seconds), lot.label.seconds, "seconds now", "seconds on the label"),
    ];
    let mut finding = Finding::new(Rule::R11);
    let mut largest: f64 = 0.0;
    for (found, label, name, label_name) in pairs {
        let (Some(last), Some(label)) = (found.last(), label.filter(|label| *label > 0.0)) else { continue };
        finding = finding.with(name, last.value, Some(last.age)).with(label_name, label, None);
        largest = largest.max(last.value / label);
    }
    if finding.evidence.is_empty() {
        return Finding::lacking(Rule::R11, &["shake count or seconds, and what the label says"]);
    }
    match largest {
        share if share > 1.0 + CLOSE => {
            finding.fires(Level::Fail, "suggests that the label shake is too short: change label or formula")
        }
        share if share >= settings.label_share - CLOSE => {
            finding.fires(Level::Watch, "suggests that the label shake will soon be too short")
        }
        _ => finding,
    }
}

/// Mean and sum of squares about it.
fn moments(values: &[f64]) -> (f64, f64) {
    let mean = values.iter().sum::<f64>() / values.len() as f64;
    (mean, values.iter().map(|v| (v - mean) * (v - mean)).sum())
}

/// Difference of the arms with their pooled standard deviation.
struct Difference {
    difference: f64,
    sd: f64,
    /// Its standard error.
    error: f64,
    df: f64,
}

impl Difference {
    /// Two-sided probability of Student's t test with pooled variance.
    fn p(&self) -> f64 {
        if self.error <= 0.0 {
            return f64::from(self.difference == 0.0);
        }
        Student::new(self.df).map_or(1.0, |student| student.two_sided(self.difference / self.error))
    }
}

fn difference(pair: &ArmPair) -> Option<Difference> {
    let (n, m) = (pair.upright.len(), pair.inverted.len());
    (n >= 2 && m >= 2).then_some(())?;
    let ((up, up_squares), (down, down_squares)) = (moments(&pair.upright), moments(&pair.inverted));
    let (difference, df) = (down - up, (n + m - 2) as f64);
    let sd = ((up_squares + down_squares) / df).sqrt();
    let error = sd * (1.0 / n as f64 + 1.0 / m as f64).sqrt();
    (difference.is_finite() && sd.is_finite()).then_some(Difference { difference, sd, error, df })
}

/// R13: inverted containers differ from upright ones.
pub(super) fn orientation(lot: &Lot, settings: &Settings) -> Finding {
    let found: Vec<Difference> = lot.arms.iter().filter_map(difference).collect();
    if found.is_empty() {
        return Finding::lacking(Rule::R13, &["two upright and two inverted containers"]);
    }
    let mut finding = Finding::new(Rule::R13);
    for one in &found {
        finding = finding
            .with("inverted minus upright", one.difference, None)
            .with("pooled sd", one.sd, None)
            .with("probability by chance", one.p(), None);
    }
    // Beyond the stated number of standard deviations AND beyond chance: the standard deviation of the
    // difference of two small means is not much smaller than the one of a value, so that with three containers a
    // side 2 sd alone are passed by 7 % of pairs that do not differ.
    let differs = |one: &Difference| {
        let beyond = one.difference.abs() > settings.arm_sds * one.sd + CLOSE * one.difference.abs();
        beyond && one.p() * (found.len() as f64) < settings.arm_level
    };
    if found.iter().any(differs) {
        return finding
            .fires(Level::Watch, "suggests a leak, sorption by the closure, or a cake at the shoulder");
    }
    finding
}

/// R14: the last result passes, but the confidence limit of the mean crosses before expiry: "not yet proven",
/// never a warning.
pub(super) fn bound(lot: &Lot) -> Finding {
    let Some(expiry) = lot.expiry_days else {
        return Finding::lacking(Rule::R14, &["claimed expiry"]);
    };
    let mut finding = Finding::new(Rule::R14);
    let mut judged = false;
    for attribute in &lot.attributes {
        let results: Vec<At> = attribute.results.iter().map(|&(age, value)| At { age, value }).collect();
        let Some(last) = results.last().copied() else { continue };
        for (side, limit) in [(Side::Lower, attribute.lower), (Side::Upper, attribute.upper)] {
            let Some(limit) = limit else { continue };
            let Some(outcome) = bound_meets(&results, limit, side) else { continue };
            judged = true;
            let passes = if side == Side::Lower { last.value >= limit } else { last.value <= limit };
            let Some(age) = outcome.months().filter(|age| passes && *age < expiry) else { continue };
            finding = finding
                .with("last result", last.value, Some(last.age))
                .with("limit", limit, None)
                .with("bound meets the limit at, days", age, None)
                .fires(Level::Note, "suggests that the claimed expiry is not yet proven");
        }
    }
    if !judged {
        return Finding::lacking(Rule::R14, &["results at three ages with a limit"]);
    }
    finding
}
