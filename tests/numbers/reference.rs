//! The reference data sets of `data/shelf_life/expected.json`, in the form the tests need.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;
use serde_json::Value;
use supernate::science::regression::Point;
use supernate::science::shelf_life::{Direction, Specification};
use supernate::science::transform::Scale;

use crate::support::data;

/// The whole file.
pub fn all() -> Value {
    serde_json::from_str(&std::fs::read_to_string(data("shelf_life/expected.json")).unwrap()).unwrap()
}

/// One data set on its analysis scale, counted from an exact origin where the scale is linear.
pub struct Set {
    pub name: String,
    pub lots: Vec<(String, Vec<Point>)>,
    pub specification: Specification,
    pub origin: f64,
    pub scale: Scale,
    pub expected: Value,
}

impl Set {
    pub fn slices(&self) -> Vec<&[Point]> {
        self.lots.iter().map(|(_, points)| points.as_slice()).collect()
    }
}

/// A JSON number as the decimal it was written as.
fn decimal(value: &Value) -> Decimal {
    let number = value.as_f64().unwrap();
    number.to_string().parse().unwrap()
}

fn scale_of(name: &str) -> Scale {
    match name {
        "none" => Scale::None,
        "ln" => Scale::Ln,
        "anscombe" => Scale::Anscombe,
        "logit" => Scale::Logit,
        other => panic!("scale {other}"),
    }
}

/// All data sets.
pub fn sets() -> Vec<Set> {
    all()["datasets"].as_array().unwrap().iter().map(set).collect()
}

fn set(expected: &Value) -> Set {
    let scale = scale_of(expected["transform"].as_str().unwrap());
    let lots = expected["lots"].as_object().unwrap();
    let first = decimal(&lots.values().next().unwrap()["y"][0]);
    let origin = if scale == Scale::None { first } else { Decimal::ZERO };
    let on_scale = |value: &Value| scale.forward((decimal(value) - origin).to_f64().unwrap()).unwrap();
    let points = |lot: &Value| {
        let pairs = lot["x"].as_array().unwrap().iter().zip(lot["y"].as_array().unwrap());
        pairs.map(|(x, y)| Point { x: x.as_f64().unwrap(), y: on_scale(y) }).collect()
    };
    let limit = |name: &str| (!expected[name].is_null()).then(|| on_scale(&expected[name]));
    Set {
        name: expected["name"].as_str().unwrap().to_string(),
        lots: lots.iter().map(|(name, lot)| (name.clone(), points(lot))).collect(),
        specification: Specification {
            lower: limit("lower_limit"),
            upper: limit("upper_limit"),
            direction: match expected["direction"].as_str().unwrap() {
                "decreasing" => Direction::Decreasing,
                "increasing" => Direction::Increasing,
                _ => Direction::Either,
            },
        },
        origin: origin.to_f64().unwrap(),
        scale,
        expected: expected.clone(),
    }
}
