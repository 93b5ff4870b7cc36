//! The chi squared distribution.

use super::{Tails, incomplete_gamma, normal, root};

/// Chi squared with fixed degrees of freedom.
#[derive(Clone, Copy, Debug)]
pub struct ChiSquared {
    df: f64,
}

impl ChiSquared {
    /// `None` unless the degrees of freedom are positive and finite.
    pub fn new(df: f64) -> Option<Self> {
        (df > 0.0 && df.is_finite()).then_some(Self { df })
    }

    /// Both tails at x; x below 0 counts as 0.
    pub fn tails(&self, x: f64) -> Tails {
        incomplete_gamma::tails(0.5 * self.df, 0.5 * x)
    }

    /// The point below which the probability p lies; `None` unless 0 < p < 1.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p <= 0.5 { self.point_below(p) } else { self.point_above(1.0 - p) })
    }

    /// The point above which the probability p lies; `None` unless 0 < p < 1.
    pub fn upper_quantile(&self, p: f64) -> Option<f64> {
        (p > 0.0 && p < 1.0).then(|| if p <= 0.5 { self.point_above(p) } else { self.point_below(1.0 - p) })
    }

    fn point_below(&self, p: f64) -> f64 {
        root::falling(self.start(p), |u| {
            let (x, tails) = self.at(u);
            let slope = 0.5 * self.df * incomplete_gamma::weight(0.5 * self.df, 0.5 * x) / tails.lower;
            ((p / tails.lower).ln(), -slope)
        })
        .exp()
    }

    fn point_above(&self, p: f64) -> f64 {
        root::falling(self.start(1.0 - p), |u| {
            let (x, tails) = self.at(u);
            let slope = 0.5 * self.df * incomplete_gamma::weight(0.5 * self.df, 0.5 * x) / tails.upper;
            ((tails.upper / p).ln(), -slope)
        })
        .exp()
    }

    fn at(&self, u: f64) -> (f64, Tails) {
        let x = u.exp();
        (x, self.tails(x))
    }

    /// ln of the Wilson–Hilferty approximation, or of the leading term of the series for very small p.
    fn start(&self, p: f64) -> f64 {
        let z = normal::quantile(p).unwrap_or(0.0);
        let spread = 2.0 / (9.0 * self.df);
        let cube = 1.0 - spread + z * spread.sqrt();
        if cube > 0.2 {
            return self.df.ln() + 3.0 * cube.ln();
        }
        let half = 0.5 * self.df;
        std::f64::consts::LN_2 + (p.max(1e-300).ln() + libm::lgamma(half + 1.0)) / half
    }
}
