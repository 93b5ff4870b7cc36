//! Several lots: three nested models, and the tests that choose between them.
//!
//! Source: ICH Q1E (2003), appendix B.2.2.1: time is the covariate, slopes are tested before intercepts, each
//! at a level of 0.25 (Bancroft, Biometrics 20 (1964) 427). Q1E does not fix the error term of the second
//! test; here the common-slope model's own decides, and the other is shown beside it.

use super::distribution::fisher::Fisher;
use super::regression::{MeanLine, NoLine, Point, Sums, rounding_floor};

/// How lots share a line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Model {
    /// Every lot has its own line; one residual variance for all.
    SeparateLines,
    /// Every lot has its own intercept; one slope.
    CommonSlope,
    /// One line for all lots.
    CommonLine,
}

/// The residuals of one model.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Residuals {
    /// Residual sum of squares; exactly 0 where it is rounding only.
    pub sse: f64,
    /// Residual degrees of freedom; 0 means that no variance can be estimated.
    pub df: usize,
}

impl Residuals {
    /// Residual variance; none without degrees of freedom.
    pub fn mse(&self) -> Option<f64> {
        (self.df > 0).then(|| self.sse / self.df as f64)
    }
}

/// An F test of a smaller model against a larger one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FTest {
    /// The variance ratio; none where the residual variance is zero.
    pub f: Option<f64>,
    /// Numerator degrees of freedom.
    pub df1: usize,
    /// Denominator degrees of freedom.
    pub df2: usize,
    /// Probability of an F at least as large; with zero residual variance 1 if nothing differs, else 0.
    pub p: f64,
}

/// The fits and tests of a group of lots.
#[derive(Clone, Debug, PartialEq)]
pub struct Pooling {
    /// Sums of each lot, in the order given.
    pub lots: Vec<Sums>,
    /// Sums over all points.
    pub all: Sums,
    /// Σ Sxx over the lots.
    pub within_sxx: f64,
    /// The slope of the common-slope model; none when no lot has two ages.
    pub common_slope: Option<f64>,
    /// Number of lots with two ages.
    pub lots_with_slope: usize,
    /// Residuals of separate lines.
    pub separate_residuals: Residuals,
    /// Residuals of a common slope.
    pub common_slope_residuals: Residuals,
    /// Residuals of a common line.
    pub common_line_residuals: Residuals,
    /// Do slopes differ? None where it cannot be tested.
    pub slopes: Option<FTest>,
    /// Do intercepts differ, given one slope? Error term: the common-slope model. This one decides.
    pub intercepts: Option<FTest>,
    /// The chosen model.
    pub model: Model,
    /// The level of both tests.
    pub alpha: f64,
    /// The sum of squares below which residuals count as rounding.
    pub floor: f64,
    own_sse: Vec<f64>,
    between_slopes: f64,
    between_lots: f64,
}

impl Pooling {
    /// Fits the three models and tests them at level `alpha`. A lot with one age carries an intercept but no
    /// slope; an empty lot, or a value that is no finite number, is refused.
    pub fn of(lots: &[&[Point]], alpha: f64) -> Result<Self, NoLine> {
        let mut sums = Vec::with_capacity(lots.len());
        for lot in lots {
            sums.push(Sums::of(lot)?);
        }
        let own = |(lot, sums): (&&[Point], &mut Sums)| {
            forget_one_age(sums);
            super::regression::residual_sum(lot, sums, slope_of(sums).unwrap_or(0.0))
        };
        let own_sse = lots.iter().zip(&mut sums).map(own).collect();
        Self::of_parts(sums, own_sse, alpha)
    }

    /// The same from the sums of each lot alone, its points not kept: for whole data sets in one pass. Residuals come
    /// as Syy − Sxy²/Sxx, with fewer digits where they are small beside Syy.
    pub fn of_sums(mut sums: Vec<Sums>, alpha: f64) -> Result<Self, NoLine> {
        if sums.iter().any(|lot| lot.n == 0) {
            return Err(NoLine::NoPoints);
        }
        sums.iter_mut().for_each(forget_one_age);
        let own = |lot: &Sums| (lot.syy - slope_of(lot).unwrap_or(0.0) * lot.sxy).max(0.0);
        let own_sse = sums.iter().map(own).collect();
        Self::of_parts(sums, own_sse, alpha)
    }

    fn of_parts(sums: Vec<Sums>, own_sse: Vec<f64>, alpha: f64) -> Result<Self, NoLine> {
        let all = total(&sums)?;
        let lots_with_slope = sums.iter().filter(|lot| lot.has_slope()).count();
        let within_sxx = sums.iter().map(|lot| lot.sxx).sum::<f64>();
        let within_sxy = sums.iter().map(|lot| lot.sxy).sum::<f64>();
        let common_slope = (within_sxx > 0.0).then(|| within_sxy / within_sxx);
        let mut pooling = Self {
            all,
            within_sxx,
            common_slope,
            lots_with_slope,
            floor: rounding_floor(all.n, all.syy, all.largest_y),
            separate_residuals: Residuals { sse: 0.0, df: 0 },
            common_slope_residuals: Residuals { sse: 0.0, df: 0 },
            common_line_residuals: Residuals { sse: 0.0, df: 0 },
            slopes: None,
            intercepts: None,
            model: Model::CommonLine,
            alpha,
            lots: sums,
            own_sse,
            between_slopes: 0.0,
            between_lots: 0.0,
        };
        pooling.compare();
        if pooling.common_line_residuals.sse.is_finite() { Ok(pooling) } else { Err(NoLine::NotFinite) }
    }

    /// Sums of squares by which each model is worse than the larger one, each a sum of squares itself, so
    /// that no digits are lost in a difference.
    fn compare(&mut self) {
        let within = self.common_slope.unwrap_or(0.0);
        let overall = slope_of(&self.all).unwrap_or(0.0);
        let (mut between_slopes, mut between_lots) = (0.0, self.within_sxx * (within - overall).powi(2));
        for s in &self.lots {
            if let Some(slope) = slope_of(s) {
                between_slopes += s.sxx * (slope - within).powi(2);
            }
            let off = s.mean_y - self.all.mean_y - overall * (s.mean_x - self.all.mean_x);
            between_lots += s.n as f64 * off * off;
        }
        let separate: f64 = self.own_sse.iter().sum();
        let (n, k) = (self.all.n, self.lots.len());
        let one_slope = usize::from(self.common_slope.is_some());
        let residuals = |sse: f64, parameters: usize| Residuals {
            sse: if sse <= self.floor { 0.0 } else { sse },
            df: n.saturating_sub(parameters),
        };
        let full = residuals(separate, k + self.lots_with_slope);
        let slope = residuals(separate + between_slopes, k + one_slope);
        let line = residuals(
            separate + between_slopes + between_lots,
            1 + usize::from(slope_of(&self.all).is_some()),
        );
        if k > 1 {
            self.slopes = test(between_slopes, slope, full, full);
            self.intercepts = test(between_lots, line, slope, slope);
        }
        (self.between_slopes, self.between_lots) = (between_slopes, between_lots);
        (self.separate_residuals, self.common_slope_residuals, self.common_line_residuals) =
            (full, slope, line);
        self.model = self.choose(self.intercepts);
    }

    /// The model by the rule of Q1E; what cannot be tested is not pooled.
    fn choose(&self, intercepts: Option<FTest>) -> Model {
        if self.lots.len() == 1 {
            return Model::CommonLine;
        }
        let Some(slopes) = self.slopes else { return Model::SeparateLines };
        if slopes.p < self.alpha {
            return Model::SeparateLines;
        }
        match intercepts {
            Some(test) if test.p >= self.alpha => Model::CommonLine,
            _ => Model::CommonSlope,
        }
    }

    /// Do intercepts differ, with the error term of separate lines? Shown, never decides.
    pub fn intercepts_full_error(&self) -> Option<FTest> {
        let (line, slope) = (self.common_line_residuals, self.common_slope_residuals);
        let several = self.lots.len() > 1;
        several.then(|| test(self.between_lots, line, slope, self.separate_residuals))?
    }

    /// Slopes and intercepts together; shown, never decides.
    pub fn joint(&self) -> Option<FTest> {
        let full = self.separate_residuals;
        let several = self.lots.len() > 1;
        several
            .then(|| test(self.between_slopes + self.between_lots, self.common_line_residuals, full, full))?
    }

    /// The model that the other error term would have chosen.
    pub fn model_with_full_error(&self) -> Model {
        self.choose(self.intercepts_full_error())
    }

    /// Whether slopes were compared at all.
    pub fn tested(&self) -> bool {
        self.slopes.is_some()
    }

    /// The mean line of one lot under a model; none where slope or variance cannot be estimated.
    pub fn mean_line(&self, model: Model, lot: usize) -> Option<MeanLine> {
        let s = self.lots.get(lot)?;
        let line = |centre: &Sums, sxx: f64, slope: f64, residuals: Residuals| {
            Some(MeanLine {
                n: centre.n,
                mean_x: centre.mean_x,
                mean_y: centre.mean_y,
                sxx,
                slope,
                variance: residuals.mse()?,
                df: residuals.df,
            })
        };
        match model {
            Model::SeparateLines => line(s, s.sxx, slope_of(s)?, self.separate_residuals),
            Model::CommonSlope => line(s, self.within_sxx, self.common_slope?, self.common_slope_residuals),
            Model::CommonLine => {
                line(&self.all, self.all.sxx, slope_of(&self.all)?, self.common_line_residuals)
            }
        }
    }

    /// One lot by itself, with its own residual variance: not Q1E, shown beside it.
    pub fn own_line(&self, lot: usize) -> Option<MeanLine> {
        let s = self.lots.get(lot)?;
        let slope = slope_of(s)?;
        let own = self.own_sse.get(lot).copied()?;
        let df = s.n.checked_sub(2).filter(|&df| df > 0)?;
        let variance = if own <= self.floor { 0.0 } else { own / df as f64 };
        let Sums { n, mean_x, mean_y, sxx, .. } = *s;
        Some(MeanLine { n, mean_x, mean_y, sxx, slope, variance, df })
    }

    /// The sum of squares by which one slope is worse than a slope for each lot.
    pub fn between_slopes(&self) -> f64 {
        self.between_slopes
    }

    /// The sum of squares by which one line is worse than one slope with own intercepts.
    pub fn between_lots(&self) -> f64 {
        self.between_lots
    }

    /// The residual sum of squares of each lot about its own line.
    pub fn own_sse(&self) -> &[f64] {
        &self.own_sse
    }
}

/// Ages that differ by rounding alone count as one, and carry no slope.
fn forget_one_age(sums: &mut Sums) {
    if !sums.has_slope() {
        (sums.sxx, sums.sxy) = (0.0, 0.0);
    }
}

/// The slope behind sums; none where all ages are one.
pub fn slope_of(sums: &Sums) -> Option<f64> {
    (sums.sxx > 0.0 && sums.has_slope()).then(|| sums.sxy / sums.sxx)
}

/// Sums over all lots from the sums of each: within plus between, every part a sum about a mean.
fn total(lots: &[Sums]) -> Result<Sums, NoLine> {
    let n: usize = lots.iter().map(|s| s.n).sum();
    if n == 0 {
        return Err(NoLine::NoPoints);
    }
    let count = n as f64;
    let weighted = |value: fn(&Sums) -> f64, start: f64| {
        start + lots.iter().map(|s| s.n as f64 * (value(s) - start)).sum::<f64>() / count
    };
    let (mean_x, mean_y) = (weighted(|s| s.mean_x, lots[0].mean_x), weighted(|s| s.mean_y, lots[0].mean_y));
    let mut sum = Sums { n, mean_x, mean_y, sxx: 0.0, sxy: 0.0, syy: 0.0, largest_y: 0.0 };
    for s in lots {
        let (dx, dy, count) = (s.mean_x - mean_x, s.mean_y - mean_y, s.n as f64);
        sum.sxx += s.sxx + count * dx * dx;
        sum.sxy += s.sxy + count * dx * dy;
        sum.syy += s.syy + count * dy * dy;
        sum.largest_y = sum.largest_y.max(s.largest_y);
    }
    Ok(sum)
}

/// F of the smaller model against the larger, with the error term handed in.
fn test(difference: f64, smaller: Residuals, larger: Residuals, error: Residuals) -> Option<FTest> {
    let df1 = smaller.df.checked_sub(larger.df).filter(|&df| df > 0)?;
    let df2 = error.df;
    if df2 == 0 || larger.df == 0 {
        return None;
    }
    // Where either model has only rounding left, the floored sums decide what "nothing" is.
    let difference = match (smaller.sse == 0.0, larger.sse == 0.0) {
        (true, _) => 0.0,
        (false, true) => smaller.sse,
        _ => difference,
    };
    let mean_square = difference / df1 as f64;
    if error.sse == 0.0 {
        return Some(FTest { f: None, df1, df2, p: if difference == 0.0 { 1.0 } else { 0.0 } });
    }
    let f = mean_square / (error.sse / df2 as f64);
    let p = Fisher::new(df1 as f64, df2 as f64)?.tails(f).upper;
    f.is_finite().then_some(FTest { f: Some(f), df1, df2, p })
}
