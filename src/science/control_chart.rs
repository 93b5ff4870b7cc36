//! Shewhart, moving-average and count charts, for processes in control (not for stability trends).

/// Centre and limits of a chart.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Chart {
    /// Lower control limit.
    pub lower: f64,
    /// Centre line.
    pub centre: f64,
    /// Upper control limit.
    pub upper: f64,
}

/// d₂ for moving ranges of two values, 2/√π.
pub const D2_OF_TWO: f64 = std::f64::consts::FRAC_2_SQRT_PI;

/// Chart of individual values: x̄ ± 3·MR̄/d₂ (NIST/SEMATECH 6.3.2.2). `None` with fewer than two finite
/// values.
pub fn individuals(values: &[f64], d2: f64) -> Option<Chart> {
    let n = values.len();
    (n >= 2 && d2 > 0.0 && values.iter().all(|v| v.is_finite())).then_some(())?;
    let centre = values.iter().sum::<f64>() / n as f64;
    let range = values.windows(2).map(|pair| (pair[1] - pair[0]).abs()).sum::<f64>() / (n - 1) as f64;
    let half = 3.0 * range / d2;
    Some(Chart { lower: centre - half, centre, upper: centre + half })
}

/// Exponentially weighted moving average from the target on, with its limits for late times:
/// target ± l·s·√(λ/(2 − λ)) (NIST/SEMATECH 6.3.2.4). `None` unless 0 < λ ≤ 1 and s ≥ 0.
pub fn moving_average(values: &[f64], lambda: f64, target: f64, s: f64, l: f64) -> Option<(Chart, Vec<f64>)> {
    let usable = lambda > 0.0 && lambda <= 1.0 && s >= 0.0 && l >= 0.0 && target.is_finite();
    (usable && values.iter().all(|v| v.is_finite())).then_some(())?;
    let mut average = target;
    let series = values.iter().map(|v| {
        average = lambda * v + (1.0 - lambda) * average;
        average
    });
    let series = series.collect();
    let half = l * s * (lambda / (2.0 - lambda)).sqrt();
    Some((Chart { lower: target - half, centre: target, upper: target + half }, series))
}

/// Chart of counts: c̄ ± 3√c̄, not below 0 (NIST/SEMATECH 6.3.3.1). `None` without counts.
pub fn counts(values: &[u32]) -> Option<Chart> {
    (!values.is_empty()).then_some(())?;
    let centre = values.iter().map(|&c| f64::from(c)).sum::<f64>() / values.len() as f64;
    let half = 3.0 * centre.sqrt();
    Some(Chart { lower: (centre - half).max(0.0), centre, upper: centre + half })
}
