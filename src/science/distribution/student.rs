//! Student's t distribution.

use super::incomplete_beta::IncompleteBeta;
use super::{Tails, normal, root};

/// t with fixed degrees of freedom; the constant part is computed once.
#[derive(Clone, Copy, Debug)]
pub struct Student {
    df: f64,
    beta: IncompleteBeta,
}

impl Student {
    /// `None` unless the degrees of freedom are positive and finite.
    pub fn new(df: f64) -> Option<Self> {
        Some(Self { df, beta: IncompleteBeta::new(0.5, 0.5 * df)? })
    }

    /// Degrees of freedom.
    pub fn df(&self) -> f64 {
        self.df
    }

    /// Both tails at t.
    pub fn tails(&self, t: f64) -> Tails {
        let (inside, outside) = self.around_zero(t.abs());
        let (near, far) = (0.5 + 0.5 * inside, 0.5 * outside);
        if t < 0.0 { Tails { lower: far, upper: near } } else { Tails { lower: near, upper: far } }
    }

    /// P(|T| > |t|).
    pub fn two_sided(&self, t: f64) -> f64 {
        self.around_zero(t.abs()).1
    }

    /// Density at t.
    pub fn density(&self, t: f64) -> f64 {
        let square = t * t / self.df;
        (-0.5 * (self.df + 1.0) * square.ln_1p() - 0.5 * self.df.ln() - self.beta.ln_beta()).exp()
    }

    /// The t below which the probability p lies; `None` unless 0 < p < 1.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p < 0.5 { -self.point_above(p) } else { self.point_above(1.0 - p) })
    }

    /// The t above which the probability p lies; `None` unless 0 < p < 1.
    pub fn upper_quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p <= 0.5 { self.point_above(p) } else { -self.point_above(1.0 - p) })
    }

    /// P(|T| ≤ t) and P(|T| > t) for t ≥ 0.
    fn around_zero(&self, t: f64) -> (f64, f64) {
        let (x, y) = self.shares(t);
        let tails = self.beta.tails(x, y);
        (tails.lower, tails.upper)
    }

    /// t²/(ν + t²) and its complement, each formed without subtraction.
    fn shares(&self, t: f64) -> (f64, f64) {
        let square = t * t / self.df;
        let y = 1.0 / (1.0 + square);
        (if square > 1.0 { 1.0 / (1.0 + 1.0 / square) } else { square * y }, y)
    }

    /// The t ≥ 0 with upper tail p ≤ ½.
    fn point_above(&self, p: f64) -> f64 {
        if p == 0.5 {
            return 0.0;
        }
        if p > 0.3 { self.near_zero(1.0 - 2.0 * p) } else { self.in_the_tail(p) }
    }

    /// Newton on P(|T| ≤ t) = inside from below; the function is concave there, so every step stays below.
    fn near_zero(&self, inside: f64) -> f64 {
        let mut t = 0.5 * inside / self.density(0.0);
        for _ in 0..60 {
            let step = 0.5 * (inside - self.around_zero(t).0) / self.density(t);
            t += step;
            if step.abs() <= 2.0 * f64::EPSILON * t {
                break;
            }
        }
        t
    }

    /// Newton on ln P(T > t) = ln p in ln t, where both ends of the family (Cauchy, normal) are tame.
    fn in_the_tail(&self, p: f64) -> f64 {
        let goal = 2.0 * p;
        root::falling(self.start(p).ln(), |u| {
            let (x, y) = self.shares(u.exp());
            let weight = self.beta.weight(x, y);
            if y <= 0.0 || x <= 0.0 {
                let outside = if y <= 0.0 { f64::MIN_POSITIVE } else { 1.0 };
                return ((outside / goal).ln(), -self.df);
            }
            let outside = self.beta.tails_with_weight(x, y, weight).upper.max(f64::MIN_POSITIVE);
            ((outside / goal).ln(), -2.0 * weight / outside)
        })
        .exp()
    }

    /// Start value: Hill, Commun. ACM 13 (1970) 619 (algorithm 396).
    fn start(&self, p: f64) -> f64 {
        let n = self.df;
        if n < 1.5 {
            return (std::f64::consts::PI * p).tan().recip().powf(1.0 / n).max(0.1);
        }
        let a = 1.0 / (n - 0.5);
        let b = 48.0 / (a * a);
        let c = ((20_700.0 * a / b - 98.0) * a - 16.0) * a + 96.36;
        let d = ((94.5 / (b + c) - 3.0) / b + 1.0) * (a * std::f64::consts::FRAC_PI_2).sqrt() * n;
        let y = (2.0 * d * p).powf(2.0 / n);
        if y > 0.05 + a { self.start_middle(p, a, b + c, b) } else { self.start_far(y, d) }
    }

    fn start_middle(&self, p: f64, a: f64, sum: f64, b: f64) -> f64 {
        let n = self.df;
        let x = normal::quantile(p).unwrap_or(-1.0);
        let y = x * x;
        let sum = if n < 5.0 { sum + 0.3 * (n - 4.5) * (x + 0.6) } else { sum };
        let c = ((-5.0 * x - 7.0) * x - 2.0) * x + sum;
        let z = (((((0.4 * y + 6.3) * y + 36.0) * y + 94.5) / c - y - 3.0) / b + 1.0) * x;
        (n * (a * z * z).exp_m1()).sqrt().max(1e-3)
    }

    fn start_far(&self, y: f64, d: f64) -> f64 {
        let n = self.df;
        let inner = 1.0 / (((n + 6.0) / (n * y) - 0.089 * d - 0.822) * (n + 2.0) * 3.0) + 0.5 / (n + 4.0);
        let square = (inner * y - 1.0) * (n + 1.0) / (n + 2.0) + 1.0 / y;
        (n * square.max(1e-6)).sqrt()
    }
}
