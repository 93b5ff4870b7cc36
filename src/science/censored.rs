//! Regression with values known only as "more than", "less than" or "between": maximum likelihood.
//!
//! Sources: Tobin, Econometrica 26 (1958) 24; Nelson, Accelerated Testing, 1990. Standard errors come from
//! the observed information.

use super::distribution::chi_squared::ChiSquared;
use super::distribution::normal;
use super::least_squares::Cholesky;

/// What is known of one value, on the analysis scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Observed {
    /// The value itself.
    Exactly(f64),
    /// More than this.
    Above(f64),
    /// Less than this.
    Below(f64),
    /// More than the first, at most the second.
    Between(f64, f64),
}

/// The distribution of the errors, in units of the scale σ.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Errors {
    /// Normal: on the ln scale, log-normal times or counts.
    Normal,
    /// Smallest extreme value: on the ln scale, Weibull times.
    SmallestExtreme,
}

/// A fitted model.
#[derive(Clone, Debug, PartialEq)]
pub struct CensoredFit {
    /// Coefficients, one per column.
    pub coefficients: Vec<f64>,
    /// Their standard errors.
    pub standard_errors: Vec<f64>,
    /// ln σ.
    pub ln_scale: f64,
    /// Standard error of ln σ.
    pub se_ln_scale: f64,
    /// The log likelihood.
    pub log_likelihood: f64,
    /// Covariance of (coefficients, ln σ), row by row.
    pub covariance: Vec<f64>,
}

/// Why there is no fit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoFit {
    /// Fewer than three values are known exactly or as an interval: only bounds can be stated.
    OnlyBounds,
    /// Sizes do not fit, a number is not finite, or an interval is empty.
    BadInput,
    /// The likelihood has no inner maximum, or the columns depend on one another.
    NoMaximum,
}

/// ln of a density or probability with its first two derivatives.
type Term = [f64; 3];

fn ln_density(errors: Errors, z: f64) -> Term {
    match errors {
        Errors::Normal => [-0.5 * z * z - 0.918_938_533_204_672_8, -z, -1.0],
        Errors::SmallestExtreme => [z - z.exp(), 1.0 - z.exp(), -z.exp()],
    }
}

fn ln_upper(errors: Errors, z: f64) -> Term {
    match errors {
        Errors::Normal => {
            let hazard = normal::hazard(z);
            [normal::ln_upper(z), -hazard, -hazard * (hazard - z)]
        }
        Errors::SmallestExtreme => [-z.exp(), -z.exp(), -z.exp()],
    }
}

fn ln_lower(errors: Errors, z: f64) -> Term {
    match errors {
        Errors::Normal => {
            let [value, first, second] = ln_upper(errors, -z);
            [value, -first, second]
        }
        Errors::SmallestExtreme => {
            let e = z.exp();
            let lower = -(-e).exp_m1();
            let ratio = (z - e).exp() / lower;
            [lower.ln(), ratio, ratio * (1.0 - e - ratio)]
        }
    }
}

/// ln(F(u) − F(l)) with gradient and Hessian in (l, u).
fn ln_between(errors: Errors, l: f64, u: f64) -> (f64, [f64; 2], [f64; 3]) {
    let (dl, du) = (ln_density(errors, l), ln_density(errors, u));
    let ln_probability = match errors {
        // Taken from the tail that holds both ends, so that no digits are lost.
        Errors::Normal if l > 0.0 => ln_difference(normal::ln_upper(l), normal::ln_upper(u)),
        Errors::Normal => ln_difference(normal::ln_upper(-u), normal::ln_upper(-l)),
        Errors::SmallestExtreme => ln_difference(-l.exp(), -u.exp()),
    };
    let (a, b) = ((dl[0] - ln_probability).exp(), (du[0] - ln_probability).exp());
    (ln_probability, [-a, b], [-dl[1] * a - a * a, a * b, du[1] * b - b * b])
}

/// ln(e^a − e^b) for a > b.
fn ln_difference(a: f64, b: f64) -> f64 {
    a + (-(b - a).exp()).ln_1p()
}

/// The log likelihood with gradient and negative Hessian in (β, ln σ).
struct Likelihood {
    value: f64,
    gradient: Vec<f64>,
    information: Vec<f64>,
}

struct Problem<'a> {
    rows: &'a [f64],
    columns: usize,
    values: &'a [Observed],
    errors: Errors,
}

impl Problem<'_> {
    fn at(&self, parameters: &[f64]) -> Likelihood {
        let p = self.columns;
        let sigma = parameters[p].exp();
        let mut sum =
            Likelihood { value: 0.0, gradient: vec![0.0; p + 1], information: vec![0.0; (p + 1) * (p + 1)] };
        for (row, value) in self.rows.chunks_exact(p).zip(self.values) {
            let mean: f64 = row.iter().zip(parameters).map(|(x, b)| x * b).sum();
            let z = |y: f64| (y - mean) / sigma;
            match *value {
                Observed::Exactly(y) => {
                    sum.value -= parameters[p];
                    sum.gradient[p] -= 1.0;
                    sum.add(row, sigma, z(y), ln_density(self.errors, z(y)));
                }
                Observed::Above(y) => sum.add(row, sigma, z(y), ln_upper(self.errors, z(y))),
                Observed::Below(y) => sum.add(row, sigma, z(y), ln_lower(self.errors, z(y))),
                Observed::Between(low, high) => sum.add_interval(row, sigma, [z(low), z(high)], self.errors),
            }
        }
        sum
    }
}

impl Likelihood {
    fn add(&mut self, row: &[f64], sigma: f64, z: f64, [value, first, second]: Term) {
        self.value += value;
        let slope = -first / sigma;
        self.collect(
            row,
            slope,
            -first * z,
            second / (sigma * sigma),
            (second * z + first) / sigma,
            second * z * z + first * z,
        );
    }

    fn add_interval(&mut self, row: &[f64], sigma: f64, z: [f64; 2], errors: Errors) {
        let (value, g, h) = ln_between(errors, z[0], z[1]);
        self.value += value;
        let ones = h[0] + 2.0 * h[1] + h[2];
        let mixed = h[0] * z[0] + h[1] * (z[0] + z[1]) + h[2] * z[1];
        let squares = h[0] * z[0] * z[0] + 2.0 * h[1] * z[0] * z[1] + h[2] * z[1] * z[1];
        let (first, along) = (g[0] + g[1], g[0] * z[0] + g[1] * z[1]);
        self.collect(
            row,
            -first / sigma,
            -along,
            ones / (sigma * sigma),
            (mixed + first) / sigma,
            squares + along,
        );
    }

    /// Adds one point: gradient (slope·x, scale) and Hessian (bb·xx', bs·x, ss).
    fn collect(&mut self, row: &[f64], slope: f64, scale: f64, bb: f64, bs: f64, ss: f64) {
        let p = row.len();
        let size = p + 1;
        for (i, xi) in row.iter().enumerate() {
            self.gradient[i] += slope * xi;
            for (j, xj) in row.iter().enumerate() {
                self.information[i * size + j] -= bb * xi * xj;
            }
            self.information[i * size + p] -= bs * xi;
            self.information[p * size + i] -= bs * xi;
        }
        self.gradient[p] += scale;
        self.information[p * size + p] -= ss;
    }
}

/// Fits values on the columns of `rows` (one row of `columns` numbers per value).
pub fn fit(rows: &[f64], columns: usize, values: &[Observed], errors: Errors) -> Result<CensoredFit, NoFit> {
    check(rows, columns, values)?;
    let problem = Problem { rows, columns, values, errors };
    let mut parameters = start(rows, columns, values)?;
    let mut here = problem.at(&parameters);
    for _ in 0..200 {
        let step = newton_step(&here, columns + 1)?;
        let (next, there, taken) = halve(&problem, &parameters, &here, &step);
        let moved =
            step.iter().zip(&next).map(|(s, p)| (taken * s).abs() / p.abs().max(1e-3)).fold(0.0, f64::max);
        (parameters, here) = (next, there);
        if moved < 1e-13 {
            break;
        }
    }
    finish(&here, parameters, columns)
}

fn check(rows: &[f64], columns: usize, values: &[Observed]) -> Result<(), NoFit> {
    let finite = |value: &Observed| match *value {
        Observed::Exactly(y) | Observed::Above(y) | Observed::Below(y) => y.is_finite(),
        Observed::Between(low, high) => low.is_finite() && high.is_finite() && low < high,
    };
    let sizes = columns > 0 && rows.len() == columns * values.len();
    if !sizes || !rows.iter().all(|x| x.is_finite()) || !values.iter().all(finite) {
        return Err(NoFit::BadInput);
    }
    let known = |value: &&Observed| matches!(value, Observed::Exactly(_) | Observed::Between(..));
    if values.iter().filter(known).count() < 3 { Err(NoFit::OnlyBounds) } else { Ok(()) }
}

/// Least squares on bounds and interval middles; σ from its residuals.
fn start(rows: &[f64], columns: usize, values: &[Observed]) -> Result<Vec<f64>, NoFit> {
    let y: Vec<f64> = values
        .iter()
        .map(|value| match *value {
            Observed::Exactly(y) | Observed::Above(y) | Observed::Below(y) => y,
            Observed::Between(low, high) => 0.5 * (low + high),
        })
        .collect();
    let fit = super::least_squares::fit(rows, columns, &y).ok_or(NoFit::NoMaximum)?;
    let spread = (fit.sse / y.len() as f64).sqrt();
    let smallest = 1e-6 * y.iter().fold(1e-300_f64, |largest, y| largest.max(y.abs()));
    let mut parameters = fit.coefficients;
    parameters.push(spread.max(smallest).ln());
    Ok(parameters)
}

/// The Newton step; where the information is not positive definite its diagonal is raised until it is.
fn newton_step(here: &Likelihood, size: usize) -> Result<Vec<f64>, NoFit> {
    let diagonal = (0..size).map(|i| here.information[i * size + i].abs()).fold(0.0, f64::max);
    let mut raise = 0.0;
    for _ in 0..60 {
        let mut matrix = here.information.clone();
        for i in 0..size {
            matrix[i * size + i] += raise * here.information[i * size + i].abs().max(1e-12 * diagonal);
        }
        if let Some(factor) = Cholesky::of(&matrix, size) {
            return Ok(factor.solve(&here.gradient));
        }
        raise = if raise == 0.0 { 1e-6 } else { raise * 4.0 };
    }
    Err(NoFit::NoMaximum)
}

/// The longest of full, half, quarter … steps that does not lower the likelihood.
fn halve(problem: &Problem, from: &[f64], here: &Likelihood, step: &[f64]) -> (Vec<f64>, Likelihood, f64) {
    let mut share = 1.0;
    loop {
        let next: Vec<f64> = from.iter().zip(step).map(|(p, s)| p + share * s).collect();
        let there = problem.at(&next);
        let rounding = 1e-12 * here.value.abs();
        if (there.value.is_finite() && there.value >= here.value - rounding) || share < 1e-9 {
            return (next, there, share);
        }
        share *= 0.5;
    }
}

fn finish(here: &Likelihood, parameters: Vec<f64>, columns: usize) -> Result<CensoredFit, NoFit> {
    let size = columns + 1;
    let covariance = Cholesky::of(&here.information, size).ok_or(NoFit::NoMaximum)?.inverse();
    let gain: f64 = newton_step(here, size)?.iter().zip(&here.gradient).map(|(s, g)| s * g).sum();
    if !(here.value.is_finite() && gain < 1e-9) {
        return Err(NoFit::NoMaximum);
    }
    let error = |i: usize| covariance[i * size + i].sqrt();
    Ok(CensoredFit {
        standard_errors: (0..columns).map(error).collect(),
        ln_scale: parameters[columns],
        se_ln_scale: error(columns),
        coefficients: parameters[..columns].to_vec(),
        log_likelihood: here.value,
        covariance,
    })
}

/// Likelihood ratio of a model against a smaller one: (χ², probability). Too ready to reject in small
/// samples.
pub fn likelihood_ratio(full: &CensoredFit, reduced: &CensoredFit, df: usize) -> Option<(f64, f64)> {
    let chi2 = (2.0 * (full.log_likelihood - reduced.log_likelihood)).max(0.0);
    Some((chi2, ChiSquared::new(df as f64)?.tails(chi2).upper))
}

/// Age at which the upper confidence limit of the median of a line (intercept, slope) meets `limit`, with the
/// quantile (z or t) handed in; none if it never does after age 0 or is above it already there.
pub fn upper_limit_meets(fit: &CensoredFit, quantile: f64, limit: f64) -> Option<f64> {
    let size = fit.coefficients.len() + 1;
    (fit.coefficients.len() == 2).then_some(())?;
    let v = |i: usize, j: usize| fit.covariance[i * size + j];
    let margin = |x: f64| {
        let variance = v(0, 0) + 2.0 * x * v(0, 1) + x * x * v(1, 1);
        limit - fit.coefficients[0] - fit.coefficients[1] * x - quantile * variance.max(0.0).sqrt()
    };
    (margin(0.0) >= 0.0).then_some(())?;
    let (mut low, mut high) = (0.0, 1.0);
    while margin(high) > 0.0 {
        (low, high) = (high, high * 2.0);
        (high < 1e9).then_some(())?;
    }
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        if margin(middle) > 0.0 { low = middle } else { high = middle }
    }
    Some(0.5 * (low + high))
}
