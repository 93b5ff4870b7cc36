//! R15 implausible readings: queried and kept raw; a person decides.

use super::facts::{Doubt, Lot};
use super::{CLOSE, Finding, Level, Rule, Settings};
use crate::science::flow::{Torque, torque};
use crate::science::sedimentation::smallest_ratio;

/// R15: everything that cannot well be so.
pub(super) fn implausible(lot: &Lot, settings: &Settings) -> Finding {
    if lot.pulls.is_empty() && lot.doubts.is_empty() {
        return Finding::lacking(Rule::R15, &["readings"]);
    }
    let mut finding = Finding::new(Rule::R15);
    let mut odd = false;
    let mut add = |finding: Finding, name: &'static str, value: f64, age: Option<f64>| {
        odd = true;
        finding.with(name, value, age)
    };
    let smallest = lot.formula.solids.and_then(smallest_ratio);
    if smallest.is_none() {
        finding.missing.push("volume fraction of solids");
    }
    let mut before: Option<f64> = None;
    let mut age = f64::NEG_INFINITY;
    for pull in &lot.pulls {
        if pull.age_days < age {
            finding = add(finding, "time decreasing", pull.age_days, Some(pull.age_days));
        }
        age = pull.age_days;
        let Some(f) = pull.f else { continue };
        if !f.is_finite() {
            finding = add(finding, "F that is no number", 0.0, Some(age));
            continue;
        }
        if f > settings.largest_f + CLOSE {
            finding = add(finding, "F above its largest", f, Some(age));
        }
        if smallest.is_some_and(|smallest| f < smallest - CLOSE) {
            finding = add(finding, "F below what packing allows", f, Some(age));
        }
        let rise = before.map_or(0.0, |before| f - before);
        if lot.falling_boundary && rise > settings.f_rise + CLOSE {
            finding = add(finding, "F rose without shaking", f, Some(age));
        }
        before = Some(f);
    }
    for doubt in &lot.doubts {
        finding = match *doubt {
            Doubt::InterfaceAboveLiquid => add(finding, "interface above the liquid", 1.0, None),
            Doubt::Torque(percent) if torque(percent).0 == Torque::OutsideWindow => {
                add(finding, "torque outside its window, %", percent, None)
            }
            Doubt::Stress(stress) if stress <= 0.0 => add(finding, "stress not above 0", stress, None),
            Doubt::PhWithoutCalibration => add(finding, "pH without a calibration that holds", 1.0, None),
            Doubt::UnreadableSpread => add(finding, "standard deviation that is no number", 1.0, None),
            _ => finding,
        };
    }
    if odd {
        return finding.fires(Level::Note, "suggests a reading error: query it, keep the raw value");
    }
    finding
}
