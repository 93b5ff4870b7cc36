//! R8 preservative, R9 water loss, R10 assay scatter, R12 pH drift.

use super::facts::{At, Lot, ends, line, rose, significant_change, values};
use super::{CLOSE, Finding, Level, Rule, Settings};
use crate::science::distribution::student::Student;
use crate::science::shelf_life::{Outcome, Side, crossing};

/// Age at which the one-sided 95 % limit of the mean meets a limit.
pub(super) fn bound_meets(values: &[At], limit: f64, side: Side) -> Option<Outcome> {
    let mean = line(values)?.mean_line()?;
    let t = Student::new(mean.df as f64)?.upper_quantile(0.05)?;
    Some(crossing(&mean, limit, side, t))
}

/// R8: content falls below its limit before expiry, or pH or binding disarm it.
pub(super) fn preservative(lot: &Lot) -> Finding {
    let content = values(&lot.pulls, |pull| pull.preservative);
    let ph = values(&lot.pulls, |pull| pull.ph).last().copied();
    let formula = lot.formula;
    let projected = lot.limits.preservative_lower.zip(lot.expiry_days).and_then(|(limit, expiry)| {
        let slope = line(&content)?.slope;
        let months = bound_meets(&content, limit, Side::Lower)?.months();
        Some(slope < 0.0 && months.is_some_and(|age| age < expiry))
    });
    let too_high = ph.zip(formula.preservative_highest_ph).map(|(ph, highest)| ph.value > highest);
    let unbound = formula.binds_preservative.map(|binds| binds && formula.effectiveness_tested != Some(true));
    let mut finding = Finding::new(Rule::R8);
    for (known, name) in [
        (projected.is_some(), "preservative at three ages, its limit and the expiry"),
        (too_high.is_some(), "pH and the preservative's highest pH"),
        (unbound.is_some(), "whether the formula binds the preservative"),
    ] {
        if !known {
            finding.missing.push(name);
        }
    }
    if finding.missing.len() == 3 {
        return Finding { level: Level::NotEvaluable, ..finding };
    }
    if let Some(at) = content.last() {
        finding = finding.with("preservative now", at.value, Some(at.age));
    }
    if let Some(at) = ph {
        finding = finding.with("pH now", at.value, Some(at.age));
    }
    if [projected, too_high, unbound].contains(&Some(true)) {
        return finding
            .fires(Level::Watch, "suggests that the preservative is at risk: order the effectiveness test");
    }
    finding
}

/// R9: an assay that rose and stayed up, with loss of water: concentrated, not gained.
pub(super) fn water_loss(lot: &Lot, settings: &Settings) -> Finding {
    let assay = values(&lot.pulls, |pull| pull.assay);
    let Some((first, last)) = ends(&assay) else {
        return Finding::lacking(Rule::R9, &["assay at two ages"]);
    };
    let loss = values(&lot.pulls, |pull| pull.weight_loss).last().copied();
    let density = rose(&values(&lot.pulls, |pull| pull.density), lot.repeatability.density);
    let thickness = values(&lot.pulls, |pull| pull.viscosity.map(|viscosity| viscosity.value));
    let viscosity = rose(&thickness, lot.repeatability.viscosity);
    let ratio = last.value / first.value;
    let together = others_in_ratio(lot, ratio);
    let mut finding = Finding::new(Rule::R9).with("assay at baseline", first.value, Some(first.age)).with(
        "assay now",
        last.value,
        Some(last.age),
    );
    if loss.is_none() {
        finding.missing.push("weight loss");
    }
    // Whether the rise persists is told by the last pull, not by a peak between.
    if (ratio - 1.0) * 100.0 < settings.assay_rise - CLOSE {
        return finding;
    }
    let lost = loss.map(|loss| loss.value >= settings.weight_loss - CLOSE);
    let both = density.zip(viscosity).map(|(density, viscosity)| density && viscosity);
    if lost.or(both).or(together).is_none() {
        finding.missing.push("density and viscosity, or other analytes");
        return Finding { level: Level::NotEvaluable, ..finding };
    }
    if ![lost, both, together].contains(&Some(true)) {
        return finding;
    }
    if let Some(loss) = loss {
        finding = finding.with("weight loss, %", loss.value, Some(loss.age)).with(
            "assay corrected for the loss",
            last.value * (1.0 - loss.value / 100.0),
            Some(last.age),
        );
    }
    finding.fires(Level::Watch, "suggests that water was lost: correct the assay for it and show both")
}

/// Whether all other analytes rose in the ratio of the assay, within 1 %.
fn others_in_ratio(lot: &Lot, ratio: f64) -> Option<bool> {
    let mut with = lot.pulls.iter().filter(|pull| !pull.other_assays.is_empty());
    let (first, last) = (with.next()?, with.next_back()?);
    let same = first.other_assays.len() == last.other_assays.len() && first.age_days < last.age_days;
    let pairs = first.other_assays.iter().zip(&last.other_assays);
    same.then(|| pairs.into_iter().all(|(a, b)| *a > 0.0 && (b / a - ratio).abs() <= 0.01))
}

/// R10: scatter that grew together with hard redispersion, or a first assay far from theory.
pub(super) fn scatter(lot: &Lot, settings: &Settings) -> Finding {
    let rsd = values(&lot.pulls, |pull| pull.assay_rsd);
    let assay = values(&lot.pulls, |pull| pull.assay);
    let Some(first_assay) = assay.first() else {
        return Finding::lacking(Rule::R10, &["assay"]);
    };
    let mut finding = Finding::new(Rule::R10).with("first assay", first_assay.value, Some(first_assay.age));
    if first_assay.age == 0.0 && first_assay.value < settings.first_assay - CLOSE {
        return finding.fires(
            Level::Watch,
            "suggests a fault of sampling or mixing: the first assay is far from theory",
        );
    }
    let Some((first, last)) = ends(&rsd) else {
        finding.missing.push("assay replicates at two ages");
        return Finding { level: Level::NotEvaluable, ..finding };
    };
    finding = finding.with("scatter at baseline, %", first.value, Some(first.age)).with(
        "scatter now, %",
        last.value,
        Some(last.age),
    );
    let grown = last.value >= settings.scatter_share * first.value - CLOSE
        && last.value >= settings.scatter_least - CLOSE;
    let harder =
        rose(&values(&lot.pulls, |pull| pull.inversions), lot.repeatability.inversions) == Some(true);
    let residue = lot.pulls.last().is_some_and(|pull| pull.residue == Some(true));
    let apart = values(&lot.pulls, |pull| pull.top_bottom.map(f64::abs)).last().copied();
    let uneven = apart.is_some_and(|at| at.value >= settings.top_bottom - CLOSE);
    if grown && (harder || residue || uneven) {
        return finding.fires(Level::Watch, "suggests poor resuspension before sampling, not degradation");
    }
    finding
}

/// R12: pH moved, together with what assay and colour do.
pub(super) fn ph_drift(lot: &Lot, settings: &Settings) -> Finding {
    let ph = values(&lot.pulls, |pull| pull.ph);
    let Some((first, last)) = ends(&ph) else {
        return Finding::lacking(Rule::R12, &["pH at two ages"]);
    };
    let mut finding = Finding::new(Rule::R12).with("pH at baseline", first.value, Some(first.age)).with(
        "pH now",
        last.value,
        Some(last.age),
    );
    let moved = (last.value - first.value).abs() >= settings.ph_change - CLOSE;
    let outside = line(&ph).zip(lot.expiry_days).is_some_and(|(line, expiry)| {
        let then = line.at(expiry);
        let lower = lot.limits.ph_lower.is_some_and(|limit| then < limit);
        let upper = lot.limits.ph_upper.is_some_and(|limit| then > limit);
        significant_change(&ph, lot.repeatability.ph) != 0 && (lower || upper)
    });
    if !(moved || outside) {
        return finding;
    }
    let assay = values(&lot.pulls, |pull| pull.assay);
    let assay_falls = significant_change(&assay, lot.repeatability.assay) < 0;
    let colour = lot.pulls.iter().any(|pull| pull.colour_changed == Some(true));
    if let Some(line) = line(&assay) {
        finding = finding.with("assay slope per day", line.slope, None);
    }
    let suggests = if assay_falls || colour {
        "suggests breakdown that moves the pH: assay or colour move with it"
    } else {
        "suggests hydrolysis, carbon dioxide, leaching or loss of preservative: assay and colour hold"
    };
    finding.fires(Level::Watch, suggests)
}
