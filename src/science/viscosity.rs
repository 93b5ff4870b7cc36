//! Viscosity of a suspension from that of its liquid, and units.

/// mPa·s of one centipoise.
pub const MILLIPASCAL_SECONDS_PER_CENTIPOISE: f64 = 1.0;

/// mPa·s of one poise. Papers still print poise.
pub const MILLIPASCAL_SECONDS_PER_POISE: f64 = 100.0;

/// η/η₀ = 1 + 2.5φ (Einstein 1906/1911), good to φ = 0.02. `None` outside 0–0.02.
pub fn einstein(volume_fraction: f64) -> Option<f64> {
    (0.0..=0.02).contains(&volume_fraction).then_some(1.0 + 2.5 * volume_fraction)
}

/// η/η₀ = 1 + 2.5φ + 6.2φ² (Batchelor, J. Fluid Mech. 83 (1977) 97). `None` outside 0–0.1.
pub fn batchelor(volume_fraction: f64) -> Option<f64> {
    let phi = volume_fraction;
    (0.0..=0.1).contains(&phi).then_some(1.0 + 2.5 * phi + 6.2 * phi * phi)
}

/// η/η₀ = (1 − φ/φm)^(−[η]φm) (Krieger & Dougherty, Trans. Soc. Rheol. 3 (1959) 137). [η] is 2.5 for spheres,
/// 3–5 for plates and needles; φm 0.58–0.71. `None` unless 0 ≤ φ < φm ≤ 1 and [η] > 0.
pub fn krieger_dougherty(volume_fraction: f64, intrinsic: f64, packing: f64) -> Option<f64> {
    let usable = volume_fraction >= 0.0 && volume_fraction < packing && packing <= 1.0 && intrinsic > 0.0;
    let value = (1.0 - volume_fraction / packing).powf(-intrinsic * packing);
    (usable && value.is_finite()).then_some(value)
}

/// Capillary: kinematic viscosity ν = k·t; for liquids, not for suspensions that settle. `None` unless
/// positive.
pub fn kinematic(constant: f64, seconds: f64) -> Option<f64> {
    let value = constant * seconds;
    (constant > 0.0 && seconds > 0.0 && value.is_finite()).then_some(value)
}

/// Whether a reading changed while it was taken: more than 10 % between start and end (common practice); on a
/// flocculated product the spindle may then turn in supernatant.
pub fn settled_during_reading(start: f64, end: f64) -> Option<bool> {
    (start > 0.0 && end > 0.0).then(|| (end - start).abs() > 0.1 * start)
}
