//! The points of a trend: what one test gave over the ages of one lot, condition and orientation.

use rust_decimal::Decimal;

/// One result in a series: the latest version of a test at one pull, or a pull without one.
#[derive(Clone, Debug, PartialEq)]
pub struct SeriesPoint {
    pub sample: i64,
    pub sample_test: i64,
    pub test: String,
    pub title: String,
    pub component: String,
    /// Actual age where the pull's date is known, else nominal; in months of 30.4375 days.
    pub age_months: Decimal,
    pub age: String,
    pub value: Option<Decimal>,
    /// As stored: `=`, `>`, `<`, `words`, `none`; `none` too where there is no result.
    pub qualifier: String,
    pub shown: String,
    pub unit: String,
    pub verdict: String,
    pub sd: Option<Decimal>,
    pub n: Option<i64>,
    pub is_imported: bool,
    pub has_trend_flag: bool,
    pub is_signed: bool,
    pub is_missed: bool,
    /// The single readings as they stand, corrections taken into account.
    pub readings: Vec<Decimal>,
}

/// Which pulls stand in one series.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SeriesKey {
    pub lot: i64,
    pub condition: i64,
    pub orientation: String,
}

/// An arm in words, for the heading of its charts.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ArmWords {
    pub arm: i64,
    pub condition: String,
    /// The content of the specification version whose shelf-life limits are drawn.
    pub specification: Option<String>,
}
