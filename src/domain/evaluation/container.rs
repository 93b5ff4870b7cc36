//! Where the limit holds for each container and not for the mean: how long one container stays inside.

use super::assess::{Assessment, CONFIDENCE};
use crate::science::distribution::student::Student;
use crate::science::pooling::Model;
use crate::science::regression::MeanLine;
use crate::science::shelf_life::{Direction, Outcome, Side, prediction_crossing};
use crate::science::tolerance::{self, Aim};

/// The two bounds for single containers; the earliest over lots and sides.
#[derive(Clone, Debug, PartialEq)]
pub struct ContainerBounds {
    /// One future result stays inside with 95 % confidence (A.7).
    pub prediction: Outcome,
    /// 95 % of all containers stay inside, with 95 % confidence (A.8).
    pub tolerance: Outcome,
    /// The lot that binds the prediction bound; none for one line.
    pub lot: Option<usize>,
}

/// Ages beyond this many months are not searched for a tolerance bound.
const SEARCHED_MONTHS: f64 = 240.0;

/// Both bounds under the chosen model; `None` without a model, a limit or degrees of freedom.
pub fn of(found: &Assessment) -> Option<ContainerBounds> {
    let pooling = found.pooling.as_ref()?;
    let mut best: Option<ContainerBounds> = None;
    for lot in 0..found.series.lots.len() {
        let Some(line) = pooling.mean_line(pooling.model, lot) else { continue };
        for (side, limit) in sides(found) {
            let tail = if both_sides(found) { 0.5 } else { 1.0 } * (1.0 - CONFIDENCE);
            let t = Student::new(line.df as f64).and_then(|student| student.upper_quantile(tail))?;
            let prediction = prediction_crossing(&line, limit, side, t);
            let tolerance = tolerance_crossing(&line, limit, side);
            let earlier = |known: &ContainerBounds| order(prediction) < order(known.prediction);
            let lot = (pooling.model != Model::CommonLine).then_some(lot);
            match &mut best {
                None => best = Some(ContainerBounds { prediction, tolerance, lot }),
                Some(known) => {
                    if order(tolerance) < order(known.tolerance) {
                        known.tolerance = tolerance;
                    }
                    if earlier(known) {
                        (known.prediction, known.lot) = (prediction, lot);
                    }
                }
            }
        }
    }
    best
}

fn order(outcome: Outcome) -> f64 {
    outcome.months().unwrap_or(f64::INFINITY)
}

fn both_sides(found: &Assessment) -> bool {
    found.specification.direction == Direction::Either
}

fn sides(found: &Assessment) -> Vec<(Side, f64)> {
    let specification = &found.specification;
    let lower = specification.lower.map(|limit| (Side::Lower, limit));
    let upper = specification.upper.map(|limit| (Side::Upper, limit));
    match specification.direction {
        Direction::Decreasing => lower.into_iter().collect(),
        Direction::Increasing => upper.into_iter().collect(),
        Direction::Either => lower.into_iter().chain(upper).collect(),
    }
}

/// Where the one-sided tolerance limit first meets the limit, to 1e-6 months: a search by steps, then halving.
fn tolerance_crossing(line: &MeanLine, limit: f64, side: Side) -> Outcome {
    let sign = if side == Side::Lower { 1.0 } else { -1.0 };
    let margin = |x: f64| {
        let k = tolerance::one_sided(&Aim::of_line(0.95, CONFIDENCE, line, x))?;
        Some(sign * (line.at(x) - limit) - k * line.variance.sqrt())
    };
    match margin(0.0) {
        None => return Outcome::NotEstimable,
        Some(at_zero) if at_zero < 0.0 => return Outcome::FailsAtZero,
        Some(_) => {}
    }
    let (mut inside, mut outside) = (0.0, f64::NAN);
    while inside < SEARCHED_MONTHS {
        match margin(inside + 3.0) {
            Some(value) if value >= 0.0 => inside += 3.0,
            Some(_) => {
                outside = inside + 3.0;
                break;
            }
            None => return Outcome::NotEstimable,
        }
    }
    if outside.is_nan() {
        return Outcome::NoCrossing;
    }
    while outside - inside > 1e-6 {
        let middle = 0.5 * (inside + outside);
        if margin(middle).is_some_and(|value| value >= 0.0) { inside = middle } else { outside = middle }
    }
    Outcome::Crosses(inside)
}
