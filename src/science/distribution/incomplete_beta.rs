//! The regularised incomplete beta function, both tails, with the constant part kept.

use super::Tails;

/// I_x(a, b) for fixed a, b > 0.
#[derive(Clone, Copy, Debug)]
pub struct IncompleteBeta {
    a: f64,
    b: f64,
    ln_beta: f64,
}

impl IncompleteBeta {
    /// `None` unless both parameters are positive and finite.
    pub fn new(a: f64, b: f64) -> Option<Self> {
        let usable = a > 0.0 && b > 0.0 && a.is_finite() && b.is_finite();
        usable.then(|| Self { a, b, ln_beta: ln_beta(a, b) })
    }

    /// ln B(a, b).
    pub fn ln_beta(&self) -> f64 {
        self.ln_beta
    }

    /// x^a y^b / B(a, b), where y = 1 − x is handed in because only the caller can form it without loss.
    pub fn weight(&self, x: f64, y: f64) -> f64 {
        let ln_x = if x > 0.5 { (-y).ln_1p() } else { x.ln() };
        let ln_y = if y > 0.5 { (-x).ln_1p() } else { y.ln() };
        (self.a * ln_x + self.b * ln_y - self.ln_beta).exp()
    }

    /// I_x(a, b) and its complement, with y = 1 − x.
    ///
    /// Continued fraction of Didonato & Morris, ACM Trans. Math. Softw. 18 (1992) 360, on the side where it
    /// converges fast.
    pub fn tails(&self, x: f64, y: f64) -> Tails {
        if x <= 0.0 {
            return Tails { lower: 0.0, upper: 1.0 };
        }
        if y <= 0.0 {
            return Tails { lower: 1.0, upper: 0.0 };
        }
        self.tails_with_weight(x, y, self.weight(x, y))
    }

    /// As [`Self::tails`], for a caller that has the weight already; x and y strictly between 0 and 1.
    pub(super) fn tails_with_weight(&self, x: f64, y: f64, weight: f64) -> Tails {
        if x * (self.a + self.b + 2.0) < self.a + 1.0 {
            let lower = (weight / fraction(self.a, self.b, x, y)).min(1.0);
            Tails { lower, upper: 1.0 - lower }
        } else {
            let upper = (weight / fraction(self.b, self.a, y, x)).min(1.0);
            Tails { lower: 1.0 - upper, upper }
        }
    }
}

/// The denominator of I_x = weight / fraction, by forward recurrence with rescaling; no division but the
/// reciprocal that two successive terms share.
fn fraction(a: f64, b: f64, x: f64, y: f64) -> f64 {
    let excess = a * y - b * x + 1.0;
    let mut inverse = 1.0 / (a + 1.0);
    let (mut p_old, mut p) = (1.0, a * excess * inverse);
    let (mut q_old, mut q) = (0.0, 1.0);
    let mut m = 1.0;
    while m < 20_000.0 {
        let next_inverse = 1.0 / (a + 2.0 * m + 1.0);
        let middle = m * (b - m) * x * inverse;
        let partial = (a + m - 1.0) * (a + b + m - 1.0) * x * inverse * middle;
        let term = m + middle + (a + m) * (excess + m * (2.0 - x)) * next_inverse;
        let (p_new, q_new) = (term * p + partial * p_old, term * q + partial * q_old);
        let (left, right) = (p_new * q, p * q_new);
        if (left - right).abs() <= 1e-16 * left.abs() {
            return p_new / q_new;
        }
        (p_old, p, q_old, q) = (p, p_new, q, q_new);
        if q.abs() > 1e100 {
            let scale = 1e-100;
            (p_old, p, q_old, q) = (p_old * scale, p * scale, q_old * scale, q * scale);
        }
        inverse = next_inverse;
        m += 1.0;
    }
    p / q
}

/// ln B(a, b) without the cancellation of three ln Γ at large arguments.
pub fn ln_beta(a: f64, b: f64) -> f64 {
    let (small, large) = if a < b { (a, b) } else { (b, a) };
    let share = small / (small + large);
    if small >= 10.0 {
        let rest = stirling(small) + stirling(large) - stirling(small + large);
        return -0.5 * large.ln()
            + LN_ROOT_TWO_PI
            + rest
            + (small - 0.5) * share.ln()
            + large * (-share).ln_1p();
    }
    if large >= 10.0 {
        let rest = stirling(large) - stirling(small + large);
        return libm::lgamma(small) + rest + small - small * (small + large).ln()
            + (large - 0.5) * (-share).ln_1p();
    }
    libm::lgamma(small) + libm::lgamma(large) - libm::lgamma(small + large)
}

/// ln √(2π).
pub(super) const LN_ROOT_TWO_PI: f64 = 0.918_938_533_204_672_8;

/// ln Γ(x) − [(x − ½) ln x − x + ln √(2π)] for x ≥ 10.
pub(super) fn stirling(x: f64) -> f64 {
    let w = 1.0 / (x * x);
    let tail = w * (1.0 / 1188.0 - w * (691.0 / 360_360.0 - w / 156.0));
    (1.0 / 12.0 - w * (1.0 / 360.0 - w * (1.0 / 1260.0 - w * (1.0 / 1680.0 - tail)))) / x
}
