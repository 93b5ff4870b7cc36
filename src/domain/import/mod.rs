//! A file of results measured elsewhere: what it may hold, read whole, every unreadable cell named at once.

pub mod plan;
pub mod read;

use rust_decimal::Decimal;

use super::age::Age;
use super::refusal::NamedReason;

/// The columns of a result file, in any order.
pub const COLUMNS: [&str; 12] = [
    "study",
    "formulation",
    "condition",
    "container",
    "time",
    "time_unit",
    "test",
    "value",
    "sd",
    "n",
    "unit",
    "flag",
];

/// Limits of a result file (sec_S86).
pub const MOST_ROW_BYTES: usize = 64 * 1024;
pub const MOST_COLUMNS: usize = 100;
pub const MOST_ROWS: usize = 50_000;

/// One row of the file, read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Row {
    /// The line of the file, counted from one.
    pub line: u64,
    pub study: String,
    pub formulation: String,
    pub condition: String,
    pub container: String,
    pub age: Age,
    pub test: String,
    pub value: Decimal,
    /// The value as it stands in the file.
    pub shown: String,
    pub qualifier: Qualifier,
    pub sd: Option<Decimal>,
    pub n: Option<u32>,
    pub unit: String,
    pub flag: String,
}

/// Whether the file states the value, or a bound of it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Qualifier {
    Equal,
    Above,
    Below,
}

impl Qualifier {
    /// As stored in `result.qualifier`.
    pub fn code(self) -> &'static str {
        match self {
            Qualifier::Equal => "=",
            Qualifier::Above => ">",
            Qualifier::Below => "<",
        }
    }
}

/// What is wrong with a file: the line and the column it is in, where it is in one.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CellFault {
    pub line: Option<u64>,
    pub column: Option<String>,
    pub sentence: String,
}

impl std::fmt::Display for CellFault {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        if let Some(line) = self.line {
            write!(f, "Line {line}")?;
            if let Some(column) = &self.column {
                write!(f, ", {column}")?;
            }
            write!(f, ": ")?;
        }
        f.write_str(&self.sentence)
    }
}

/// Why a file is not imported.
#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ImportRefusal {
    #[error("{}", all_of(.0))]
    CellsUnreadable(Vec<CellFault>),
    #[error("This file was imported before, on {0}, as import {1}. The same file is never imported twice.")]
    ImportedBefore(String, i64),
}

impl NamedReason for ImportRefusal {
    fn field(&self) -> Option<String> {
        Some("file".to_string())
    }
}

/// Faults shown one by one; beyond, they are only counted.
const MOST_SHOWN: usize = 200;

fn all_of(faults: &[CellFault]) -> String {
    let mut lines: Vec<String> = faults.iter().take(MOST_SHOWN).map(CellFault::to_string).collect();
    if faults.len() > MOST_SHOWN {
        lines.push(format!("and {} more", faults.len() - MOST_SHOWN));
    }
    lines.push("Nothing was imported.".to_string());
    lines.join("\n")
}

/// What an import brings, in numbers.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Counts {
    pub results: usize,
    pub products: usize,
    pub lots: usize,
    pub studies: usize,
    pub arms: usize,
    pub pulls: usize,
}

impl Counts {
    /// `90 results: 1 product, 9 lots, 9 studies, 9 arms, 90 pulls`.
    pub fn words(&self) -> String {
        let some = |count: usize, one: &str, many: &str| {
            if count == 1 { format!("1 {one}") } else { format!("{count} {many}") }
        };
        format!(
            "{}: {}, {}, {}, {}, {}",
            some(self.results, "result", "results"),
            some(self.products, "product", "products"),
            some(self.lots, "lot", "lots"),
            some(self.studies, "study", "studies"),
            some(self.arms, "arm", "arms"),
            some(self.pulls, "pull", "pulls"),
        )
    }
}
