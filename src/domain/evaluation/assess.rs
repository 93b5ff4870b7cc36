//! A series computed: lines, pooling, shelf life, trend, and notes on everything a reader should know.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::bounds::Bounds;
use super::series::{Pull, Series};
use super::table::Qualifier;
use super::trend::{self, TrendRow};
use super::{Choices, Complaint, Replicates, notes};
use crate::science::pooling::Pooling;
use crate::science::regression::{Line, Point};
use crate::science::shelf_life::{self, Outcome, ShelfLife, Specification};
use crate::science::transform::{OffScale, Scale};

/// The share of the confidence limit in a shelf life.
pub const CONFIDENCE: f64 = 0.95;

/// A computed series.
#[derive(Clone, Debug)]
pub struct Assessment {
    /// The series.
    pub series: Series,
    /// What is added to a value of `points` to reach the analysis scale.
    pub origin: f64,
    /// The points of the lines, per lot, counted from the origin.
    pub points: Vec<Vec<Point>>,
    /// Each lot by itself; none where it has one age or no exact value.
    pub lines: Vec<Option<Line>>,
    /// The models; none where no line may be drawn.
    pub pooling: Option<Pooling>,
    /// Limits on the analysis scale, counted from the origin.
    pub specification: Specification,
    /// The shelf life.
    pub life: ShelfLife,
    /// Every result of every lot against its trend.
    pub trend: Vec<TrendRow>,
    /// What else to know.
    pub notes: Vec<String>,
}

/// Computes one series. Complains where a value or a limit is off the scale.
pub fn assess(series: &Series, choices: &Choices) -> Result<Assessment, Vec<Complaint>> {
    let found = assess_life(series, choices)?;
    let on_scale = OnScale::of(series)?;
    let (means, bounds) = (on_scale.points(Replicates::Mean), Bounds::of(series));
    let trend = trend::judge_all(&means, found.origin, series.scale, &found.specification, &bounds, choices);
    Ok(Assessment { trend, ..found })
}

/// Lines, pooling and shelf life alone: the trend of each result is left empty. The same numbers as [`assess`].
pub fn assess_life(series: &Series, choices: &Choices) -> Result<Assessment, Vec<Complaint>> {
    let on_scale = OnScale::of(series)?;
    let bounds = Bounds::of(series);
    let mut said = notes::first(series, choices);
    let points = on_scale.points(choices.replicates);
    let specification = on_scale.specification()?;
    let lines: Vec<Option<Line>> = points.iter().map(|lot| Line::fit(lot).ok()).collect();
    let drawn = !bounds.forbid_a_line();
    let slices: Vec<&[Point]> = points.iter().map(Vec::as_slice).collect();
    let pooling = if drawn { Pooling::of(&slices, choices.alpha).ok() } else { None };
    let life = match &pooling {
        Some(pooling) => shelf_life::of_model(pooling, pooling.model, &specification, CONFIDENCE),
        None => nothing_estimable(points.len()),
    };
    bounds.note(series, &mut said);
    if let Some(pooling) = &pooling {
        notes::of_model(series, pooling, &life, &mut said);
        notes::of_data(series, &slices, pooling, &mut said);
    }
    Ok(Assessment {
        origin: on_scale.origin_value(),
        series: series.clone(),
        points,
        lines,
        pooling,
        specification,
        life,
        trend: Vec::new(),
        notes: said,
    })
}

fn nothing_estimable(lots: usize) -> ShelfLife {
    let life = shelf_life::LotLife {
        outcome: Outcome::NotEstimable,
        side: None,
        t: None,
        df: 0,
        mean_line_crossing: None,
    };
    ShelfLife {
        outcome: Outcome::NotEstimable,
        months_floor: None,
        side: None,
        binding_lot: None,
        per_lot: vec![life; lots],
        partial: false,
    }
}

/// The values of a series on its analysis scale, counted from an exact origin where the scale is linear, so
/// that a common level costs no digits.
struct OnScale<'a> {
    series: &'a Series,
    origin: Decimal,
    half_stands_in: bool,
}

impl<'a> OnScale<'a> {
    fn of(series: &'a Series) -> Result<Self, Vec<Complaint>> {
        let first = series.lots.iter().flat_map(|lot| &lot.pulls).flat_map(|pull| &pull.results).next();
        let linear = series.scale == Scale::None;
        let origin = first.filter(|_| linear).map_or(Decimal::ZERO, |result| result.value);
        let scaled = Self { series, origin, half_stands_in: !Bounds::of(series).forbid_a_line() };
        let results = series.lots.iter().flat_map(|lot| &lot.pulls).flat_map(|pull| &pull.results);
        let complaints: Vec<Complaint> = results
            .filter_map(|result| {
                let off = scaled.number(result.value).err()?;
                let sentence = format!("the value {} of {}: {off}", result.value, series.test);
                Some(Complaint::at(result.line, sentence))
            })
            .collect();
        if complaints.is_empty() { Ok(scaled) } else { Err(complaints) }
    }

    fn origin_value(&self) -> f64 {
        self.origin.to_f64().unwrap_or(0.0)
    }

    fn number(&self, value: Decimal) -> Result<f64, OffScale> {
        let counted = value.checked_sub(self.origin).and_then(|value| value.to_f64());
        self.series.scale.forward(counted.ok_or(OffScale::NotFinite)?)
    }

    fn points(&self, replicates: Replicates) -> Vec<Vec<Point>> {
        let lot = |pulls: &Vec<Pull>| pulls.iter().flat_map(|pull| self.pull(pull, replicates)).collect();
        self.series.lots.iter().map(|one| lot(&one.pulls)).collect()
    }

    /// One point per pull, or one per result. Bounds take no part, unless half of them may stand in.
    fn pull(&self, pull: &Pull, replicates: Replicates) -> Vec<Point> {
        let usable = |result: &super::series::Measured| match result.qualifier {
            Qualifier::Exact => Some(result.value),
            Qualifier::Below if self.half_stands_in => Some(result.value / Decimal::TWO),
            _ => None,
        };
        let values: Vec<Decimal> = pull.results.iter().filter_map(usable).collect();
        let point = |y: f64| Point { x: pull.age_months, y };
        match replicates {
            Replicates::Independent => {
                values.iter().filter_map(|value| self.number(*value).ok()).map(point).collect()
            }
            Replicates::Mean => self.mean(&values).map(point).into_iter().collect(),
        }
    }

    /// The mean of a pull, summed exactly, then taken to the scale.
    fn mean(&self, values: &[Decimal]) -> Option<f64> {
        let sum = values.iter().try_fold(Decimal::ZERO, |sum, value| {
            value.checked_sub(self.origin).and_then(|counted| sum.checked_add(counted))
        })?;
        if values.is_empty() {
            return None;
        }
        self.series.scale.forward(sum.to_f64()? / values.len() as f64).ok()
    }

    fn specification(&self) -> Result<Specification, Vec<Complaint>> {
        let limit = |limit: Option<Decimal>, name: &str| match limit.map(|limit| self.number(limit)) {
            None => Ok(None),
            Some(Ok(number)) => Ok(Some(number)),
            Some(Err(off)) => {
                let sentence = format!("the {name} limit of {}: {off}", self.series.test);
                Err(vec![Complaint::at(self.series.line, sentence)])
            }
        };
        Ok(Specification {
            lower: limit(self.series.lower_limit, "lower")?,
            upper: limit(self.series.upper_limit, "upper")?,
            direction: self.series.direction.unwrap_or(shelf_life::Direction::Either),
        })
    }
}
