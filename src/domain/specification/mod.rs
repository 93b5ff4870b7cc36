//! A specification version: which limits hold for which test, at release and over the shelf life.

pub mod rule;

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

/// The content of a specification version.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct SpecificationContent {
    pub tests: Vec<TestLimits>,
}

/// The limits of one test.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct TestLimits {
    /// The code results and charts go by: `ph`, `viscosity`, `assay`.
    pub test: String,
    pub title: String,
    /// The method (not its version: the protocol or the sample binds the version).
    pub method: i64,
    pub unit: String,
    pub release: Limit,
    pub shelf_life: Limit,
    /// Limits after constitution or opening; `Limit::None` where there are none.
    pub in_use: Limit,
    pub way: Way,
}

impl SpecificationContent {
    pub fn of(&self, test: &str) -> Option<&TestLimits> {
        self.tests.iter().find(|limits| limits.test == test)
    }

    /// Lower and upper limit of a test and component in a set; none for words, grades and unlimited tests.
    pub fn range_of(&self, test: &str, component: &str, set: LimitSet) -> (Option<Decimal>, Option<Decimal>) {
        match self.of(test).map(|limits| limits.limit(set)) {
            Some(Limit::Between { lower, upper }) => (*lower, *upper),
            Some(Limit::Components(ranges)) => {
                let key = if component.starts_with("unspecified") { "unspecified" } else { component };
                let range = ranges.iter().find(|(code, _)| code == key).map(|(_, range)| range);
                range.map(|range| (range.lower, range.upper)).unwrap_or_default()
            }
            Some(Limit::None | Limit::Grades(_)) | None => (None, None),
        }
    }
}

/// How a value is compared with a limit (ASTM E29 names both ways; decision A6).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Way {
    /// Rounded once to the limit's decimals by the method's rule, then compared.
    Rounding,
    /// Compared unrounded.
    Absolute,
}

/// A limit of one test. Limit values keep their decimals: `7.50` rounds to two.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Limit {
    #[default]
    None,
    /// One- or two-sided, both ends inclusive; counts too ("at most 20 inversions").
    Between { lower: Option<Decimal>, upper: Option<Decimal> },
    /// For an appearance: attribute code and the grade codes that conform.
    Grades(Vec<(String, Vec<String>)>),
    /// For a multi-component result: component code (or `total`, `unspecified`) and its limit.
    Components(Vec<(String, Range)>),
}

/// One- or two-sided limits, both ends inclusive.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Range {
    pub lower: Option<Decimal>,
    pub upper: Option<Decimal>,
}

/// Which of the limit sets a sample is judged by.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum LimitSet {
    Release,
    ShelfLife,
    InUse,
}

impl TestLimits {
    pub fn limit(&self, set: LimitSet) -> &Limit {
        match set {
            LimitSet::Release => &self.release,
            LimitSet::ShelfLife => &self.shelf_life,
            LimitSet::InUse => &self.in_use,
        }
    }
}

/// A range in words: `6.00 to 7.50`, `at most 20`, `at least 0.85`, `no limit`.
pub fn range_words(lower: Option<Decimal>, upper: Option<Decimal>) -> String {
    match (lower, upper) {
        (Some(lower), Some(upper)) => format!("{lower} to {upper}"),
        (Some(lower), None) => format!("at least {lower}"),
        (None, Some(upper)) => format!("at most {upper}"),
        (None, None) => "no limit".to_string(),
    }
}
