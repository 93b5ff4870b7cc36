//! A table as every list and record page shows it.

use askama::Template;

use super::part::StatusMark;

/// One cell. The first of a row is its head.
#[derive(Clone, Debug)]
pub enum Cell {
    Text(String),
    /// Right-aligned.
    Number(String),
    Link {
        path: String,
        words: String,
        note: String,
    },
    Noted {
        words: String,
        note: String,
    },
    /// Says why there is no value.
    Missing(String),
    Status(StatusMark),
    /// Was and is of a comparison.
    Was(String),
    Is(String),
}

impl Cell {
    pub fn text(words: impl Into<String>) -> Cell {
        Cell::Text(words.into())
    }

    /// A date, a name, a code: it stays on one line.
    pub fn is_short(&self) -> bool {
        matches!(self, Cell::Text(words) if words.chars().count() <= 14)
    }

    pub fn number(words: impl Into<String>) -> Cell {
        Cell::Number(words.into())
    }

    pub fn link(path: impl Into<String>, words: impl Into<String>) -> Cell {
        Cell::Link { path: path.into(), words: words.into(), note: String::new() }
    }

    pub fn noted(words: impl Into<String>, note: impl Into<String>) -> Cell {
        Cell::Noted { words: words.into(), note: note.into() }
    }

    /// The value, or why there is none.
    pub fn or_missing(value: Option<String>, why: &str) -> Cell {
        value.map_or_else(|| Cell::Missing(why.to_string()), Cell::Text)
    }

    pub fn number_or_missing(value: Option<String>, why: &str) -> Cell {
        value.map_or_else(|| Cell::Missing(why.to_string()), Cell::Number)
    }
}

/// A table with its caption; without rows the sentence that says what would be here.
#[derive(Clone, Debug, Template)]
#[template(path = "part/table.html")]
pub struct Table {
    pub caption: String,
    /// Words, and whether the column holds numbers.
    pub heads: Vec<(String, bool)>,
    pub rows: Vec<Vec<Cell>>,
    pub empty: String,
}

impl askama::filters::HtmlSafe for Table {}

impl Table {
    /// Heads ending in `#` are columns of numbers.
    pub fn new(caption: &str, heads: &[&str], empty: &str) -> Table {
        let heads =
            heads.iter().map(|head| (head.trim_end_matches('#').to_string(), head.ends_with('#'))).collect();
        Table { caption: caption.to_string(), heads, rows: Vec::new(), empty: empty.to_string() }
    }

    pub fn rows(self, rows: impl IntoIterator<Item = Vec<Cell>>) -> Table {
        Table { rows: rows.into_iter().collect(), ..self }
    }
}
