//! Does the line describe the data? Shown beside a result; none of these decides anything by itself.

use super::distribution::chi_squared::ChiSquared;
use super::distribution::fisher::Fisher;
use super::distribution::student::Student;
use super::least_squares;
use super::regression::{MeanLine, Point};

/// The residual of one point, with its studentised forms.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Residual {
    /// y − ŷ.
    pub residual: f64,
    /// h at the point.
    pub leverage: f64,
    /// e/(s√(1 − h)); none where variance or 1 − h is zero.
    pub internal: Option<f64>,
    /// The same with the point itself left out of s; none with less than two degrees of freedom.
    pub external: Option<f64>,
    /// Two-sided probability of the external form.
    pub p: Option<f64>,
}

/// The residual of a point that took part in its line.
pub fn residual(line: &MeanLine, point: Point) -> Residual {
    let (residual, leverage) = (point.y - line.at(point.x), line.leverage(point.x));
    let internal = (line.variance > 0.0 && leverage < 1.0 - 1e-9)
        .then(|| residual / (line.variance * (1.0 - leverage)).sqrt());
    let df = line.df as f64;
    let external = internal.and_then(|r| {
        let left = df - r * r;
        (line.df > 1 && left > 1e-9).then(|| r * ((df - 1.0) / left).sqrt())
    });
    let p = external.and_then(|t| Some(Student::new(df - 1.0)?.two_sided(t)));
    Residual { residual, leverage, internal, external, p }
}

/// Lack of fit against the spread of replicates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LackOfFit {
    /// The variance ratio.
    pub f: f64,
    /// Numerator degrees of freedom.
    pub df1: usize,
    /// Denominator degrees of freedom: those of the replicates.
    pub df2: usize,
    /// Probability of an F at least as large.
    pub p: f64,
}

/// Lack of fit of a model with residual sum of squares `sse` on `df`, given lots whose ages are replicated.
/// `floor` is the sum of squares that rounding alone may leave. `None` without replicates or degrees of
/// freedom.
pub fn lack_of_fit(lots: &[&[Point]], sse: f64, df: usize, floor: f64) -> Option<LackOfFit> {
    let (mut pure, mut df2) = (0.0, 0);
    for lot in lots {
        let mut sorted = lot.to_vec();
        sorted.sort_by(|a, b| a.x.total_cmp(&b.x));
        for group in sorted.chunk_by(|a, b| a.x == b.x) {
            let mean = group.iter().map(|p| p.y).sum::<f64>() / group.len() as f64;
            pure += group.iter().map(|p| (p.y - mean) * (p.y - mean)).sum::<f64>();
            df2 += group.len() - 1;
        }
    }
    let df1 = df.checked_sub(df2).filter(|&df1| df1 > 0 && df2 > 0 && pure > floor)?;
    let f = ((sse - pure).max(0.0) / df1 as f64) / (pure / df2 as f64);
    let p = Fisher::new(df1 as f64, df2 as f64)?.tails(f).upper;
    Some(LackOfFit { f, df1, df2, p })
}

/// t of a quadratic term added to one lot's line, and its two-sided probability; none with fewer than four
/// points or three ages, or without residual variance.
pub fn curvature(points: &[Point]) -> Option<(f64, f64)> {
    let n = points.len();
    (n >= 4).then_some(())?;
    let middle = points.iter().map(|p| p.x).sum::<f64>() / n as f64;
    let rows: Vec<f64> = points.iter().flat_map(|p| [1.0, p.x - middle, (p.x - middle).powi(2)]).collect();
    let y: Vec<f64> = points.iter().map(|p| p.y).collect();
    let fit = least_squares::fit(&rows, 3, &y)?;
    let t = fit.coefficients[2] / fit.standard_errors.as_ref()?[2];
    let p = Student::new(fit.df as f64)?.two_sided(t);
    t.is_finite().then_some((t, p))
}

/// Bartlett's test of equal variances, from each lot's residual sum of squares and degrees of freedom; the
/// probability, or none where fewer than two lots have a variance.
///
/// Source: Bartlett, Proc. R. Soc. A 160 (1937) 268, with the usual correction factor.
pub fn bartlett(lots: &[(f64, usize)]) -> Option<f64> {
    let used: Vec<(f64, f64)> =
        lots.iter().filter(|(sse, df)| *df > 0 && *sse > 0.0).map(|&(sse, df)| (sse, df as f64)).collect();
    (used.len() >= 2).then_some(())?;
    let df: f64 = used.iter().map(|(_, df)| df).sum();
    let pooled = used.iter().map(|(sse, _)| sse).sum::<f64>() / df;
    let ratio = df * pooled.ln() - used.iter().map(|(sse, df)| df * (sse / df).ln()).sum::<f64>();
    let groups = used.len() as f64 - 1.0;
    let correction = 1.0 + (used.iter().map(|(_, df)| 1.0 / df).sum::<f64>() - 1.0 / df) / (3.0 * groups);
    let statistic = ratio / correction;
    statistic.is_finite().then(|| ChiSquared::new(groups).map(|chi2| chi2.tails(statistic).upper))?
}
