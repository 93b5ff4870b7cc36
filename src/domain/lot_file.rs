//! Everything recorded about one lot, as tables of exact text: what a lot file is made from, in every form.

use chrono_tz::Tz;

use super::series::{ArmWords, SeriesPoint};

/// All facts of a lot file. The same records give the same facts.
#[derive(Clone, Debug)]
pub struct LotFile {
    pub lot: i64,
    pub number: String,
    /// Product, presentation and state in one line.
    pub about: String,
    pub site: String,
    pub zone: Tz,
    /// In the order of the lot's life.
    pub tables: Vec<Table>,
    /// Points for the charts: arm, and what stands on it.
    pub series: Vec<(ArmWords, Vec<SeriesPoint>)>,
    /// Sample and grade of the liquid above its sediment, for the drawn cylinders.
    pub clarities: Vec<(i64, u8)>,
}

/// The records of one kind. Column names are those of the files; `id` and `act` come first where they exist.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Table {
    /// The name of its file and of its JSON list.
    pub name: &'static str,
    pub title: &'static str,
    pub columns: Vec<String>,
    /// Columns that hold exact decimals or counts.
    pub numeric: &'static [&'static str],
    pub rows: Vec<Vec<Cell>>,
}

/// One value as it is stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Cell {
    Missing,
    Integer(i64),
    Text(String),
}

impl Cell {
    /// The exact text; empty where nothing is recorded.
    pub fn text(&self) -> String {
        match self {
            Cell::Missing => String::new(),
            Cell::Integer(number) => number.to_string(),
            Cell::Text(text) => text.clone(),
        }
    }
}

impl Table {
    pub fn column(&self, name: &str) -> Option<usize> {
        self.columns.iter().position(|column| column == name)
    }

    pub fn cell<'a>(&'a self, row: &'a [Cell], name: &str) -> &'a Cell {
        self.column(name).and_then(|at| row.get(at)).unwrap_or(&Cell::Missing)
    }

    /// The text of one cell; empty where there is no such column.
    pub fn text(&self, row: &[Cell], name: &str) -> String {
        self.cell(row, name).text()
    }

    pub fn is_numeric(&self, column: &str) -> bool {
        self.numeric.contains(&column)
    }

    /// The rows whose column has this text.
    pub fn rows_where<'a>(&'a self, column: &str, text: &str) -> Vec<&'a Vec<Cell>> {
        self.rows.iter().filter(|row| self.text(row, column) == text).collect()
    }
}

impl LotFile {
    pub fn table(&self, name: &str) -> Option<&Table> {
        self.tables.iter().find(|table| table.name == name)
    }
}

/// The state of an export: who, when, with which program, at which head of the chain. Nothing else in a lot file
/// differs between two exports of the same records.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Export {
    /// RFC 3339 with the site's offset.
    pub at: String,
    pub by: String,
    pub program: String,
    /// The newest entry of the whole trail and its seal.
    pub head: String,
    /// What the site's system is and how it stands: name and words.
    pub systems: Vec<(String, String)>,
}
