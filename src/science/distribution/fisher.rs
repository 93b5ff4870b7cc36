//! The F distribution of variance ratios.

use super::incomplete_beta::IncompleteBeta;
use super::{Tails, normal, root};

/// F with fixed numerator and denominator degrees of freedom.
#[derive(Clone, Copy, Debug)]
pub struct Fisher {
    df1: f64,
    df2: f64,
    beta: IncompleteBeta,
}

impl Fisher {
    /// `None` unless both degrees of freedom are positive and finite.
    pub fn new(df1: f64, df2: f64) -> Option<Self> {
        Some(Self { df1, df2, beta: IncompleteBeta::new(0.5 * df1, 0.5 * df2)? })
    }

    /// Both tails at f; f below 0 counts as 0.
    pub fn tails(&self, f: f64) -> Tails {
        let (x, y) = self.shares(f);
        self.beta.tails(x, y)
    }

    /// The value below which the probability p lies; `None` unless 0 < p < 1.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p <= 0.5 { self.point_below(p) } else { self.point_above(1.0 - p) })
    }

    /// The value above which the probability p lies; `None` unless 0 < p < 1.
    pub fn upper_quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p <= 0.5 { self.point_above(p) } else { self.point_below(1.0 - p) })
    }

    /// x = d₁f/(d₁f + d₂) and 1 − x, each formed without subtraction.
    fn shares(&self, f: f64) -> (f64, f64) {
        if f <= 0.0 {
            return (0.0, 1.0);
        }
        let ratio = self.df1 / self.df2 * f;
        if ratio > 1.0 {
            (1.0 / (1.0 + 1.0 / ratio), 1.0 / (1.0 + ratio))
        } else {
            (ratio / (1.0 + ratio), 1.0 / (1.0 + ratio))
        }
    }

    fn point_below(&self, p: f64) -> f64 {
        root::falling(self.start(p), |u| {
            let (x, y) = self.shares(u.exp());
            let lower = self.beta.tails(x, y).lower;
            ((p / lower).ln(), -self.beta.weight(x, y) / lower)
        })
        .exp()
    }

    fn point_above(&self, p: f64) -> f64 {
        root::falling(self.start(1.0 - p), |u| {
            let (x, y) = self.shares(u.exp());
            let upper = self.beta.tails(x, y).upper;
            ((upper / p).ln(), -self.beta.weight(x, y) / upper)
        })
        .exp()
    }

    /// ln F by the Fisher–Cornish approximation; only a start for the iteration.
    fn start(&self, p: f64) -> f64 {
        let z = normal::quantile(p).unwrap_or(0.0);
        let (one, two) = (1.0 / self.df1, 1.0 / self.df2);
        let spread = (0.5 * (one + two)).sqrt();
        (2.0 * z * spread - (one - two)).clamp(-20.0, 20.0)
    }
}
