//! Every result of every lot against all other lots and the lot's own earlier results.

use super::Choices;
use super::bounds::Bounds;
use crate::science::interval::Limits;
use crate::science::regression::Point;
use crate::science::shelf_life::Specification;
use crate::science::transform::Scale;
use crate::science::trend::context::{self, RULES, Rule};
use crate::science::trend::early_warning::{self, Warning};
use crate::science::trend::lot_trend::{self, LotTrend};
use crate::science::trend::single_result::{self, Judgement, Rule as ResultRule, forecast};
use crate::science::trend::{Levels, Needs};

/// A judged result: verdict, and the limits (original scale) outside which it would be an alert.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Judged {
    /// The judgement.
    pub judgement: Judgement,
    /// Alert limits.
    pub limits: Limits,
}

/// One result of one lot.
#[derive(Clone, Debug)]
pub struct TrendRow {
    /// Index of the lot.
    pub lot: usize,
    /// Age in months.
    pub age_months: f64,
    /// The value (mean of the pull) on the original scale.
    pub value: f64,
    /// The rule that was or would have been used.
    pub rule: ResultRule,
    /// The verdict on the result, or what it needs.
    pub result: Result<Judged, Needs>,
    /// The verdict on the lot's trend up to this result, or what it needs.
    pub lot_trend: Result<LotTrend, Needs>,
    /// The early warning, where an expiry and a limit are known and the data allow one.
    pub warning: Option<Warning>,
    /// The published rules.
    pub context: Vec<(Rule, Result<f64, Needs>)>,
}

/// Judges all results; `lots` are pull means counted from `origin` on the analysis scale, by age.
pub(super) fn judge_all(
    lots: &[Vec<Point>],
    origin: f64,
    scale: Scale,
    specification: &Specification,
    bounds: &Bounds,
    choices: &Choices,
) -> Vec<TrendRow> {
    let mut rows = Vec::new();
    for (lot, points) in lots.iter().enumerate() {
        let others = lots.iter().enumerate().filter(|(other, points)| *other != lot && !points.is_empty());
        let history: Vec<&[Point]> = others.map(|(_, points)| points.as_slice()).collect();
        let case = Case { lot, history: &history, origin, scale, specification, choices };
        for index in 0..points.len() {
            let row = case.judge(&points[..index], points[index]);
            rows.push(if bounds.any() { row.without_verdict() } else { row });
        }
    }
    rows
}

/// What all results of a lot are judged against.
struct Case<'a> {
    lot: usize,
    history: &'a [&'a [Point]],
    origin: f64,
    scale: Scale,
    specification: &'a Specification,
    choices: &'a Choices,
}

impl Case<'_> {
    fn judge(&self, earlier: &[Point], new: Point) -> TrendRow {
        let levels = Levels::default();
        let mut so_far = earlier.to_vec();
        so_far.push(new);
        let context =
            RULES.map(|rule| (rule, context::test(rule, self.history, earlier, new).map(|test| test.p)));
        TrendRow {
            lot: self.lot,
            age_months: new.x,
            value: self.back(new.y),
            rule: if self.history.len() < 2 { ResultRule::A } else { ResultRule::H },
            result: forecast(self.history, earlier, new.x).and_then(|found| self.result(&found, new, levels)),
            lot_trend: lot_trend::judge(self.history, &so_far, levels),
            warning: self.warning(&so_far),
            context: context.to_vec(),
        }
    }

    fn result(&self, found: &single_result::Forecast, new: Point, levels: Levels) -> Result<Judged, Needs> {
        let judgement = found.judge(new.y, levels)?;
        let limits = found.limits(levels.alert).ok_or(Needs::FiniteNumbers)?;
        let Limits { lower, centre, upper } = limits;
        let limits = Limits { lower: self.back(lower), centre: self.back(centre), upper: self.back(upper) };
        Ok(Judged { judgement, limits })
    }

    fn warning(&self, so_far: &[Point]) -> Option<Warning> {
        let Specification { lower, upper, .. } = *self.specification;
        let expiry = self.choices.expiry_months?;
        (lower.is_some() || upper.is_some()).then_some(())?;
        let outlook = early_warning::outlook(self.history, so_far, expiry).ok()?;
        Some(outlook.warning(lower, upper))
    }

    fn back(&self, z: f64) -> f64 {
        self.scale.back(z + self.origin)
    }
}

impl TrendRow {
    /// Where some values are only bounds, nothing is judged: an exact value between them is a chosen one.
    fn without_verdict(self) -> Self {
        let context = self.context.into_iter().map(|(rule, _)| (rule, Err(Needs::ExactValues))).collect();
        Self {
            result: Err(Needs::ExactValues),
            lot_trend: Err(Needs::ExactValues),
            warning: None,
            context,
            ..self
        }
    }
}
