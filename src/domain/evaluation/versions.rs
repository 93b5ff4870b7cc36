//! One formulation version against another on stability: the same test and condition, both sets of lots.

use super::assess::{Assessment, CONFIDENCE};
use crate::science::transform::Scale;
use crate::science::version_difference::{Difference, levels, slopes};

/// A difference with its confidence limits.
pub type Found = Difference;

/// What differs between two versions, or what a comparison needs.
#[derive(Clone, Debug, PartialEq)]
pub struct Compared {
    /// Second minus first, per month on the analysis scale.
    pub slope: Result<Difference, &'static str>,
    /// Second minus first at time zero, on the analysis scale.
    pub level: Result<Difference, &'static str>,
}

/// Compares two computed series of one test. On a linear scale each was counted from its own origin; the level is put
/// back on one.
pub fn compare(first: &Assessment, second: &Assessment) -> Compared {
    let (Some(one), Some(other)) = (&first.pooling, &second.pooling) else {
        let needs = "needs a line in both versions: two ages of exact results";
        return Compared { slope: Err(needs), level: Err(needs) };
    };
    let slope = slopes(one, other, CONFIDENCE).ok_or("needs one more age in each version");
    let shift = if first.series.scale == Scale::None { second.origin - first.origin } else { 0.0 };
    let level = levels(one, other, 0.0, shift, CONFIDENCE).ok_or("needs two lots of each version");
    Compared { slope, level }
}
