//! Arithmetic of a batch record: potency, yield, reconciliation, weighing.

/// Mass to weigh for a wanted mass of pure substance: assay (% on the anhydrous basis), loss on drying (%),
/// and salt factor (M salt / M base, 1 without). `None` unless assay > 0, 0 ≤ loss < 100, factor > 0.
pub fn potency_corrected(pure: f64, assay_percent: f64, loss_percent: f64, salt_factor: f64) -> Option<f64> {
    let usable =
        pure >= 0.0 && assay_percent > 0.0 && (0.0..100.0).contains(&loss_percent) && salt_factor > 0.0;
    let mass = pure * salt_factor * 100.0 / (assay_percent * (1.0 - loss_percent / 100.0));
    (usable && mass.is_finite()).then_some(mass)
}

/// Yield in %, 100·actual/theoretical.
pub fn yield_percent(actual: f64, theoretical: f64) -> Option<f64> {
    let percent = 100.0 * actual / theoretical;
    (actual >= 0.0 && theoretical > 0.0 && percent.is_finite()).then_some(percent)
}

/// Accountable in %: good units, samples, rejects and known waste together, against theory.
pub fn accountable_percent(
    good: f64,
    samples: f64,
    rejects: f64,
    waste: f64,
    theoretical: f64,
) -> Option<f64> {
    let parts = [good, samples, rejects, waste];
    parts.iter().all(|part| *part >= 0.0).then(|| yield_percent(parts.iter().sum(), theoretical))?
}

/// Smallest mass a balance may weigh, 2000·s with s not below 0.41 d (USP ⟨41⟩, recalled).
pub fn smallest_weighing(sd: f64, division: f64) -> Option<f64> {
    (sd >= 0.0 && division > 0.0 && sd.is_finite()).then(|| 2000.0 * sd.max(0.41 * division))
}
