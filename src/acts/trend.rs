//! The first trend signal of a completed test.

use crate::domain::failure::Failure;
use crate::domain::judgement::{Judged, NewFlag};
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::Change;

/// The signal of one result from the lot's own earlier points.
pub(in crate::acts) fn first_signal(
    _: &Change<'_>,
    _: &BenchSample,
    _: &BenchTest,
    _: &Judged,
) -> Result<Option<NewFlag>, Failure> {
    Ok(None)
}
