//! Settling curves as charts and sentences.

use rust_decimal::Decimal;

use super::chart::{Chart, Point, Series};
use crate::domain::settling::{Analysis, Curve, Poured};

/// At most so many curves on one picture; more become several pictures.
const CURVES_A_CHART: usize = 4;
/// Minutes of a month as ages count them (30.4375 days).
const MINUTES_A_MONTH: i64 = 43_830;

/// The curves of one arm, up to four ages a chart, oldest first.
pub fn charts(arm: i64, words: &str, curves: &[&Curve]) -> Vec<Chart> {
    let parts = curves.chunks(CURVES_A_CHART).enumerate();
    parts
        .map(|(part, curves)| Chart {
            id: format!("settling-{arm}-{part}"),
            test: "Sediment volume after shaking".to_string(),
            unit: "share of the total volume".to_string(),
            condition: words.to_string(),
            is_of_readings: true,
            series: curves.iter().map(|curve| series(curve)).collect(),
            ..Chart::default()
        })
        .collect()
}

fn series(curve: &Curve) -> Series {
    let point = |(minute, share): &(i64, Decimal)| Point {
        age_months: Decimal::from(*minute) / Decimal::from(MINUTES_A_MONTH),
        age: minute_words(*minute),
        value: Some(*share),
        shown: share.round_dp(2).to_string(),
        is_signed: true,
        ..Point::default()
    };
    Series { label: curve.age.clone(), points: curve.points.iter().map(point).collect() }
}

/// "30 min", "2 h", "1 day".
pub fn minute_words(minute: i64) -> String {
    match minute {
        0 => "as shaken".to_string(),
        minutes if minutes % 1440 == 0 => match minutes / 1440 {
            1 => "1 day".to_string(),
            days => format!("{days} days"),
        },
        minutes if minutes % 60 == 0 => format!("{} h", minutes / 60),
        minutes => format!("{minutes} min"),
    }
}

/// One row of the table of curves: lag, first rate, critical point, compression, collapse.
pub fn row(curve: &Curve, found: &Result<Analysis, &'static str>) -> Vec<String> {
    let dash = || "none seen".to_string();
    let mut row = vec![curve.age.clone(), curve.cylinders.to_string()];
    match found {
        Err(needs) => {
            row.push(format!("not evaluable: {needs}"));
            row.extend([String::new(), String::new(), String::new(), String::new()]);
        }
        Ok(one) => {
            row.push(minute_words(one.lag_minutes.round() as i64));
            row.push(one.first_rate_per_hour.map_or("did not fall".to_string(), |rate| {
                let how = if one.is_two_point { ", two readings" } else { "" };
                format!("{:.2} % of the height an hour{how}", 100.0 * rate)
            }));
            row.push(one.critical_minute.map_or_else(dash, |at| format!("by {}", minute_words(at))));
            row.push(one.compression_per_hour.map_or_else(dash, |rate| format!("{rate:.4} per hour")));
            row.push(one.collapse.map_or_else(dash, |(from, to, share)| {
                let (from, to) = (minute_words(from.round() as i64), minute_words(to.round() as i64));
                format!("{:.0} % between {from} and {to}", 100.0 * share)
            }));
        }
    }
    row
}

/// What the patient pours, in sentences that say they are bounds.
pub fn poured(found: &Poured, dissolved_stated: bool, stored_f: &str) -> Vec<String> {
    let percent = |share: f64| format!("{:.0} %", 100.0 * share);
    let dissolved = if dissolved_stated {
        "the dissolved share the formulation states"
    } else {
        "nothing dissolved, since the formulation states no share: the worst"
    };
    let mut sentences = vec![format!(
        "Never shaken, at worst the first doses hold {} of the label and the last ones {}: a bound from the \
         as-stored ratio {stored_f} and {dissolved}, not a forecast.",
        percent(found.first_dose),
        percent(found.last_dose)
    )];
    sentences.push(match found.seconds_to_dose {
        Some(seconds) => format!(
            "After shaking, about {} pass until the top half has lost 5 %: a bound from the first fall of the \
             interface in the cylinder (0.05 of the height by its rate, common practice).",
            seconds_words(seconds)
        ),
        None => "After shaking the interface was not seen to fall, so no time to dose is stated.".to_string(),
    });
    sentences
}

fn seconds_words(seconds: f64) -> String {
    match seconds {
        s if s < 120.0 => format!("{s:.0} seconds"),
        s if s < 7200.0 => format!("{:.0} minutes", s / 60.0),
        s => format!("{:.0} hours", s / 3600.0),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bounds_are_said_as_bounds() {
        let found = Poured { first_dose: 0.0, last_dose: 2.0, seconds_to_dose: Some(1800.0) };
        let words = poured(&found, false, "0.50").join(" ");
        for part in ["first doses hold 0 %", "last ones 200 %", "a bound", "about 30 minutes", "the worst"] {
            assert!(words.contains(part), "{part}: {words}");
        }
        assert_eq!((minute_words(90), minute_words(120)), ("90 min".to_string(), "2 h".to_string()));
        assert_eq!((minute_words(1440), minute_words(2880)), ("1 day".to_string(), "2 days".to_string()));
    }
}
