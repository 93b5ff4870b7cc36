//! R6 viscosity loss explains settling, R7 why the thickener failed.

use super::facts::{At, Lot, Pull, ends, significant_change, values};
use super::{CLOSE, Finding, Level, Rule, Settings};

/// Low-shear viscosities by one method: that of the first pull that has one.
fn comparable(pulls: &[Pull]) -> Vec<At> {
    let low = |pull: &Pull| pull.viscosity.filter(|viscosity| viscosity.low_shear && viscosity.value > 0.0);
    let Some(method) = pulls.iter().find_map(low).map(|viscosity| viscosity.method) else {
        return Vec::new();
    };
    values(pulls, |pull| {
        low(pull).filter(|viscosity| viscosity.method == method).map(|viscosity| viscosity.value)
    })
}

fn falling(values: &[At], repeatability: Option<f64>) -> bool {
    let fell = ends(values).is_some_and(|(first, last)| last.value < first.value);
    fell && significant_change(values, repeatability) < 0
}

/// R6: viscosity fell, F falls, and the faster settling is about what the loss predicts.
pub(super) fn loss_explains_settling(lot: &Lot, settings: &Settings) -> Finding {
    let viscosity = comparable(&lot.pulls);
    let rates = values(&lot.pulls, |pull| pull.settling_rate.filter(|rate| *rate > 0.0));
    let f = values(&lot.pulls, |pull| pull.f);
    let mut missing = Vec::new();
    if ends(&viscosity).is_none() {
        missing.push("low-shear viscosity by one method at two ages");
    }
    if ends(&rates).is_none() {
        missing.push("settling rate at two ages");
    }
    if f.len() < 3 {
        missing.push("sedimentation ratio at three ages");
    }
    let (Some((v_first, v_last)), Some((r_first, r_last)), true) =
        (ends(&viscosity), ends(&rates), missing.is_empty())
    else {
        return Finding::lacking(Rule::R6, &missing);
    };
    let (predicted, observed) = (v_first.value / v_last.value, r_last.value / r_first.value);
    let finding = Finding::new(Rule::R6)
        .with("viscosity at baseline", v_first.value, Some(v_first.age))
        .with("viscosity now", v_last.value, Some(v_last.age))
        .with("predicted rate ratio", predicted, None)
        .with("observed rate ratio", observed, None);
    let apart = (predicted / observed).max(observed / predicted);
    let thin = v_last.value <= settings.thinning_share * v_first.value + CLOSE;
    if thin && falling(&f, lot.repeatability.f) && apart <= settings.rate_factor + CLOSE {
        finding.fires(Level::Watch, "suggests that the thickener fails, not that the sediment cakes")
    } else {
        finding
    }
}

/// R7: the likeliest cause, in a fixed order, where R6 speaks.
pub(super) fn why(lot: &Lot, settings: &Settings) -> Finding {
    let loss = loss_explains_settling(lot, settings);
    if loss.level == Level::NotEvaluable {
        return Finding::lacking(Rule::R7, &loss.missing);
    }
    let mut finding = Finding::new(Rule::R7);
    if !loss.speaks() {
        return finding;
    }
    let ph = values(&lot.pulls, |pull| pull.ph).last().copied();
    let counts = values(&lot.pulls, |pull| pull.log_count);
    let grown = ends(&counts).map(|(first, last)| last.value - first.value);
    for (known, name) in [
        (ph.is_some() && lot.formula.thickener_ph.is_some(), "pH and the thickener's pH range"),
        (grown.is_some(), "microbial counts at two ages"),
        (lot.formula.incompatible_ions.is_some(), "ions of the formula"),
    ] {
        if !known {
            finding.missing.push(name);
        }
    }
    if let (Some(ph), Some((low, high))) = (ph, lot.formula.thickener_ph)
        && !(low..=high).contains(&ph.value)
    {
        return finding
            .with("pH", ph.value, Some(ph.age))
            .fires(Level::Watch, "suggests pH: it lies outside the range in which the thickener lasts");
    }
    let odour = lot.pulls.iter().any(|pull| pull.odour_changed == Some(true));
    if odour || grown.is_some_and(|logs| logs >= settings.microbial_logs - CLOSE) {
        let finding = finding.with("growth of counts, log", grown.unwrap_or(0.0), None);
        return finding.fires(Level::Watch, "suggests microbial or enzymatic breakdown of the thickener");
    }
    if lot.formula.incompatible_ions == Some(true) {
        return finding.fires(Level::Watch, "suggests that ions of the formula weaken the thickener");
    }
    let warm = ends(&comparable(&lot.warm))
        .is_some_and(|(first, last)| last.value <= settings.thinning_share * first.value + CLOSE);
    if warm {
        return finding.fires(Level::Watch, "suggests thermal breakdown of the thickener");
    }
    finding.fires(Level::Note, "suggests a cause that these data do not show")
}
