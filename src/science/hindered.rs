//! Many particles: hindered settling.

use super::regression::{Line, Point};

/// Richardson–Zaki exponent by the particle's Reynolds number, without wall (Trans. Inst. Chem. Eng. 32
/// (1954) 35, recalled). `None` for a negative number.
pub fn exponent(reynolds: f64) -> Option<f64> {
    match reynolds {
        re if re.is_nan() || re < 0.0 => None,
        re if re < 0.2 => Some(4.65),
        re if re < 1.0 => Some(4.35 * re.powf(-0.03)),
        re if re <= 500.0 => Some(4.45 * re.powf(-0.1)),
        _ => Some(2.39),
    }
}

/// The same with the wall of a tube: d/D is the ratio of particle and tube diameter. Given up to Re 200.
pub fn exponent_in_tube(reynolds: f64, diameter_ratio: f64) -> Option<f64> {
    if !(0.0..=1.0).contains(&diameter_ratio) {
        return None;
    }
    match reynolds {
        re if re.is_nan() || re < 0.0 => None,
        re if re < 0.2 => Some(4.65 + 19.5 * diameter_ratio),
        re if re < 1.0 => Some((4.35 + 17.5 * diameter_ratio) * re.powf(-0.03)),
        re if re <= 200.0 => Some((4.45 + 18.0 * diameter_ratio) * re.powf(-0.1)),
        _ => None,
    }
}

/// Smooth form in the Reynolds number: (5.09 − n)/(n − 2.73) = 0.104 Re^0.877 (Garside & Al-Dibouni, Ind.
/// Eng. Chem. Process Des. Dev. 16 (1977) 206, recalled).
pub fn exponent_smooth(reynolds: f64) -> Option<f64> {
    (reynolds >= 0.0 && reynolds.is_finite()).then(|| between(5.09, 2.73, 0.104 * reynolds.powf(0.877)))
}

/// Smooth form in the Archimedes number, with the wall as d/D (0 without): (4.8 − n)/(n − 2.4) =
/// 0.043 Ar^0.57 [1 − 1.24 (d/D)^0.27] (Khan & Richardson, Chem. Eng. Commun. 78 (1989) 111, recalled).
pub fn exponent_archimedes(archimedes: f64, diameter_ratio: f64) -> Option<f64> {
    let wall = 1.0 - 1.24 * diameter_ratio.powf(0.27);
    let usable = archimedes >= 0.0 && archimedes.is_finite() && diameter_ratio >= 0.0 && wall > 0.0;
    usable.then(|| between(4.8, 2.4, 0.043 * archimedes.powf(0.57) * wall))
}

/// n with (high − n)/(n − low) = ratio.
fn between(high: f64, low: f64, ratio: f64) -> f64 {
    (high + low * ratio) / (1.0 + ratio)
}

/// Exponents of the two branches at low Reynolds number, Brownian and not (Brzinski & Durian,
/// arXiv:1710.09314): shown as a band around 4.65.
pub const BROWNIAN_EXPONENT: f64 = 5.6;
/// See [`BROWNIAN_EXPONENT`].
pub const NON_BROWNIAN_EXPONENT: f64 = 4.48;

/// v = v₀(1 − φ)ⁿ. `None` unless 0 ≤ φ < 1.
pub fn velocity(single: f64, volume_fraction: f64, exponent: f64) -> Option<f64> {
    let value = single * (1.0 - volume_fraction).powf(exponent);
    ((0.0..1.0).contains(&volume_fraction) && value.is_finite()).then_some(value)
}

/// The volume fraction at which settling is slowed to a share of the single particle's velocity.
pub fn volume_fraction(share: f64, exponent: f64) -> Option<f64> {
    (share > 0.0 && share <= 1.0 && exponent > 0.0).then(|| 1.0 - share.powf(1.0 / exponent))
}

/// The volume fraction of the largest flux v₀φ(1 − φ)ⁿ, 1/(1 + n).
pub fn flux_maximum(exponent: f64) -> Option<f64> {
    (exponent > -1.0 && exponent.is_finite()).then(|| 1.0 / (1.0 + exponent))
}

/// Fits ln v = ln v₀ + n ln(1 − φ) to (φ, v): (v₀, n). Well above 5, n says that the settling units are
/// flocs.
/// `None` with fewer than two usable dilutions.
pub fn fit(dilutions: &[(f64, f64)]) -> Option<(f64, f64)> {
    let usable = dilutions.iter().filter(|(phi, v)| (0.0..1.0).contains(phi) && *v > 0.0);
    let points: Vec<Point> = usable.map(|(phi, v)| Point { x: (-phi).ln_1p(), y: v.ln() }).collect();
    let line = Line::fit(&points).ok()?;
    let single = line.intercept().exp();
    single.is_finite().then_some((single, line.slope))
}

/// Flocs by Michaels & Bolger (Ind. Eng. Chem. Fundam. 1 (1962) 24, recalled): v^(1/4.65) is a straight line
/// in φ, v_floc^(1/4.65)(1 − Cφ), over three or more dilutions (φ, v).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Flocs {
    /// Floc volume per volume of solids: 1.5–3 compact, above 5 very open.
    pub volume_ratio: f64,
    /// Velocity of a single floc.
    pub velocity: f64,
    /// R² of the line.
    pub r_squared: f64,
}

/// See [`Flocs`].
pub fn flocs(dilutions: &[(f64, f64)]) -> Option<Flocs> {
    let usable = dilutions.iter().filter(|(phi, v)| (0.0..1.0).contains(phi) && *v > 0.0);
    let points: Vec<Point> = usable.map(|(phi, v)| Point { x: *phi, y: v.powf(1.0 / 4.65) }).collect();
    let line = Line::fit(&points).ok().filter(|_| points.len() >= 3)?;
    let root = line.intercept();
    let found =
        Flocs { volume_ratio: -line.slope / root, velocity: root.powf(4.65), r_squared: line.r_squared()? };
    (root > 0.0 && found.volume_ratio.is_finite()).then_some(found)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fits_give_back_what_made_them() {
        let made: Vec<(f64, f64)> =
            [0.02, 0.05, 0.1, 0.2].iter().map(|&phi| (phi, velocity(3e-4, phi, 4.9).unwrap())).collect();
        let (single, n) = fit(&made).unwrap();
        assert!((single / 3e-4 - 1.0).abs() < 1e-12 && (n - 4.9).abs() < 1e-11);
        let open: Vec<(f64, f64)> =
            [0.01, 0.02, 0.04].iter().map(|&phi| (phi, 2e-4 * (1.0 - 6.0_f64 * phi).powf(4.65))).collect();
        let found = flocs(&open).unwrap();
        assert!((found.volume_ratio - 6.0).abs() < 1e-10 && (found.velocity / 2e-4 - 1.0).abs() < 1e-10);
        assert_eq!(flocs(&open[..2]), None);
    }

    #[test]
    fn exponents_outside_their_range() {
        assert_eq!((exponent(-1.0), exponent(f64::NAN), exponent_in_tube(300.0, 0.1)), (None, None, None));
        assert_eq!((velocity(1.0, 1.0, 4.65), volume_fraction(0.0, 4.65)), (None, None));
    }
}
