//! The questions a value draws while it can still be re-read.

use crate::domain::failure::Failure;
use crate::domain::reading::{Entry, Question, Said};
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::Change;

/// The questions to be stored with a value.
pub(in crate::acts) fn of(
    _: &Change<'_>,
    _: &BenchSample,
    _: &BenchTest,
    entry: &Entry,
) -> Result<Vec<Question>, Failure> {
    let (Said::Number(number), Some(decimals)) = (&entry.said, entry.slot.decimals) else {
        return Ok(Vec::new());
    };
    if number.decimals >= decimals {
        return Ok(Vec::new());
    }
    let step = rust_decimal::Decimal::new(1, decimals);
    let sentence =
        format!("{}: this method reads to {step}. Is {} what it showed?", entry.slot.label(), number.text);
    Ok(vec![Question { rule: "decimals".to_string(), sentence }])
}
