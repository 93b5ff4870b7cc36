//! The noncentral t distribution, for exact one-sided tolerance limits.

use std::sync::OnceLock;

use super::gauss_legendre::Rule;
use super::incomplete_beta::{LN_ROOT_TWO_PI, stirling};
use super::{Tails, normal};

/// T = (Z + δ)/S with S² = χ²(ν)/ν.
#[derive(Clone, Copy, Debug)]
pub struct NoncentralT {
    df: f64,
    shift: f64,
    ln_scale: f64,
}

/// A log integrand below its peak by more than this adds nothing.
const NEGLIGIBLE: f64 = 45.0;

impl NoncentralT {
    /// `None` unless ν ≥ 1 and both numbers are finite.
    pub fn new(df: f64, shift: f64) -> Option<Self> {
        let usable = df >= 1.0 && df.is_finite() && shift.is_finite();
        usable.then(|| Self { df, shift, ln_scale: ln_density_scale(df) })
    }

    /// Both tails at t: ∫ P(Z ≤ ts − δ) f(s) ds over the density f of S, a sum of positive terms, so that
    /// also a very small tail keeps its digits.
    pub fn tails(&self, t: f64) -> Tails {
        let lower = self.tail(|s| -normal::ln_upper(self.shift - t * s), t).min(1.0);
        let upper = self.tail(|s| -normal::ln_upper(t * s - self.shift), t).min(1.0);
        Tails { lower, upper }
    }

    /// The t below which the probability p lies, by Newton on ln of the smaller tail; `None` unless 0 < p <
    /// 1.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        if !(p > 0.0 && p < 1.0) {
            return None;
        }
        let z = normal::quantile(p)?;
        let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
        let mut t = self.shift + z * (1.0 + 0.5 * self.shift * self.shift / self.df).sqrt();
        for _ in 0..200 {
            let tails = self.tails(t);
            let error = if p <= 0.5 { tails.lower / p - 1.0 } else { 1.0 - tails.upper / (1.0 - p) };
            if error > 0.0 {
                high = t
            } else {
                low = t
            }
            let scale = if p <= 0.5 { p } else { 1.0 - p };
            let newton = t - error * scale / self.density(t).max(1e-300);
            let next = bracketed(t, newton, low, high);
            if (next - t).abs() <= 1e-13 * next.abs().max(1e-3) {
                return Some(next);
            }
            t = next;
        }
        Some(t)
    }

    /// Density at t, by the same integral.
    pub fn density(&self, t: f64) -> f64 {
        self.tail(
            |s| {
                let z = t * s - self.shift;
                0.5 * z * z + LN_ROOT_TWO_PI - s.max(1e-300).ln()
            },
            t,
        )
    }

    /// Ends of pieces of the range: the normal tail turns within ±8/|t| of s = δ/t, which may be narrow.
    fn pieces(&self, left: f64, right: f64, t: f64) -> [f64; 5] {
        let turn = if t == 0.0 { left } else { self.shift / t };
        let width = if t == 0.0 { 0.0 } else { 8.0 / t.abs() };
        [left, turn - width, turn, turn + width, right].map(|s| s.clamp(left, right))
    }

    /// ∫ exp(−cost(s)) f(s) ds around the peak of the log-concave integrand.
    fn tail(&self, cost: impl Fn(f64) -> f64, t: f64) -> f64 {
        let ln = |s: f64| {
            if s <= 0.0 {
                return if self.df > 1.0 { f64::NEG_INFINITY } else { self.ln_scale - cost(0.0) };
            }
            self.ln_scale + (self.df - 1.0) * s.ln() - 0.5 * self.df * s * s - cost(s)
        };
        let spread = 1.0 / (2.0 * self.df + t * t).sqrt();
        let far = 1.0 + 40.0 * spread + (t * self.shift).abs() / (self.df + t * t);
        let peak = climb(&ln, far, spread);
        let top = ln(peak);
        if !top.is_finite() {
            return 0.0;
        }
        let left = edge(&ln, peak, -spread, top);
        let right = edge(&ln, peak, spread, top);
        integral(&ln, &self.pieces(left, right, t))
    }
}

/// Σ over the pieces of ∫ exp(ln).
fn integral(ln: &impl Fn(f64) -> f64, pieces: &[f64; 5]) -> f64 {
    let panels = 4;
    let mut sum = 0.0;
    for ends in pieces.windows(2).filter(|ends| ends[1] > ends[0]) {
        let width = (ends[1] - ends[0]) / f64::from(panels);
        for k in 0..panels {
            let from = ends[0] + width * f64::from(k);
            sum += rule().integrate(from, from + width, |s| ln(s).exp());
        }
    }
    sum
}

fn rule() -> &'static Rule<24> {
    static RULE: OnceLock<Rule<24>> = OnceLock::new();
    RULE.get_or_init(Rule::new)
}

/// ln of the constant of the density of S: 2 (ν/2)^(ν/2) / Γ(ν/2).
fn ln_density_scale(df: f64) -> f64 {
    let half = 0.5 * df;
    if half < 10.0 {
        return std::f64::consts::LN_2 + half * half.ln() - libm::lgamma(half);
    }
    std::f64::consts::LN_2 + 0.5 * half.ln() + half - LN_ROOT_TWO_PI - stirling(half)
}

/// The place of the maximum of a concave function on s > 0, by golden section; coarse is enough.
fn climb(ln: &impl Fn(f64) -> f64, far: f64, spread: f64) -> f64 {
    let golden = 0.618_033_988_749_894_9;
    let (mut low, mut high) = (0.0, far);
    while high - low > 0.05 * spread {
        let (a, b) = (high - golden * (high - low), low + golden * (high - low));
        if ln(a) < ln(b) { low = a } else { high = b }
    }
    0.5 * (low + high)
}

/// Walks from the peak until the integrand is negligible, or to zero.
fn edge(ln: &impl Fn(f64) -> f64, peak: f64, step: f64, top: f64) -> f64 {
    let (mut at, mut step) = (peak, step);
    loop {
        at += step;
        step *= 1.25;
        if at <= 0.0 {
            return 0.0;
        }
        if ln(at) < top - NEGLIGIBLE {
            return at;
        }
    }
}

fn bracketed(now: f64, newton: f64, low: f64, high: f64) -> f64 {
    if newton.is_finite() && newton > low && newton < high {
        return newton;
    }
    match (low.is_finite(), high.is_finite()) {
        (true, true) => 0.5 * (low + high),
        (true, false) => now + 1.0 + now.abs(),
        _ => now - 1.0 - now.abs(),
    }
}
