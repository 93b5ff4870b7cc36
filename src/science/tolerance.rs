//! Tolerance factors: limits that hold a stated share of all future results with a stated confidence.
//!
//! Form: centre ± k·s, where the centre has variance σ²/d and s² has f degrees of freedom. A plain sample has
//! d = n, f = n − 1; a line at age x has d = 1/h(x), f = its degrees of freedom (pointwise).

use std::sync::OnceLock;

use super::distribution::chi_squared::ChiSquared;
use super::distribution::gauss_legendre::Rule;
use super::distribution::noncentral_t::NoncentralT;
use super::distribution::normal;
use super::regression::MeanLine;

/// What a factor is for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Aim {
    /// The share of results that shall lie inside, 0.95 for 95 %.
    pub content: f64,
    /// The confidence that they do.
    pub confidence: f64,
    /// d: σ²/d is the variance of the centre; infinite where the centre is known.
    pub centre_size: f64,
    /// Degrees of freedom of s²; infinite where σ is known.
    pub df: f64,
}

impl Aim {
    /// Of a plain sample of n ≥ 2 results.
    pub fn of_sample(content: f64, confidence: f64, n: usize) -> Self {
        Self { content, confidence, centre_size: n as f64, df: n as f64 - 1.0 }
    }

    /// Of a line at one age.
    pub fn of_line(content: f64, confidence: f64, line: &MeanLine, x: f64) -> Self {
        Self { content, confidence, centre_size: 1.0 / line.leverage(x), df: line.df as f64 }
    }

    fn usable(&self) -> bool {
        let share = |p: f64| p > 0.0 && p < 1.0;
        share(self.content) && share(self.confidence) && self.centre_size > 0.0 && self.df >= 1.0
    }
}

/// Exact one-sided factor: k = t'(γ; f, z_p √d) / √d.
pub fn one_sided(aim: &Aim) -> Option<f64> {
    aim.usable().then_some(())?;
    let root = aim.centre_size.sqrt();
    if aim.df.is_infinite() {
        return Some(normal::quantile(aim.content)? + normal::quantile(aim.confidence)? / root);
    }
    if aim.centre_size.is_infinite() {
        let low = ChiSquared::new(aim.df)?.quantile(1.0 - aim.confidence)?;
        return Some(normal::quantile(aim.content)? * (aim.df / low).sqrt());
    }
    let shift = normal::quantile(aim.content)? * root;
    Some(NoncentralT::new(aim.df, shift)?.quantile(aim.confidence)? / root)
}

/// Exact two-sided factor: k with ∫₀^∞ 2√d φ(√d z) P(χ²_f > f r(z)²/k²) dz = γ, Φ(z + r) − Φ(z − r) = p.
///
/// Source of the form: Witkovský, Austrian J. Statist. 43 (2014) 279; ISO 16269-6:2014 Annex F.
pub fn two_sided(aim: &Aim) -> Option<f64> {
    let start = howe(aim)?;
    if aim.df.is_infinite() {
        let z = normal::quantile(0.5 * (1.0 + aim.confidence))?;
        return Some(half_width(z / aim.centre_size.sqrt(), aim.content));
    }
    if aim.centre_size.is_infinite() {
        return Some(start);
    }
    let chi2 = ChiSquared::new(aim.df)?;
    let nodes = half_widths(aim);
    let gain = |k: f64| -> f64 {
        nodes.iter().map(|(w, r)| w * chi2.tails(aim.df * r * r / (k * k)).upper).sum::<f64>()
            - aim.confidence
    };
    let (mut low, mut high) = (0.5 * start, 2.0 * start);
    while gain(low) > 0.0 && low > 1e-6 {
        low *= 0.5;
    }
    while gain(high) < 0.0 && high < 1e9 {
        high *= 2.0;
    }
    Some(between(&gain, low, high))
}

/// Howe's two-sided approximation (JASA 64 (1969) 610). Not for lines far from their centre.
pub fn howe(aim: &Aim) -> Option<f64> {
    aim.usable().then_some(())?;
    let z = normal::quantile(0.5 * (1.0 + aim.content))?;
    if aim.df.is_infinite() {
        return Some(z * (1.0 + 1.0 / aim.centre_size).sqrt());
    }
    let low = ChiSquared::new(aim.df)?.quantile(1.0 - aim.confidence)?;
    let k = z * (aim.df * (1.0 + 1.0 / aim.centre_size) / low).sqrt();
    k.is_finite().then_some(k)
}

/// Howe's factor with Guenther's correction for a plain sample, as NIST/SEMATECH 7.2.6.3 prints it.
pub fn howe_guenther(content: f64, confidence: f64, n: usize) -> Option<f64> {
    let aim = Aim::of_sample(content, confidence, n);
    let low = ChiSquared::new(aim.df)?.quantile(1.0 - confidence)?;
    let count = n as f64;
    let square = 1.0 + (count - 3.0 - low) / (2.0 * (count + 1.0) * (count + 1.0));
    (square > 0.0).then(|| howe(&aim).map(|k| k * square.sqrt()))?
}

/// The one-sided approximation of NIST/SEMATECH 7.2.6.3 (Natrella 1963); none where n is too small for it.
pub fn one_sided_approximate(content: f64, confidence: f64, n: usize) -> Option<f64> {
    let (zp, zg) = (normal::quantile(content)?, normal::quantile(confidence)?);
    let count = n as f64;
    let a = 1.0 - zg * zg / (2.0 * (count - 1.0));
    let b = zp * zp - zg * zg / count;
    let inside = zp * zp - a * b;
    (n > 1 && a > 0.0 && inside >= 0.0).then(|| (zp + inside.sqrt()) / a)
}

/// Gauss–Legendre nodes over the standardised error of the centre: (weight × density, r).
fn half_widths(aim: &Aim) -> Vec<(f64, f64)> {
    static RULE: OnceLock<Rule<120>> = OnceLock::new();
    let root = aim.centre_size.sqrt();
    let far = 9.0 / root;
    let mut nodes = Vec::with_capacity(120);
    let half = 0.5 * far;
    for (x, w) in RULE.get_or_init(Rule::new).nodes() {
        let z = half * (x + 1.0);
        nodes.push((half * w * 2.0 * root * normal::density(root * z), half_width(z, aim.content)));
    }
    nodes
}

/// r with Φ(z + r) − Φ(z − r) = p, by Newton; from the side of large z, where r = z + z_p.
fn half_width(z: f64, content: f64) -> f64 {
    let mut r = z + normal::quantile(content).unwrap_or(0.0);
    for _ in 0..80 {
        let inside = 1.0 - normal::upper(z + r) - normal::upper(r - z);
        let step = (inside - content) / (normal::density(z + r) + normal::density(z - r));
        r -= step.clamp(-0.5, 0.5);
        if step.abs() < 1e-15 * r.abs().max(1.0) {
            break;
        }
    }
    r
}

/// The root of a rising function in a bracket: secant steps guarded by halving.
fn between(f: &impl Fn(f64) -> f64, mut low: f64, mut high: f64) -> f64 {
    let (mut f_low, mut f_high) = (f(low), f(high));
    for _ in 0..200 {
        let secant = low - f_low * (high - low) / (f_high - f_low);
        let mid = if secant > low && secant < high { secant } else { 0.5 * (low + high) };
        let value = f(mid);
        if value == 0.0 || high - low < 1e-13 * mid {
            return mid;
        }
        if value < 0.0 {
            (low, f_low) = (mid, value);
            f_high *= 0.5;
        } else {
            (high, f_high) = (mid, value);
            f_low *= 0.5;
        }
    }
    0.5 * (low + high)
}
