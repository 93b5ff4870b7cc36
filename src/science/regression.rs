//! The straight line through results over age, with its standard errors.

use thiserror::Error;

/// One result: the age and the value, both as plain numbers on the analysis scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point {
    /// Age, in the unit the caller works in (months in this program).
    pub x: f64,
    /// Value.
    pub y: f64,
}

/// Why there is no line.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
pub enum NoLine {
    /// No points at all.
    #[error("there are no results")]
    NoPoints,
    /// A value or an age that is not a finite number.
    #[error("a value or an age is not a finite number")]
    NotFinite,
    /// All points have one age, so there is no slope.
    #[error("all results have the same age; a line needs two ages")]
    OneAge,
}

/// Sums about the means, taken in two passes so that a large common level costs no digits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sums {
    /// Number of points.
    pub n: usize,
    /// Mean age.
    pub mean_x: f64,
    /// Mean value.
    pub mean_y: f64,
    /// Σ(x − x̄)².
    pub sxx: f64,
    /// Σ(x − x̄)(y − ȳ).
    pub sxy: f64,
    /// Σ(y − ȳ)².
    pub syy: f64,
    /// The largest |y|, which sets what rounding alone can leave behind.
    pub largest_y: f64,
}

impl Sums {
    /// Sums of one or more finite points.
    pub fn of(points: &[Point]) -> Result<Self, NoLine> {
        if points.is_empty() {
            return Err(NoLine::NoPoints);
        }
        let count = points.len() as f64;
        let (mut x, mut y, mut largest) = (0.0, 0.0, 0.0_f64);
        for p in points {
            x += p.x;
            y += p.y;
            largest = largest.max(p.y.abs());
        }
        let (mean_x, mean_y) = (x / count, y / count);
        if !(mean_x.is_finite() && mean_y.is_finite() && largest.is_finite()) {
            return Err(NoLine::NotFinite);
        }
        Ok(Self::about(points, mean_x, mean_y, largest))
    }

    fn about(points: &[Point], mean_x: f64, mean_y: f64, largest_y: f64) -> Self {
        let count = points.len() as f64;
        let (mut x, mut y, mut sxx, mut sxy, mut syy) = (0.0, 0.0, 0.0, 0.0, 0.0);
        for p in points {
            let (dx, dy) = (p.x - mean_x, p.y - mean_y);
            x += dx;
            y += dy;
            sxx += dx * dx;
            sxy += dx * dy;
            syy += dy * dy;
        }
        // What the rounded means left over is carried back (corrected two-pass sums).
        let (rest_x, rest_y) = (x / count, y / count);
        Self {
            n: points.len(),
            mean_x: mean_x + rest_x,
            mean_y: mean_y + rest_y,
            sxx: (sxx - x * rest_x).max(0.0),
            sxy: sxy - x * rest_y,
            syy: (syy - y * rest_y).max(0.0),
            largest_y,
        }
    }

    /// Sums of no point yet, to be filled one point at a time.
    pub const NONE: Self =
        Self { n: 0, mean_x: 0.0, mean_y: 0.0, sxx: 0.0, sxy: 0.0, syy: 0.0, largest_y: 0.0 };

    /// Takes one more point in, without keeping it.
    ///
    /// Source: Welford, Technometrics 4 (1962) 419; products alike. Less exact than [`Sums::of`] by rounding of each
    /// step; for whole data sets in one pass.
    pub fn add(&mut self, point: Point) {
        self.n += 1;
        let share = 1.0 / self.n as f64;
        let (dx, dy) = (point.x - self.mean_x, point.y - self.mean_y);
        self.mean_x += dx * share;
        self.mean_y += dy * share;
        let (rest_x, rest_y) = (point.x - self.mean_x, point.y - self.mean_y);
        self.sxx += dx * rest_x;
        self.sxy += dx * rest_y;
        self.syy += dy * rest_y;
        self.largest_y = self.largest_y.max(point.y.abs());
    }

    /// Takes a point out again that was taken in before: a value that a later version replaces.
    pub fn take_out(&mut self, point: Point) {
        if self.n < 2 {
            *self = Self::NONE;
            return;
        }
        let count = self.n as f64;
        let (old_x, old_y) = (self.mean_x, self.mean_y);
        self.mean_x = (count * old_x - point.x) / (count - 1.0);
        self.mean_y = (count * old_y - point.y) / (count - 1.0);
        self.sxx = (self.sxx - (point.x - old_x) * (point.x - self.mean_x)).max(0.0);
        self.sxy -= (point.x - old_x) * (point.y - self.mean_y);
        self.syy = (self.syy - (point.y - old_y) * (point.y - self.mean_y)).max(0.0);
        self.n -= 1;
    }

    /// Whether there are two ages. Ages that differ by rounding alone count as one.
    pub fn has_slope(&self) -> bool {
        let noise = 8.0 * f64::EPSILON * self.mean_x.abs();
        self.sxx > self.n as f64 * noise * noise
    }
}

/// Sum of squares below which residuals are rounding, not variance: 1e-12·Σ(y−ȳ)² + N(64ε·max|y|)².
pub fn rounding_floor(n: usize, syy: f64, largest_y: f64) -> f64 {
    let noise = 64.0 * f64::EPSILON * largest_y;
    1e-12 * syy + n as f64 * noise * noise
}

/// A line whose residual variance is known: what confidence, prediction and tolerance limits are made from.
/// For one lot of several, the centre may be the lot's own while slope and variance come from all lots.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MeanLine {
    /// Number of points behind the centre.
    pub n: usize,
    /// Mean age at the centre.
    pub mean_x: f64,
    /// Mean value at the centre.
    pub mean_y: f64,
    /// Σ(x − x̄)² behind the slope; above zero.
    pub sxx: f64,
    /// Slope.
    pub slope: f64,
    /// Residual variance s², zero or more.
    pub variance: f64,
    /// Degrees of freedom of s², at least 1.
    pub df: usize,
}

impl MeanLine {
    /// Value of the line at age x.
    pub fn at(&self, x: f64) -> f64 {
        self.mean_y + self.slope * (x - self.mean_x)
    }

    /// h(x) = 1/n + (x − x̄)²/Sxx: variance of the line at x in units of σ².
    pub fn leverage(&self, x: f64) -> f64 {
        let d = x - self.mean_x;
        1.0 / self.n as f64 + d * d / self.sxx
    }
}

/// A least-squares line y = intercept + slope·x.
///
/// Formulas: Draper & Smith, Applied Regression Analysis, 3rd ed. 1998, ch. 1.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Line {
    /// The sums the line was made from.
    pub sums: Sums,
    /// Slope, value per unit of age.
    pub slope: f64,
    /// Residual sum of squares; exactly 0 where it is rounding only.
    pub sse: f64,
    /// Residual degrees of freedom, n − 2.
    pub df: usize,
}

impl Line {
    /// Fits the line. The residual sum of squares is summed from the residuals themselves.
    pub fn fit(points: &[Point]) -> Result<Self, NoLine> {
        let sums = Sums::of(points)?;
        if !sums.has_slope() {
            return Err(NoLine::OneAge);
        }
        let slope = sums.sxy / sums.sxx;
        let sse = residual_sum(points, &sums, slope);
        if !(slope.is_finite() && sse.is_finite()) {
            return Err(NoLine::NotFinite);
        }
        let floor = rounding_floor(sums.n, sums.syy, sums.largest_y);
        Ok(Self { sums, slope, sse: if sse <= floor { 0.0 } else { sse }, df: sums.n.saturating_sub(2) })
    }

    /// Value of the line at age 0.
    pub fn intercept(&self) -> f64 {
        self.sums.mean_y - self.slope * self.sums.mean_x
    }

    /// Value of the line at age x.
    pub fn at(&self, x: f64) -> f64 {
        self.sums.mean_y + self.slope * (x - self.sums.mean_x)
    }

    /// h(x) = 1/n + (x − x̄)²/Sxx: variance of the line at x in units of σ².
    pub fn leverage(&self, x: f64) -> f64 {
        let d = x - self.sums.mean_x;
        1.0 / self.sums.n as f64 + d * d / self.sums.sxx
    }

    /// The line with its variance; none with two points.
    pub fn mean_line(&self) -> Option<MeanLine> {
        let (sums, variance) = (self.sums, self.mse()?);
        let Sums { n, mean_x, mean_y, sxx, .. } = sums;
        Some(MeanLine { n, mean_x, mean_y, sxx, slope: self.slope, variance, df: self.df })
    }

    /// Residual variance s²; none with two points, since nothing is left to judge it by.
    pub fn mse(&self) -> Option<f64> {
        (self.df > 0).then(|| self.sse / self.df as f64)
    }

    /// Standard error of the slope.
    pub fn se_slope(&self) -> Option<f64> {
        self.mse().map(|s2| (s2 / self.sums.sxx).sqrt())
    }

    /// Standard error of the intercept.
    pub fn se_intercept(&self) -> Option<f64> {
        self.mse().map(|s2| (s2 * self.leverage(0.0)).sqrt())
    }

    /// R² = 1 − SSE/Syy; none when all values are equal.
    pub fn r_squared(&self) -> Option<f64> {
        (self.sums.syy > 0.0).then(|| 1.0 - self.sse / self.sums.syy)
    }
}

/// Σ(y − ȳ − b(x − x̄))².
pub fn residual_sum(points: &[Point], about: &Sums, slope: f64) -> f64 {
    points
        .iter()
        .map(|p| {
            let e = p.y - about.mean_y - slope * (p.x - about.mean_x);
            e * e
        })
        .sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn points(pairs: &[(f64, f64)]) -> Vec<Point> {
        pairs.iter().map(|&(x, y)| Point { x, y }).collect()
    }

    #[test]
    fn degenerate_input_is_named() {
        assert_eq!(Line::fit(&[]), Err(NoLine::NoPoints));
        assert_eq!(Line::fit(&points(&[(3.0, 1.0), (3.0, 2.0)])), Err(NoLine::OneAge));
        assert_eq!(Line::fit(&points(&[(0.0, 1.0), (f64::NAN, 2.0)])), Err(NoLine::NotFinite));
        assert_eq!(Line::fit(&points(&[(0.0, 1.0), (1.0, f64::INFINITY)])), Err(NoLine::NotFinite));
        assert_eq!(Line::fit(&points(&[(0.0, 1e308), (1.0, -1e308), (2.0, 1e308)])), Err(NoLine::NotFinite));
    }

    #[test]
    fn two_points_make_a_line_without_errors() {
        let line = Line::fit(&points(&[(0.0, 100.0), (10.0, 95.0)])).unwrap();
        assert_eq!((line.slope, line.intercept(), line.df), (-0.5, 100.0, 0));
        assert_eq!((line.mse(), line.se_slope(), line.se_intercept()), (None, None, None));
    }

    #[test]
    fn an_exact_line_has_no_variance() {
        let line = Line::fit(&points(&[(0.0, 1.1), (1.0, 1.2), (2.0, 1.3), (3.0, 1.4)])).unwrap();
        assert_eq!(line.sse, 0.0);
        assert_eq!(line.se_slope(), Some(0.0));
    }

    /// Welford's sums against the two-pass ones, and a point taken in and out again.
    #[test]
    fn sums_taken_point_by_point_are_those_of_all() {
        let all = points(&[(0.0, 100.1), (3.0, 99.6), (6.0, 99.2), (9.0, 98.4), (12.0, 97.9)]);
        let whole = Sums::of(&all).unwrap();
        let mut one_by_one = Sums::NONE;
        one_by_one.add(all[0]);
        let mistyped = Point { x: 3.0, y: 9.96 };
        one_by_one.add(mistyped);
        all[1..].iter().for_each(|point| one_by_one.add(*point));
        one_by_one.take_out(mistyped);
        assert_eq!(one_by_one.n, whole.n);
        for (got, wanted) in [
            (one_by_one.mean_x, whole.mean_x),
            (one_by_one.mean_y, whole.mean_y),
            (one_by_one.sxx, whole.sxx),
            (one_by_one.sxy, whole.sxy),
            (one_by_one.syy, whole.syy),
        ] {
            assert!((got - wanted).abs() <= 1e-10 * wanted.abs(), "{got} {wanted}");
        }
        let mut single = Sums::NONE;
        single.add(mistyped);
        single.take_out(mistyped);
        assert_eq!(single, Sums::NONE);
    }

    #[test]
    fn ages_that_differ_by_rounding_are_one_age() {
        assert_eq!(Line::fit(&points(&[(0.1 + 0.2, 1.0), (0.3, 2.0)])), Err(NoLine::OneAge));
    }
}
