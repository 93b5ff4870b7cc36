//! The regularised incomplete gamma function, both tails.

use super::Tails;
use super::incomplete_beta::{LN_ROOT_TWO_PI, stirling};

/// x^a e^(−x) / Γ(a + 1), stable for large a.
pub(super) fn weight(a: f64, x: f64) -> f64 {
    if a < 10.0 {
        return (a * x.ln() - x - libm::lgamma(a + 1.0)).exp();
    }
    let distance = (x - a) / a;
    let exponent =
        if distance.abs() < 0.5 { a * (distance.ln_1p() - distance) } else { a * (x / a).ln() - (x - a) };
    (exponent - LN_ROOT_TWO_PI - 0.5 * a.ln() - stirling(a)).exp()
}

/// P(a, x) and Q(a, x) for a > 0, x ≥ 0: power series below the mean, continued fraction above.
pub(super) fn tails(a: f64, x: f64) -> Tails {
    if x <= 0.0 {
        return Tails { lower: 0.0, upper: 1.0 };
    }
    if x.is_infinite() {
        return Tails { lower: 1.0, upper: 0.0 };
    }
    if x < a + 1.0 {
        let lower = (weight(a, x) * series(a, x)).min(1.0);
        Tails { lower, upper: 1.0 - lower }
    } else {
        let upper = (weight(a, x) * a * fraction(a, x)).min(1.0);
        Tails { lower: 1.0 - upper, upper }
    }
}

/// 1 + x/(a+1) + x²/((a+1)(a+2)) + …
fn series(a: f64, x: f64) -> f64 {
    let (mut sum, mut term, mut n) = (1.0, 1.0, 1.0);
    while term > sum * 1e-17 && n < 100_000.0 {
        term *= x / (a + n);
        sum += term;
        n += 1.0;
    }
    sum
}

/// 1/(x+1−a− 1(1−a)/(x+3−a− …)), by the modified Lentz method.
fn fraction(a: f64, x: f64) -> f64 {
    let tiny = 1e-300;
    let mut b = x + 1.0 - a;
    let mut c = 1.0 / tiny;
    let mut d = 1.0 / b;
    let mut product = d;
    let mut n = 1.0;
    while n < 100_000.0 {
        let factor = -n * (n - a);
        b += 2.0;
        d = not_zero(factor * d + b, tiny).recip();
        c = not_zero(b + factor / c, tiny);
        let change = d * c;
        product *= change;
        if (change - 1.0).abs() < 1e-16 {
            break;
        }
        n += 1.0;
    }
    product
}

fn not_zero(value: f64, tiny: f64) -> f64 {
    if value.abs() < tiny { tiny } else { value }
}
