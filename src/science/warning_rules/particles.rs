//! R4 growth of particles, R5 its cause.

use super::facts::{At, Lot, Pull, ends, r_squared, values};
use super::{CLOSE, Finding, Level, Rule, Settings};

/// The 90 % points, or the means where they are missing.
fn sizes(pulls: &[Pull]) -> Vec<At> {
    let d90 = values(pulls, |pull| pull.d90);
    if ends(&d90).is_some() { d90 } else { values(pulls, |pull| pull.mean_size) }
}

fn growth_ratio(values: &[At]) -> Option<f64> {
    ends(values).filter(|(first, _)| first.value > 0.0).map(|(first, last)| last.value / first.value)
}

/// R4: growth of the coarse end.
pub(super) fn growth(lot: &Lot, settings: &Settings) -> Finding {
    let sizes = sizes(&lot.pulls);
    let (Some((first, last)), Some(ratio)) = (ends(&sizes), growth_ratio(&sizes)) else {
        return Finding::lacking(Rule::R4, &["particle size at two ages"]);
    };
    let finding = Finding::new(Rule::R4)
        .with("size at baseline", first.value, Some(first.age))
        .with("size now", last.value, Some(last.age))
        .with("ratio", ratio, None);
    match ratio {
        r if r >= settings.growth_fail - CLOSE => {
            finding.fires(Level::Fail, "suggests strong particle growth")
        }
        r if r >= settings.growth_watch - CLOSE => finding.fires(Level::Watch, "suggests particle growth"),
        _ => finding,
    }
}

/// R5: aggregation, ripening or clusters, where R4 speaks.
pub(super) fn cause(lot: &Lot, settings: &Settings) -> Finding {
    let sizes = sizes(&lot.pulls);
    let Some(ratio) = growth_ratio(&sizes) else {
        return Finding::lacking(Rule::R5, &["particle size at two ages"]);
    };
    let finding = Finding::new(Rule::R5).with("size ratio", ratio, None);
    if ratio < settings.growth_watch - CLOSE {
        return finding;
    }
    let zeta = values(&lot.pulls, |pull| pull.zeta.map(f64::abs));
    let d10 = growth_ratio(&values(&lot.pulls, |pull| pull.d10));
    let spread = growth_ratio(&values(&lot.pulls, |pull| pull.size_spread));
    if let Some((first, last)) = ends(&zeta) {
        let lost = 1.0 - last.value / first.value;
        let finding = finding.clone().with("zeta at baseline, size", first.value, Some(first.age)).with(
            "zeta now, size",
            last.value,
            Some(last.age),
        );
        if lost >= settings.zeta_loss - CLOSE {
            return finding
                .fires(Level::Watch, "suggests aggregation: the charge has fallen while particles grew");
        }
    }
    if let (Some(spread), Some(d10)) = (spread, d10)
        && spread >= settings.spread_share - CLOSE
        && d10 < settings.growth_watch
    {
        return finding
            .with("spread ratio", spread, None)
            .with("D10 ratio", d10, None)
            .fires(Level::Watch, "suggests aggregates: the spread grew while the fine end stayed");
    }
    ripening(lot, settings, finding, &sizes, d10, ends(&zeta).is_some())
}

fn ripening(
    lot: &Lot,
    settings: &Settings,
    finding: Finding,
    sizes: &[At],
    d10: Option<f64>,
    zeta_known: bool,
) -> Finding {
    let warm = growth_ratio(&self::sizes(&lot.warm));
    let mut missing = Vec::new();
    for (known, name) in [
        (zeta_known, "zeta potential at two ages"),
        (d10.is_some(), "D10 at two ages"),
        (warm.is_some(), "particle size of a warm or cycled arm"),
        (sizes.len() >= 3, "particle size at three ages"),
    ] {
        if !known {
            missing.push(name);
        }
    }
    let (Some(d10), Some(warm), true) = (d10, warm, missing.is_empty()) else {
        return Finding { level: Level::NotEvaluable, missing, ..finding };
    };
    let cubes = r_squared(sizes, 3).zip(r_squared(sizes, 1)).is_some_and(|(cube, plain)| cube > plain);
    let ratio = growth_ratio(sizes).unwrap_or(1.0);
    let finding = finding.with("D10 ratio", d10, None).with("ratio in the warm arm", warm, None);
    if d10 >= settings.growth_watch - CLOSE && warm > ratio && cubes {
        return finding.fires(
            Level::Watch,
            "suggests Ostwald ripening: charge steady, fine end grows, faster when warm, the cube is linear",
        );
    }
    finding.fires(Level::Note, "suggests growth of no clear kind")
}
