//! The straight line against NIST certified values and textbook examples.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;
use supernate::science::interval;
use supernate::science::regression::{Line, Point};

use crate::support::{agree, rows};

/// Parses to decimal and subtracts the first value exactly before any float is formed.
pub fn offsets(texts: &[&str]) -> (Decimal, Vec<f64>) {
    let decimals: Vec<Decimal> = texts.iter().map(|text| text.trim().parse().unwrap()).collect();
    (decimals[0], decimals.iter().map(|value| (value - decimals[0]).to_f64().unwrap()).collect())
}

/// NIST Statistical Reference Datasets, Norris (linear calibration of ozone monitors), certified values.
/// https://www.itl.nist.gov/div898/strd/lls/data/Norris.shtml (public domain)
#[test]
fn norris_to_nine_digits() {
    let rows = rows("nist_strd/norris.csv");
    let (y0, ys) = offsets(&rows.iter().map(|row| &row[0]).collect::<Vec<_>>());
    let points: Vec<Point> =
        rows.iter().zip(&ys).map(|(row, &y)| Point { x: row[1].parse().unwrap(), y }).collect();
    let line = Line::fit(&points).unwrap();
    let intercept = y0.to_f64().unwrap() + line.intercept();
    agree(intercept, -0.262323073774029, 1e-11, "intercept");
    agree(line.slope, 1.00211681802045, 1e-13, "slope");
    agree(line.se_intercept().unwrap(), 0.232818234301152, 1e-11, "standard error of intercept");
    agree(line.se_slope().unwrap(), 0.429796848199937e-3, 1e-11, "standard error of slope");
    agree(line.mse().unwrap().sqrt(), 0.884796396144373, 1e-11, "residual standard deviation");
    agree(line.r_squared().unwrap(), 0.999993745883712, 1e-13, "R squared");
    agree(line.sse, 26.6173985294224, 1e-11, "residual sum of squares");
    let f = line.slope * line.slope * line.sums.sxx / line.mse().unwrap();
    agree(f, 5436385.54079785, 1e-11, "F");
}

/// Kutner, Nachtsheim, Neter & Li, Applied Linear Statistical Models, 5th ed. 2005, ch. 1–2 (Toluca company).
#[test]
fn toluca_confidence_and_prediction() {
    let points: Vec<Point> = rows("worked/kutner_toluca.csv")
        .iter()
        .map(|row| Point { x: row[0].parse().unwrap(), y: row[1].parse().unwrap() })
        .collect();
    let line = Line::fit(&points).unwrap();
    agree(line.intercept(), 62.36585859, 1e-9, "b0");
    agree(line.slope, 3.57020202, 1e-9, "b1");
    agree(line.se_slope().unwrap(), 0.3469721568, 1e-9, "se b1");
    agree(line.sse, 54825.459, 1e-8, "SSE");
    let fitted = line.mean_line().unwrap();
    let mean = interval::confidence_of_mean(&fitted, 65.0, 0.90).unwrap();
    agree(mean.lower, 277.4315342, 1e-9, "90 % confidence limit, lower");
    agree(mean.upper, 311.4264456, 1e-9, "90 % confidence limit, upper");
    let next = interval::prediction(&fitted, 100.0, 1, 0.90).unwrap();
    agree(next.lower, 332.2071765, 1e-9, "90 % prediction limit, lower");
    agree(next.upper, 506.5649447, 1e-9, "90 % prediction limit, upper");
    assert!((next.lower - 332.2).abs() < 0.05 && (next.upper - 506.6).abs() < 0.05, "as printed in the book");
}
