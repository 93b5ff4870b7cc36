//! The chart of a series: every lot's results with the fitted lines, the confidence limit of the mean and the
//! prediction band of the lot that binds.

use rust_decimal::Decimal;
use rust_decimal::prelude::{FromPrimitive, ToPrimitive};

use super::About;
use crate::domain::evaluation::assess::{Assessment, CONFIDENCE};
use crate::report::chart::from_series::{self, drawn_point, id};
use crate::report::chart::{Chart, Curve, CurveKind, Series};
use crate::science::distribution::student::Student;
use crate::science::pooling::Model;
use crate::science::regression::MeanLine;
use crate::science::shelf_life::{Direction, Outcome, Side};

/// Points of each curve.
const STEPS: u32 = 48;
/// With more lots than this, only the one that binds shows its confidence limit.
const BOUNDS_AT_MOST: usize = 4;

/// The chart of a computed series.
pub fn chart(about: &About<'_>) -> Chart {
    let (found, series) = (about.found, &about.found.series);
    let plain = from_series::About::default();
    let lots = about.built.used.iter().zip(&series.lots).map(|((_, records), lot)| {
        let mut points: Vec<_> = records.iter().map(|record| drawn_point(&record.point, &plain)).collect();
        points.sort_by_key(|point| point.age_months);
        Series { label: lot.name.clone(), points }
    });
    let (end, life) = reach(found);
    Chart {
        id: id(&format!("evaluation-{}", series.test)),
        test: series.test.clone(),
        unit: series.unit.clone(),
        condition: about.group.condition_words(),
        series: lots.collect(),
        lower: series.lower_limit,
        upper: series.upper_limit,
        life_months: life.and_then(exact),
        life_words: life.map(|months| format!("supported to {months:.1}")).unwrap_or_default(),
        end_months: exact(end),
        is_group: true,
        named: found.life.binding_lot.map(|lot| series.lots[lot].name.clone()).unwrap_or_default(),
        curves: curves(found, end),
        curve_key: key(found, life),
        ..Chart::default()
    }
}

/// How far the picture reaches, and the mark of the shelf life where it lies on it.
fn reach(found: &Assessment) -> (f64, Option<f64>) {
    let ages = found.series.lots.iter().flat_map(|lot| &lot.pulls).map(|pull| pull.age_months);
    let last = ages.fold(0.0, f64::max);
    match found.life.outcome {
        Outcome::Crosses(months) if months <= 2.0 * last + 12.0 => (last.max(months), Some(months)),
        _ => (last, None),
    }
}

fn exact(value: f64) -> Option<Decimal> {
    Decimal::from_f64(value).map(|value| value.round_sf(8).unwrap_or(value))
}

/// The lots whose lines differ under the chosen model.
fn drawn_lots(found: &Assessment) -> Vec<(usize, MeanLine)> {
    let Some(pooling) = &found.pooling else { return Vec::new() };
    let lots = if pooling.model == Model::CommonLine { 1 } else { found.series.lots.len() };
    (0..lots).filter_map(|lot| Some((lot, pooling.mean_line(pooling.model, lot)?))).collect()
}

fn curves(found: &Assessment, end: f64) -> Vec<Curve> {
    let lots = drawn_lots(found);
    let binding = found.life.binding_lot.unwrap_or(0);
    let mut curves = Vec::new();
    for (lot, line) in &lots {
        curves.push(along(found, end, CurveKind::Fit, |x| Some(line.at(x))));
        if lots.len() <= BOUNDS_AT_MOST || *lot == binding {
            curves.extend(bounds(found, line, end));
        }
        if *lot == binding {
            curves.extend(band(found, line, end));
        }
    }
    curves
}

/// The confidence limit of the mean on each side that is asked about.
fn bounds(found: &Assessment, line: &MeanLine, end: f64) -> Vec<Curve> {
    let specification = &found.specification;
    let both = specification.direction == Direction::Either;
    let tail = if both { 0.5 } else { 1.0 } * (1.0 - CONFIDENCE);
    let t = Student::new(line.df as f64).and_then(|student| student.upper_quantile(tail));
    let Some(t) = t.filter(|_| specification.lower.is_some() || specification.upper.is_some()) else {
        return Vec::new();
    };
    let sides: &[Side] = match specification.direction {
        Direction::Decreasing => &[Side::Lower],
        Direction::Increasing => &[Side::Upper],
        Direction::Either => &[Side::Lower, Side::Upper],
    };
    let half = |x: f64| t * (line.variance * line.leverage(x)).sqrt();
    let curve = |side: &Side| {
        let sign = if *side == Side::Lower { -1.0 } else { 1.0 };
        along(found, end, CurveKind::Bound, |x| Some(line.at(x) + sign * half(x)))
    };
    sides.iter().map(curve).collect()
}

/// The two-sided 95 % prediction band for one more result.
fn band(found: &Assessment, line: &MeanLine, end: f64) -> Option<Curve> {
    let t = Student::new(line.df as f64)?.upper_quantile(0.5 * (1.0 - CONFIDENCE))?;
    let half = |x: f64| t * (line.variance * (1.0 + line.leverage(x))).sqrt();
    let mut upper = along(found, end, CurveKind::Band, |x| Some(line.at(x) + half(x)));
    let lower = along(found, end, CurveKind::Band, |x| Some(line.at(x) - half(x)));
    upper.points.extend(lower.points.into_iter().rev());
    Some(upper)
}

fn along(found: &Assessment, end: f64, kind: CurveKind, value: impl Fn(f64) -> Option<f64>) -> Curve {
    let at = |step: u32| {
        let x = end * f64::from(step) / f64::from(STEPS);
        let y = found.series.scale.back(value(x)? + found.origin);
        Some((exact(x)?, exact(y)?))
    };
    Curve { kind, points: (0..=STEPS).filter_map(at).collect() }
}

fn key(found: &Assessment, life: Option<f64>) -> String {
    let lots = drawn_lots(found);
    if lots.is_empty() {
        return String::new();
    }
    let mut parts = vec!["solid line: fitted mean".to_string()];
    if found.life.outcome != Outcome::NoLimit {
        let sided = if found.specification.direction == Direction::Either { "two" } else { "one" };
        parts.push(format!("dashed: {sided}-sided 95 % confidence limit of the mean"));
    }
    let name = &found.series.lots[found.life.binding_lot.unwrap_or(0)].name;
    let whose = if lots.len() > 1 { format!(" of lot {name}") } else { String::new() };
    parts.push(format!("shaded: 95 % prediction band for one more result{whose}"));
    match (life, found.life.outcome.months()) {
        (Some(_), _) => parts.push("dotted upright: how far the data support".to_string()),
        (None, Some(months)) if months > 0.0 => {
            parts.push(format!(
                "the shelf life, {} months, lies beyond the picture",
                months.to_u64().unwrap_or(0)
            ));
        }
        _ => {}
    }
    parts.join(" · ")
}
