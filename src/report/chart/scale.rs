//! Scales of a chart: exact decimals to picture units, with round steps.

use rust_decimal::Decimal;

use super::Chart;

/// Days and hours of a month as ages count them (30.4375 days).
const DAYS: (i64, u32) = (304_375, 4);
const HOURS: (i64, u32) = (7_305, 1);

/// One axis: from the least to the most value over so many picture units.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Axis {
    pub least: Decimal,
    pub most: Decimal,
    pub step: Decimal,
    /// Picture position of the least value, and of the most.
    pub from: i64,
    pub to: i64,
}

impl Axis {
    /// The picture position of a value, to a tenth of a unit. Beyond the axis it stays at its end.
    pub fn at(&self, value: Decimal) -> Decimal {
        let span = self.most.saturating_sub(self.least);
        let share = value.saturating_sub(self.least).checked_div(span).unwrap_or_default();
        let share = share.clamp(Decimal::ZERO, Decimal::ONE);
        (Decimal::from(self.from) + share * Decimal::from(self.to - self.from)).round_dp(1)
    }

    /// The values that carry a mark on the axis.
    pub fn ticks(&self) -> Vec<Decimal> {
        let mut ticks = Vec::new();
        let mut at = self.least;
        while at <= self.most && ticks.len() < 20 {
            ticks.push(at.normalize());
            let Some(next) = at.checked_add(self.step) else { break };
            at = next;
        }
        ticks
    }
}

/// The value axis: the limits with room around them, widened only where a value lies outside that.
///
/// The same test with the same limits keeps its axis over all pulls and lots (screen_U115).
pub fn values(chart: &Chart, from: i64, to: i64) -> Axis {
    let (least, most) = around_limits(chart.lower, chart.upper);
    let drawn = chart.valued().flat_map(|(_, point)| {
        let forecast = point.forecast.into_iter().flat_map(|(lower, upper)| [lower, upper]);
        point.value.into_iter().chain(point.replicates.iter().copied()).chain(forecast)
    });
    let (least, most) = drawn.fold((least, most), |(least, most), value| {
        (
            Some(least.map_or(value, |known| known.min(value))),
            Some(most.map_or(value, |known| known.max(value))),
        )
    });
    let (least, most) = (least.unwrap_or_default(), most.unwrap_or(Decimal::ONE));
    let (least, most) = if least == most { apart(least) } else { (least, most) };
    let step = round_step(most.saturating_sub(least), 5);
    Axis { least: down(least, step), most: up(most, step), step, from, to }
}

fn around_limits(lower: Option<Decimal>, upper: Option<Decimal>) -> (Option<Decimal>, Option<Decimal>) {
    let share = |value: Decimal, hundredths: i64| value.checked_mul(Decimal::new(hundredths, 2));
    match (lower, upper) {
        (Some(lower), Some(upper)) => {
            let room = share(upper.saturating_sub(lower), 20).unwrap_or_default();
            (Some(lower.saturating_sub(room)), Some(upper.saturating_add(room)))
        }
        (None, Some(upper)) => {
            let room = share(upper.abs(), 20).unwrap_or_default();
            (Some(upper.min(Decimal::ZERO)), Some(upper.saturating_add(room)))
        }
        (Some(lower), None) => {
            let room = share(lower.abs(), 20).unwrap_or_default();
            (Some(lower.saturating_sub(room)), Some(lower.saturating_add(room)))
        }
        (None, None) => (None, None),
    }
}

/// Room around values that are all the same.
fn apart(value: Decimal) -> (Decimal, Decimal) {
    let room = value.abs().checked_div(Decimal::TEN).filter(|room| !room.is_zero()).unwrap_or(Decimal::ONE);
    (value.saturating_sub(room), value.saturating_add(room))
}

/// The smallest of 1, 2 or 5 times a power of ten that needs at most so many steps for the span.
pub fn round_step(span: Decimal, most_steps: i64) -> Decimal {
    let wanted = span.checked_div(Decimal::from(most_steps)).unwrap_or(Decimal::ONE);
    let mut power = Decimal::new(1, 12);
    let limit = Decimal::from(10_i64.pow(15));
    while power < limit {
        for factor in [1, 2, 5] {
            let step = power * Decimal::from(factor);
            if step >= wanted {
                return step.normalize();
            }
        }
        power *= Decimal::TEN;
    }
    wanted
}

fn down(value: Decimal, step: Decimal) -> Decimal {
    value.checked_div(step).and_then(|steps| steps.floor().checked_mul(step)).unwrap_or(value)
}

fn up(value: Decimal, step: Decimal) -> Decimal {
    value.checked_div(step).and_then(|steps| steps.ceil().checked_mul(step)).unwrap_or(value)
}

/// In which unit ages are written along the chart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TimeUnit {
    Months,
    Days,
    Hours,
}

impl TimeUnit {
    /// Hours up to three days, days up to two months, months beyond.
    pub fn for_months(most: Decimal) -> TimeUnit {
        if most <= Decimal::new(1, 1) {
            TimeUnit::Hours
        } else if most <= Decimal::TWO {
            TimeUnit::Days
        } else {
            TimeUnit::Months
        }
    }

    pub fn words(self) -> &'static str {
        match self {
            TimeUnit::Months => "months",
            TimeUnit::Days => "days",
            TimeUnit::Hours => "hours",
        }
    }

    /// An age in months as a number of this unit.
    pub fn of_months(self, months: Decimal) -> Decimal {
        let factor = match self {
            TimeUnit::Months => return months,
            TimeUnit::Days => Decimal::new(DAYS.0, DAYS.1),
            TimeUnit::Hours => Decimal::new(HOURS.0, HOURS.1),
        };
        months.checked_mul(factor).unwrap_or(months)
    }

    fn steps(self) -> &'static [i64] {
        match self {
            TimeUnit::Months => &[1, 3, 6, 12, 24, 60],
            TimeUnit::Days => &[1, 2, 7, 14, 28],
            TimeUnit::Hours => &[1, 2, 4, 6, 12, 24],
        }
    }
}

/// The time axis from zero to the last age or the shelf life, whichever is later. Real time, never ranks.
pub fn time(chart: &Chart, from: i64, to: i64) -> (Axis, TimeUnit) {
    let ages = chart.series.iter().flat_map(|series| &series.points).map(|point| point.age_months);
    let last = ages.chain(chart.life_months).chain(chart.end_months).max().unwrap_or(Decimal::ONE);
    let unit = TimeUnit::for_months(last);
    let most = unit.of_months(last).max(Decimal::ONE);
    let fits = |step: &&i64| most / Decimal::from(**step) <= Decimal::from(6);
    let step = unit.steps().iter().find(fits).copied().map(Decimal::from);
    let step = step.unwrap_or_else(|| round_step(most, 6));
    // A pull taken a few days after its due date does not open another step.
    let slack = step * Decimal::new(15, 2);
    let whole = down(most, step);
    let end = if most - whole <= slack && whole > Decimal::ZERO { most } else { up(most, step) };
    (Axis { least: Decimal::ZERO, most: end, step, from, to }, unit)
}

#[cfg(test)]
mod tests {
    use super::super::{Point, Series};
    use super::*;

    fn dec(text: &str) -> Decimal {
        Decimal::from_str_exact(text).unwrap()
    }

    fn chart(values: &[&str], lower: Option<&str>, upper: Option<&str>) -> Chart {
        let points = values
            .iter()
            .enumerate()
            .map(|(place, value)| Point {
                age_months: Decimal::from(place as i64 * 3),
                value: Some(dec(value)),
                ..Point::default()
            })
            .collect();
        Chart {
            series: vec![Series { label: String::new(), points }],
            lower: lower.map(dec),
            upper: upper.map(dec),
            ..Chart::default()
        }
    }

    /// screen_U115: one test with one pair of limits has one axis, whichever pulls and lots are drawn.
    #[test]
    fn the_value_axis_goes_by_the_limits() {
        let few = values(&chart(&["6.8"], Some("6.00"), Some("7.50")), 280, 20);
        let many = values(&chart(&["6.8", "6.1", "7.4"], Some("6.00"), Some("7.50")), 280, 20);
        assert_eq!(few, many);
        assert!(few.least < dec("6.00") && few.most > dec("7.50"));
        let counts = values(&chart(&["4", "11"], None, Some("20")), 280, 20);
        assert_eq!((counts.least, counts.most), (dec("0"), dec("25")));
        let wide = values(&chart(&["9"], Some("6.00"), Some("7.50")), 280, 20);
        assert!(wide.most >= dec("9"), "a value outside is still drawn inside the chart");
    }

    #[test]
    fn steps_are_round() {
        let table = [("1.5", 5, "0.5"), ("20", 5, "5"), ("0.03", 5, "0.01"), ("7", 5, "2"), ("100", 5, "20")];
        for (span, most, expected) in table {
            assert_eq!(round_step(dec(span), most), dec(expected), "{span}");
        }
    }

    #[test]
    fn positions_are_in_proportion_and_stay_inside() {
        let axis = Axis { least: dec("0"), most: dec("10"), step: dec("2"), from: 300, to: 100 };
        assert_eq!(axis.at(dec("0")), dec("300"));
        assert_eq!(axis.at(dec("2.5")), dec("250"));
        assert_eq!(axis.at(dec("99")), dec("100"));
        assert_eq!(axis.ticks().len(), 6);
    }

    #[test]
    fn time_is_written_in_the_unit_that_suits_its_length() {
        for (months, unit) in [("0.05", TimeUnit::Hours), ("1", TimeUnit::Days), ("24", TimeUnit::Months)] {
            assert_eq!(TimeUnit::for_months(dec(months)), unit, "{months}");
        }
        assert_eq!(TimeUnit::Days.of_months(dec("2")), dec("60.8750"));
        let (axis, unit) = time(&chart(&["1"; 9], None, None), 0, 100);
        assert_eq!((axis.most, axis.step, unit), (dec("24"), dec("6"), TimeUnit::Months));
    }
}
