//! The earliest age at which the confidence limit of the mean meets a limit.
//!
//! Source: ICH Q1E (2003), appendix B.1: one-sided 95 % limit where the attribute is known to fall or to
//! rise, two-sided 95 % limits where it may do either. The limit is of the mean line, pointwise.

use super::distribution::student::Student;
use super::pooling::{Model, Pooling};
use super::regression::MeanLine;

/// Which limit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// The lower limit.
    Lower,
    /// The upper limit.
    Upper,
}

/// How the attribute may change.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Direction {
    /// Known to fall: one-sided against the lower limit.
    Decreasing,
    /// Known to rise: one-sided against the upper limit.
    Increasing,
    /// Unknown or either: two-sided against both limits.
    Either,
}

/// Limits on the analysis scale.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Specification {
    /// Lower limit, if there is one.
    pub lower: Option<f64>,
    /// Upper limit, if there is one.
    pub upper: Option<f64>,
    /// How the attribute may change.
    pub direction: Direction,
}

/// What was found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Outcome {
    /// The confidence limit meets the limit at this age.
    Crosses(f64),
    /// It never does.
    NoCrossing,
    /// It lies outside already at age 0.
    FailsAtZero,
    /// Slope or variance cannot be estimated.
    NotEstimable,
    /// There is no limit on the side in question.
    NoLimit,
}

impl Outcome {
    /// The word that files and frozen conclusions carry.
    pub fn code(self) -> &'static str {
        match self {
            Self::Crosses(_) => "crosses",
            Self::NoCrossing => "no_crossing",
            Self::FailsAtZero => "fails_at_zero",
            Self::NotEstimable => "not_estimable",
            Self::NoLimit => "no_limit",
        }
    }

    /// The age as a number: 0 where it fails at zero; none where there is no age to name.
    pub fn months(self) -> Option<f64> {
        match self {
            Self::Crosses(months) => Some(months),
            Self::FailsAtZero => Some(0.0),
            _ => None,
        }
    }

    fn order(self) -> f64 {
        self.months().unwrap_or(f64::INFINITY)
    }
}

/// The shelf life of one lot under a model.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LotLife {
    /// What was found, the earlier of two sides.
    pub outcome: Outcome,
    /// The side that binds.
    pub side: Option<Side>,
    /// The t quantile used.
    pub t: Option<f64>,
    /// Its degrees of freedom.
    pub df: usize,
    /// Where the mean line itself crosses the binding limit, if at or after age 0.
    pub mean_line_crossing: Option<f64>,
}

/// The shelf life of a group of lots: the shortest of its lots.
#[derive(Clone, Debug, PartialEq)]
pub struct ShelfLife {
    /// The overall outcome.
    pub outcome: Outcome,
    /// Whole months, rounded down.
    pub months_floor: Option<u64>,
    /// The side that binds.
    pub side: Option<Side>,
    /// The lot that binds; none for a common line, where all do.
    pub binding_lot: Option<usize>,
    /// Each lot, in the order given.
    pub per_lot: Vec<LotLife>,
    /// True if some, but not all, lots cannot be estimated: the figure then comes from the others.
    pub partial: bool,
}

/// Where one line's confidence limit meets one limit, in closed form. `t` is the Student quantile.
///
/// The margin g(x) = c + βd − √(K(1/n + d²/Sxx)), d = x − x̄, is concave, so it is positive on one interval
/// whose far end is the answer: the larger root of the squared equation on the branch c + βd ≥ 0.
pub fn crossing(line: &MeanLine, limit: f64, side: Side, t: f64) -> Outcome {
    meets(line, limit, side, t, 1.0 / line.n as f64)
}

/// Where the prediction limit for one future result meets a limit: the bound for one container, where the
/// limit holds for each. The margin carries the variance of the result itself, 1 + 1/n in place of 1/n.
pub fn prediction_crossing(line: &MeanLine, limit: f64, side: Side, t: f64) -> Outcome {
    meets(line, limit, side, t, 1.0 + 1.0 / line.n as f64)
}

/// The shared form: g(x) = c + βd − √(K(`at_centre` + d²/Sxx)).
fn meets(line: &MeanLine, limit: f64, side: Side, t: f64, at_centre: f64) -> Outcome {
    let sign = if side == Side::Lower { 1.0 } else { -1.0 };
    let (c, beta, k) = (sign * (line.mean_y - limit), sign * line.slope, t * t * line.variance);
    let margin = |d: f64| c + beta * d - (k * (at_centre + d * d / line.sxx)).sqrt();
    if margin(-line.mean_x) < 0.0 {
        return Outcome::FailsAtZero;
    }
    if beta - (k / line.sxx).sqrt() >= 0.0 {
        return Outcome::NoCrossing;
    }
    let (a, b, end) = (beta * beta - k / line.sxx, beta * c, c * c - k * at_centre);
    let discriminant = k * (c * c / line.sxx + at_centre * (beta * beta - k / line.sxx));
    let d = if a == 0.0 { -end / (2.0 * b) } else { far_root([a, b, end], c, beta, discriminant) };
    let age = line.mean_x + d;
    if age.is_finite() { Outcome::Crosses(age.max(0.0)) } else { Outcome::NoCrossing }
}

/// The larger root of a d² + 2 b d + e = 0 with c + βd ≥ 0, by the stable pair q/a and e/q.
fn far_root([a, b, e]: [f64; 3], c: f64, beta: f64, discriminant: f64) -> f64 {
    let q = -(b + discriminant.max(0.0).sqrt().copysign(b));
    let kept = |d: f64| c + beta * d >= -1e-9 * (c.abs() + (beta * d).abs());
    let roots = [q / a, if q == 0.0 { q / a } else { e / q }];
    roots.into_iter().filter(|&d| d.is_finite() && kept(d)).fold(f64::NEG_INFINITY, f64::max)
}

/// Shelf life of every lot and of the group under a model. `confidence` is a share, 0.95 in Q1E.
pub fn of_model(
    pooling: &Pooling,
    model: Model,
    specification: &Specification,
    confidence: f64,
) -> ShelfLife {
    let lots = pooling.lots.len();
    if model == Model::CommonLine {
        let one = lot_life(pooling.mean_line(model, 0), specification, confidence, &mut None);
        return gather(vec![one; lots], true);
    }
    let mut kept = None;
    let life = |lot| lot_life(pooling.mean_line(model, lot), specification, confidence, &mut kept);
    gather((0..lots).map(life).collect(), false)
}

/// Shelf life of every lot by itself, with its own residual variance: not Q1E, shown beside it.
pub fn of_own_lines(pooling: &Pooling, specification: &Specification, confidence: f64) -> ShelfLife {
    let life = |lot| lot_life(pooling.own_line(lot), specification, confidence, &mut None);
    gather((0..pooling.lots.len()).map(life).collect(), false)
}

/// One lot; the t quantile is kept between lots of one model, whose degrees of freedom are equal.
fn lot_life(
    line: Option<MeanLine>,
    specification: &Specification,
    confidence: f64,
    kept: &mut Option<(usize, f64)>,
) -> LotLife {
    let without = |outcome, df| LotLife { outcome, side: None, t: None, df, mean_line_crossing: None };
    let limits = limits_used(specification);
    if limits.iter().all(Option::is_none) {
        return without(Outcome::NoLimit, line.map_or(0, |line| line.df));
    }
    let Some(line) = line else { return without(Outcome::NotEstimable, 0) };
    let tail = if specification.direction == Direction::Either {
        0.5 * (1.0 - confidence)
    } else {
        1.0 - confidence
    };
    let t = match kept {
        Some((df, t)) if *df == line.df => Some(*t),
        _ => Student::new(line.df as f64).and_then(|student| student.upper_quantile(tail)),
    };
    let Some(t) = t else { return without(Outcome::NotEstimable, line.df) };
    *kept = Some((line.df, t));
    let mut best: Option<(Outcome, Side, f64)> = None;
    for (side, limit) in limits.into_iter().flatten() {
        let found = crossing(&line, limit, side, t);
        if best.is_none_or(|(outcome, ..)| found.order() < outcome.order()) {
            best = Some((found, side, limit));
        }
    }
    let Some((outcome, side, limit)) = best else { return without(Outcome::NoLimit, line.df) };
    let mean = line.mean_x + (limit - line.mean_y) / line.slope;
    let mean_line_crossing = (line.slope != 0.0 && mean.is_finite() && mean >= 0.0).then_some(mean);
    LotLife { outcome, side: Some(side), t: Some(t), df: line.df, mean_line_crossing }
}

/// The limits that the direction asks about.
fn limits_used(specification: &Specification) -> [Option<(Side, f64)>; 2] {
    let lower = specification.lower.filter(|limit| limit.is_finite()).map(|limit| (Side::Lower, limit));
    let upper = specification.upper.filter(|limit| limit.is_finite()).map(|limit| (Side::Upper, limit));
    match specification.direction {
        Direction::Decreasing => [lower, None],
        Direction::Increasing => [None, upper],
        Direction::Either => [lower, upper],
    }
}

fn gather(per_lot: Vec<LotLife>, common_line: bool) -> ShelfLife {
    let missing = per_lot.iter().filter(|life| life.outcome == Outcome::NotEstimable).count();
    let mut best: Option<usize> = None;
    for (lot, life) in per_lot.iter().enumerate() {
        let earlier = |other: usize| life.outcome.order() < per_lot[other].outcome.order();
        if life.outcome.months().is_some() && best.is_none_or(earlier) {
            best = Some(lot);
        }
    }
    let outcome = match best {
        Some(lot) => per_lot[lot].outcome,
        None if missing == per_lot.len() => Outcome::NotEstimable,
        None if per_lot.iter().any(|life| life.outcome == Outcome::NoLimit) => Outcome::NoLimit,
        None => Outcome::NoCrossing,
    };
    ShelfLife {
        outcome,
        // A root that is a whole month but for rounding is that month.
        months_floor: outcome.months().map(|months| (months + 1e-9).floor() as u64),
        side: best.and_then(|lot| per_lot[lot].side),
        binding_lot: best.filter(|_| !common_line),
        partial: missing > 0 && missing < per_lot.len(),
        per_lot,
    }
}
