//! The evaluation of a table of results: series, shelf life, trend.
//!
//! A table becomes rows ([`table`]), rows become series ([`series`]), each series is computed ([`assess`],
//! [`trend`]). Everything is pure: text in, facts out, or every complaint with its line.

pub mod assess;
mod bounds;
pub mod container;
pub mod group;
mod notes;
pub mod record;
pub mod series;
pub mod table;
pub mod trend;
pub mod versions;

use std::fmt;

/// Something in the table that must be mended before it can be evaluated.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Complaint {
    /// Line of the file, counted from 1; none where it concerns the whole file.
    pub line: Option<u64>,
    /// What is wrong and how to mend it.
    pub sentence: String,
}

impl Complaint {
    /// About one line.
    pub fn at(line: u64, sentence: impl Into<String>) -> Self {
        Self { line: Some(line), sentence: sentence.into() }
    }

    /// About the file.
    pub fn whole(sentence: impl Into<String>) -> Self {
        Self { line: None, sentence: sentence.into() }
    }
}

impl fmt::Display for Complaint {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.line {
            Some(line) => write!(f, "line {line}: {}", self.sentence),
            None => write!(f, "{}", self.sentence),
        }
    }
}

/// What to do with several results of one lot at one age.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Replicates {
    /// Their mean is the result of the pull.
    #[default]
    Mean,
    /// Each counts by itself in the line (separate containers, tested independently).
    Independent,
}

/// What a person may choose.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Choices {
    /// Replicates.
    pub replicates: Replicates,
    /// Months to expiry for the early warning; none: no early warning.
    pub expiry_months: Option<f64>,
    /// Level of the tests for pooling.
    pub alpha: f64,
}

impl Default for Choices {
    fn default() -> Self {
        Self { replicates: Replicates::Mean, expiry_months: None, alpha: 0.25 }
    }
}

/// Evaluates a table.
pub fn evaluate(text: &[u8], choices: &Choices) -> Result<Vec<assess::Assessment>, Vec<Complaint>> {
    let rows = table::read(text)?;
    let series = series::group(&rows)?;
    series.iter().map(|one| assess::assess(one, choices)).collect()
}
