//! The straight line through a series' own points, for the eye alone: no shelf life is read from it.

use rust_decimal::Decimal;
use rust_decimal::prelude::{FromPrimitive, ToPrimitive};

use super::Series;
use crate::science::regression::{self, Line};

/// Fewer ages than this say nothing about a direction.
const LEAST_AGES: usize = 3;

/// Age in months and value at both ends of the least-squares line, from the first age to the last.
///
/// Values that are only bounds or were set aside do not count. `None` with fewer than three ages.
pub fn ends(series: &Series) -> Option<[(Decimal, Decimal); 2]> {
    let joined = || series.points.iter().filter(|point| point.is_joined());
    let mut ages: Vec<Decimal> = joined().map(|point| point.age_months).collect();
    ages.sort();
    ages.dedup();
    let (first, last) = (*ages.first()?, *ages.last()?);
    if ages.len() < LEAST_AGES {
        return None;
    }
    let points: Option<Vec<regression::Point>> = joined()
        .map(|point| Some(regression::Point { x: point.age_months.to_f64()?, y: point.value?.to_f64()? }))
        .collect();
    let line = Line::fit(&points?).ok()?;
    let at = |age: Decimal| Some((age, Decimal::from_f64(line.at(age.to_f64()?))?));
    Some([at(first)?, at(last)?])
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::chart::{Bound, Point};

    fn series(points: &[(i64, i64)]) -> Series {
        let point = |(months, value): &(i64, i64)| Point {
            age_months: Decimal::from(*months),
            value: Some(Decimal::from(*value)),
            ..Point::default()
        };
        Series { label: String::new(), points: points.iter().map(point).collect() }
    }

    #[test]
    fn the_line_runs_from_the_first_age_to_the_last_and_needs_three() {
        assert_eq!(ends(&series(&[(0, 100), (3, 99)])), None);
        assert_eq!(ends(&series(&[(0, 100), (3, 99), (3, 98)])), None);
        let exact = ends(&series(&[(0, 100), (3, 99), (12, 96)]));
        let d = |value: i64| Decimal::from(value);
        assert_eq!(exact, Some([(d(0), d(100)), (d(12), d(96))]));
        let mut bound = series(&[(0, 100), (3, 99), (12, 96)]);
        bound.points[2].bound = Bound::Below;
        assert_eq!(ends(&bound), None, "a bound is no point of the line");
    }
}
