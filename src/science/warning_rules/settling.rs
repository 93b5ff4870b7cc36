//! R1 early caking, R2 delayed collapse, R3 state.

use super::facts::{At, Lot, ends, values};
use super::{CLOSE, Finding, Level, Rule, Settings};

/// R1: F low and inversions rising together. F alone never fires it.
pub(super) fn early_caking(lot: &Lot, settings: &Settings) -> Finding {
    let f = values(&lot.pulls, |pull| pull.f);
    let n = values(&lot.pulls, |pull| pull.inversions);
    let mut missing = Vec::new();
    if ends(&f).is_none() {
        missing.push("sedimentation ratio at two ages");
    }
    if n.is_empty() {
        missing.push("shake count missing");
    } else if n.len() < 3 {
        missing.push("shake counts at three ages");
    }
    let (Some((f_first, f_last)), Some((n_first, n_last)), true) = (ends(&f), ends(&n), missing.is_empty())
    else {
        return Finding::lacking(Rule::R1, &missing);
    };
    let finding = Finding::new(Rule::R1)
        .with("F at baseline", f_first.value, Some(f_first.age))
        .with("F now", f_last.value, Some(f_last.age))
        .with("inversions at baseline", n_first.value, Some(n_first.age))
        .with("inversions now", n_last.value, Some(n_last.age));
    let lower = f_last.value <= settings.caking_f_share * f_first.value + CLOSE;
    let more = n_last.value >= settings.caking_inversion_share * n_first.value - CLOSE
        && n_last.value - n_first.value >= settings.caking_inversions_more - CLOSE;
    let rising = n[n.len() - 3..].windows(2).all(|pair| pair[1].value > pair[0].value);
    if !(lower && more && rising) {
        return finding;
    }
    let residue = lot.pulls.iter().any(|pull| pull.residue == Some(true));
    let beyond_label = lot.label.inversions.is_some_and(|label| n_last.value > label);
    let level = if residue || beyond_label { Level::Fail } else { Level::Watch };
    finding.fires(level, "suggests that the sediment is packing: early caking")
}

/// R2: one interval that takes most of the loss, from a high F.
pub(super) fn delayed_collapse(lot: &Lot, settings: &Settings) -> Finding {
    let f = values(&lot.pulls, |pull| pull.f);
    if f.len() < 3 {
        return Finding::lacking(Rule::R2, &["sedimentation ratio at three ages"]);
    }
    let lowest = f.iter().map(|at| at.value).fold(f64::INFINITY, f64::min);
    let loss = f[0].value - lowest;
    let fall = f.windows(2).find(|pair| {
        let drop = pair[0].value - pair[1].value;
        drop >= settings.collapse_drop - CLOSE
            && drop >= settings.collapse_share * loss - CLOSE
            && pair[0].value >= settings.collapse_before - CLOSE
    });
    let finding = Finding::new(Rule::R2);
    match fall {
        None => finding.with("lowest F", lowest, None),
        Some(pair) => finding
            .with("F before", pair[0].value, Some(pair[0].age))
            .with("F after", pair[1].value, Some(pair[1].age))
            .fires(
                Level::Watch,
                "suggests that the network yields suddenly; the earlier flat line must not be extrapolated",
            ),
    }
}

/// R3: signs of a deflocculated and of a flocculated suspension; how F is to be read.
pub(super) fn state(lot: &Lot, settings: &Settings) -> Finding {
    let f = values(&lot.pulls, |pull| pull.f);
    let n = values(&lot.pulls, |pull| pull.inversions).last().copied();
    let zeta = values(&lot.pulls, |pull| pull.zeta).last().copied();
    let first = lot.first_day;
    let high_then_low = first.f.zip(f.last()).map(|(day, last)| day >= 0.9 - CLOSE && last.value < 0.5);
    let signs = [
        first.turbid,
        high_then_low,
        zeta.map(|zeta| zeta.value.abs() > settings.charged_zeta),
        n.map(|n| n.value > settings.easy_inversions),
    ];
    let known = signs.iter().flatten().count();
    let yes = signs.iter().flatten().filter(|sign| **sign).count();
    let mut missing = Vec::new();
    for (sign, name) in signs.iter().zip(["clarity at 24 h", "F at 24 h", "zeta potential", "shake count"]) {
        if sign.is_none() {
            missing.push(name);
        }
    }
    let plateau = early_plateau(&f);
    if first.sharp_interface.is_none() {
        missing.push("interface sharp or diffuse");
    }
    if known < 2 {
        return Finding::lacking(Rule::R3, &missing);
    }
    let mut finding = Finding::new(Rule::R3).with("signs of a deflocculated state", yes as f64, None);
    finding.missing = missing;
    let flocculated = first.sharp_interface == Some(true)
        && first.turbid == Some(false)
        && plateau == Some(true)
        && n.is_some_and(|n| n.value <= settings.easy_inversions);
    if yes >= 2 && 2 * yes > known {
        finding.fires(
            Level::Note,
            "suggests a deflocculated suspension: a falling F is normal, a cake is the risk",
        )
    } else if flocculated {
        finding
            .fires(Level::Note, "suggests a flocculated suspension: F is low early, a falling F is alarming")
    } else {
        finding.fires(Level::Note, "suggests a mixed state: read F and shake count together")
    }
}

/// Whether nine tenths of the loss came in the first fifth of the time; none without a loss.
fn early_plateau(f: &[At]) -> Option<bool> {
    let (first, last) = ends(f)?;
    let loss = first.value - last.value;
    let early = first.age + 0.2 * (last.age - first.age);
    let by_then = f.iter().rev().find(|at| at.age <= early)?;
    (loss > 0.0).then_some(first.value - by_then.value >= 0.9 * loss - CLOSE)
}
