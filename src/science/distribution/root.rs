//! Bracketed Newton iteration for quantiles.

/// Finds u where a decreasing function of u is zero. `at` gives (value, slope) with slope < 0.
/// Newton steps inside a bracket that only shrinks; a step that leaves the bracket is replaced by halving it.
pub(super) fn falling(start: f64, at: impl Fn(f64) -> (f64, f64)) -> f64 {
    let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
    let mut u = start;
    for _ in 0..200 {
        let (value, slope) = at(u);
        if value == 0.0 {
            return u;
        }
        if value > 0.0 {
            low = u
        } else {
            high = u
        }
        let newton = u - value / slope;
        let next = step(u, newton, low, high);
        let moved = (next - u).abs();
        // Newton doubles the digits: after a step this small the next would be below rounding.
        if (next == newton && moved <= 1e-9) || moved <= 4.0 * f64::EPSILON * u.abs().max(1.0) {
            return next;
        }
        u = next;
    }
    u
}

/// The Newton point if it is a number inside the bracket and not absurdly far; else half-way, or 4 further.
fn step(u: f64, newton: f64, low: f64, high: f64) -> f64 {
    let reach = 8.0;
    if newton.is_finite() && newton > low && newton < high && (newton - u).abs() <= reach {
        return newton;
    }
    match (low.is_finite(), high.is_finite()) {
        (true, true) => 0.5 * (low + high),
        (true, false) => u + reach,
        _ => u - reach,
    }
}
