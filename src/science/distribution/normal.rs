//! The standard normal distribution.

use std::f64::consts::{FRAC_1_SQRT_2, SQRT_2};

/// Density at z.
pub fn density(z: f64) -> f64 {
    0.398_942_280_401_432_7 * (-0.5 * z * z).exp()
}

/// P(Z ≤ z).
pub fn lower(z: f64) -> f64 {
    0.5 * libm::erfc(-z * FRAC_1_SQRT_2)
}

/// P(Z > z).
pub fn upper(z: f64) -> f64 {
    0.5 * libm::erfc(z * FRAC_1_SQRT_2)
}

/// The z below which the probability p lies; `None` unless 0 < p < 1.
pub fn quantile(p: f64) -> Option<f64> {
    (p > 0.0 && p < 1.0).then(|| -SQRT_2 * statrs::function::erf::erfc_inv(2.0 * p))
}

/// ln P(Z > z), also where the probability itself is smaller than any number.
pub fn ln_upper(z: f64) -> f64 {
    if z < 5.0 { upper(z).ln() } else { -0.5 * z * z - LN_ROOT_TWO_PI + mills_ratio(z).ln() }
}

/// Density over upper tail, φ(z) / P(Z > z): the inverse Mills ratio.
pub fn hazard(z: f64) -> f64 {
    if z < 5.0 { density(z) / upper(z) } else { 1.0 / mills_ratio(z) }
}

const LN_ROOT_TWO_PI: f64 = 0.918_938_533_204_672_8;

/// P(Z > z) / φ(z) for z ≥ 5: 1/(z + 1/(z + 2/(z + 3/(z + …)))) (Laplace), evaluated from the far end.
fn mills_ratio(z: f64) -> f64 {
    let far = (1..=40).rev().fold(z, |inner, k| z + f64::from(k) / inner);
    1.0 / far
}
