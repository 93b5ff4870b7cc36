//! Regression of counts with a log link: Poisson, quasi-Poisson and negative binomial.
//!
//! For true event counts (particles). The number of inversions to redisperse is a waiting time: ln scale.
//! Sources: McCullagh & Nelder, Generalized Linear Models, 2nd ed. 1989; Venables & Ripley, MASS, 4th ed.
//! 2002.

use super::distribution::fisher::Fisher;
use super::least_squares::Cholesky;

/// A fitted count model.
#[derive(Clone, Debug, PartialEq)]
pub struct CountFit {
    /// Coefficients on the log scale.
    pub coefficients: Vec<f64>,
    /// Standard errors with the dispersion taken as 1.
    pub standard_errors: Vec<f64>,
    /// Deviance against the saturated model.
    pub deviance: f64,
    /// Pearson χ².
    pub pearson: f64,
    /// Residual degrees of freedom.
    pub df: usize,
    /// Log likelihood.
    pub log_likelihood: f64,
}

impl CountFit {
    /// φ = χ²/df: 1 for Poisson spread, above for more; none without degrees of freedom.
    pub fn dispersion(&self) -> Option<f64> {
        (self.df > 0).then(|| self.pearson / self.df as f64)
    }

    /// Standard errors times √φ.
    pub fn quasi_standard_errors(&self) -> Option<Vec<f64>> {
        let root = self.dispersion()?.sqrt();
        Some(self.standard_errors.iter().map(|se| se * root).collect())
    }
}

/// A negative binomial fit: variance μ + μ²/θ.
#[derive(Clone, Debug, PartialEq)]
pub struct NegativeBinomialFit {
    /// The fit of the mean at θ.
    pub fit: CountFit,
    /// θ; infinite spread at 0, Poisson for very large values.
    pub theta: f64,
    /// Standard error of θ.
    pub se_theta: f64,
}

/// Fits counts on the columns of `rows`. `None` for sizes that do not fit, negative or not finite numbers,
/// columns that depend on one another, or a likelihood without inner maximum.
pub fn poisson(rows: &[f64], columns: usize, counts: &[f64]) -> Option<CountFit> {
    check(rows, columns, counts)?;
    weighted(rows, columns, counts, None)
}

/// Fits mean and θ by turns. `None` as for [`poisson`], and where the spread is not above Poisson's, so that
/// θ has no maximum.
pub fn negative_binomial(rows: &[f64], columns: usize, counts: &[f64]) -> Option<NegativeBinomialFit> {
    check(rows, columns, counts)?;
    let mut fit = weighted(rows, columns, counts, None)?;
    let mut theta = 1.0;
    for _ in 0..200 {
        let means = means(rows, columns, &fit.coefficients);
        let next = best_theta(counts, &means, theta)?;
        fit = weighted(rows, columns, counts, Some(next))?;
        let change = (next / theta - 1.0).abs();
        theta = next;
        if change < 1e-13 {
            break;
        }
    }
    let means = means(rows, columns, &fit.coefficients);
    let (_, slope) = theta_score(counts, &means, theta);
    (slope < 0.0).then(|| NegativeBinomialFit { fit, theta, se_theta: (-1.0 / slope).sqrt() })
}

/// Comparison of nested quasi-Poisson models: F = (Δdeviance/Δdf)/φ of the full model, and its probability.
pub fn quasi_test(full: &CountFit, reduced: &CountFit) -> Option<(f64, f64)> {
    let df1 = reduced.df.checked_sub(full.df).filter(|&df| df > 0)? as f64;
    let f = (reduced.deviance - full.deviance).max(0.0) / df1 / full.dispersion()?;
    f.is_finite().then(|| Fisher::new(df1, full.df as f64).map(|fisher| (f, fisher.tails(f).upper)))?
}

fn check(rows: &[f64], columns: usize, counts: &[f64]) -> Option<()> {
    let sizes = columns > 0 && counts.len() >= columns && rows.len() == columns * counts.len();
    let finite = rows.iter().all(|x| x.is_finite());
    let usable = counts.iter().all(|y| *y >= 0.0 && y.is_finite()) && counts.iter().any(|y| *y > 0.0);
    (sizes && finite && usable).then_some(())
}

fn means(rows: &[f64], columns: usize, coefficients: &[f64]) -> Vec<f64> {
    let mean = |row: &[f64]| row.iter().zip(coefficients).map(|(x, b)| x * b).sum::<f64>().exp();
    rows.chunks_exact(columns).map(mean).collect()
}

/// Iteratively reweighted least squares; weights μ, or μ/(1 + μ/θ).
fn weighted(rows: &[f64], columns: usize, counts: &[f64], theta: Option<f64>) -> Option<CountFit> {
    let spread = |mu: f64| theta.map_or(mu, |theta| mu / (1.0 + mu / theta));
    let mut eta: Vec<f64> = counts.iter().map(|y| (y + 0.1).ln()).collect();
    let mut coefficients = vec![0.0; columns];
    let mut factor = None;
    for _ in 0..200 {
        let (mut matrix, mut right) = (vec![0.0; columns * columns], vec![0.0; columns]);
        for ((row, y), eta) in rows.chunks_exact(columns).zip(counts).zip(&eta) {
            let mu = eta.exp();
            let (w, z) = (spread(mu), eta + (y - mu) / mu);
            for (i, xi) in row.iter().enumerate() {
                right[i] += w * xi * z;
                for (j, xj) in row.iter().enumerate() {
                    matrix[i * columns + j] += w * xi * xj;
                }
            }
        }
        let cholesky = Cholesky::of(&matrix, columns)?;
        let next = cholesky.solve(&right);
        let change = next.iter().zip(&coefficients).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
        coefficients = next;
        factor = Some(cholesky);
        eta = rows
            .chunks_exact(columns)
            .map(|row| row.iter().zip(&coefficients).map(|(x, b)| x * b).sum())
            .collect();
        if change < 1e-13 {
            break;
        }
    }
    let inverse = factor?.inverse();
    let standard_errors = (0..columns).map(|i| inverse[i * columns + i].sqrt()).collect();
    let mu: Vec<f64> = eta.iter().map(|eta| eta.exp()).collect();
    let fit = CountFit {
        coefficients,
        standard_errors,
        deviance: 2.0 * counts.iter().zip(&mu).map(|(y, mu)| deviance(*y, *mu, theta)).sum::<f64>(),
        pearson: counts.iter().zip(&mu).map(|(y, mu)| (y - mu).powi(2) * spread(*mu) / (mu * mu)).sum(),
        df: counts.len() - columns,
        log_likelihood: counts.iter().zip(&mu).map(|(y, mu)| log_likelihood(*y, *mu, theta)).sum(),
    };
    let numbers = fit.coefficients.iter().chain([&fit.deviance, &fit.pearson, &fit.log_likelihood]);
    let finite = numbers.into_iter().all(|value| value.is_finite());
    finite.then_some(fit)
}

fn deviance(y: f64, mu: f64, theta: Option<f64>) -> f64 {
    let part = if y > 0.0 { y * (y / mu).ln() } else { 0.0 };
    match theta {
        None => part - (y - mu),
        Some(theta) => part - (y + theta) * ((y + theta) / (mu + theta)).ln(),
    }
}

fn log_likelihood(y: f64, mu: f64, theta: Option<f64>) -> f64 {
    match theta {
        None => y * mu.ln() - mu - libm::lgamma(y + 1.0),
        Some(theta) => {
            libm::lgamma(theta + y) - libm::lgamma(theta) - libm::lgamma(y + 1.0)
                + theta * theta.ln()
                + y * mu.ln()
                - (theta + y) * (theta + mu).ln()
        }
    }
}

/// Score of θ and its slope, for given means. Differences of digamma at whole steps are plain sums.
fn theta_score(counts: &[f64], means: &[f64], theta: f64) -> (f64, f64) {
    let (mut score, mut slope) = (0.0, 0.0);
    for (y, mu) in counts.iter().zip(means) {
        let steps = y.round() as u64;
        for k in 0..steps {
            let inverse = 1.0 / (theta + k as f64);
            score += inverse;
            slope -= inverse * inverse;
        }
        let sum = theta + mu;
        score += (theta / sum).ln() + 1.0 - (theta + y) / sum;
        slope += 1.0 / theta - 2.0 / sum + (theta + y) / (sum * sum);
    }
    (score, slope)
}

/// Newton on ln θ, guarded; none where θ runs away.
fn best_theta(counts: &[f64], means: &[f64], from: f64) -> Option<f64> {
    let mut theta = from;
    for _ in 0..200 {
        let (score, slope) = theta_score(counts, means, theta);
        let curve = theta * theta * slope + theta * score;
        let step = if curve < 0.0 { -theta * score / curve } else { score.signum() };
        theta *= step.clamp(-1.5, 1.5).exp();
        if !(1e-8..1e8).contains(&theta) {
            return None;
        }
        if step.abs() < 1e-14 {
            return Some(theta);
        }
    }
    Some(theta)
}
