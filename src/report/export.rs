//! The tables of a lot file as CSV and JSON. A spreadsheet that opens the CSV computes nothing.

use serde_json::{Map, Value, json};

use crate::domain::lot_file::{Cell, LotFile, Table};

/// What a spreadsheet takes for the beginning of a formula, in its usual and its full-width form (sec_S70).
const TRIGGERS: [char; 12] =
    ['=', '+', '-', '@', '\t', '\r', '\n', '\0', '\u{ff1d}', '\u{ff0b}', '\u{ff0d}', '\u{ff20}'];

/// One table as CSV: every field quoted, lines end with CR LF, `.` as decimal mark (sec_S70–S72).
///
/// With the byte-order mark some spreadsheets recognise UTF-8; without it other programs read the first name right.
pub fn csv(table: &Table, with_mark: bool) -> Vec<u8> {
    let mut text = String::new();
    if with_mark {
        text.push('\u{feff}');
    }
    line(&mut text, table.columns.iter().map(|name| guarded(name)));
    for row in &table.rows {
        let fields =
            row.iter().zip(&table.columns).map(|(cell, column)| field(cell, table.is_numeric(column)));
        line(&mut text, fields);
    }
    text.into_bytes()
}

fn line(text: &mut String, fields: impl Iterator<Item = String>) {
    let quoted: Vec<String> = fields.map(|field| format!("\"{}\"", field.replace('"', "\"\""))).collect();
    text.push_str(&quoted.join(","));
    text.push_str("\r\n");
}

fn field(cell: &Cell, is_numeric: bool) -> String {
    match cell {
        Cell::Missing => String::new(),
        Cell::Integer(number) => number.to_string(),
        Cell::Text(text) if is_numeric && is_plain_number(text) => text.clone(),
        Cell::Text(text) => guarded(text),
    }
}

/// `^-?[0-9]+(\.[0-9]+)?$` (sec_S71).
fn is_plain_number(text: &str) -> bool {
    let digits = |part: &str| !part.is_empty() && part.bytes().all(|byte| byte.is_ascii_digit());
    let unsigned = text.strip_prefix('-').unwrap_or(text);
    match unsigned.split_once('.') {
        Some((whole, rest)) => digits(whole) && digits(rest),
        None => digits(unsigned),
    }
}

fn guarded(text: &str) -> String {
    if text.starts_with(TRIGGERS) { format!("'{text}") } else { text.to_string() }
}

/// All tables as one JSON document with the exact text of every value.
pub fn json(file: &LotFile) -> Vec<u8> {
    let tables: Map<String, Value> =
        file.tables.iter().map(|table| (table.name.to_string(), rows(table))).collect();
    let document = json!({ "lot": file.number, "about": file.about, "site": file.site, "tables": tables });
    let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
    text.push('\n');
    text.into_bytes()
}

fn rows(table: &Table) -> Value {
    let row = |cells: &Vec<Cell>| {
        let fields = table.columns.iter().zip(cells).map(|(name, cell)| (name.clone(), value(cell)));
        Value::Object(fields.collect())
    };
    table.rows.iter().map(row).collect()
}

fn value(cell: &Cell) -> Value {
    match cell {
        Cell::Missing => Value::Null,
        Cell::Integer(number) => (*number).into(),
        Cell::Text(text) => text.as_str().into(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn table(value: &str, note: &str) -> Table {
        Table {
            name: "readings",
            title: "Readings",
            columns: vec!["id".into(), "value".into(), "note".into()],
            numeric: &["value"],
            rows: vec![vec![Cell::Integer(-7), Cell::Text(value.into()), Cell::Text(note.into())]],
        }
    }

    /// sec_S70, sec_S71: a negative reading is a number, everything else that could compute is text.
    #[test]
    fn nothing_in_a_text_column_can_compute_and_numbers_stay_numbers() {
        let text = |value, note| String::from_utf8(csv(&table(value, note), false)).unwrap();
        assert_eq!(
            text("-0.5", "-0.5+cmd"),
            "\"id\",\"value\",\"note\"\r\n\"-7\",\"-0.5\",\"'-0.5+cmd\"\r\n"
        );
        for note in ["=1+1", "+1", "-1", "@a", "\ta", "\ra", "\na", "\0a", "＝1", "＋1", "－1", "＠a"] {
            assert!(text("1", note).contains(&format!("\"'{note}\"")), "{note:?}");
        }
        for value in ["-0.5+1", "--1", "1.", ".5", "-", "+1", "=1", "1e5"] {
            let shown = text(value, "");
            assert!(!shown.contains(&format!("\"{value}\"")) || !value.starts_with(TRIGGERS), "{shown}");
        }
        assert!(csv(&table("1", ""), true).starts_with("\u{feff}\"id\"".as_bytes()));
    }

    proptest! {
        /// sec_S73: what is read back, without the one mark, is the text of the JSON.
        #[test]
        fn csv_and_json_say_the_same(note in "[^']\\PC{0,20}|[=+@-]{0,3}[a-z\",;\r\n]{0,9}") {
            let table = table("6.83", &note);
            let bytes = csv(&table, false);
            let mut reader = csv::ReaderBuilder::new().has_headers(true).from_reader(&bytes[..]);
            let record = reader.records().next().unwrap().unwrap();
            let read = record.get(2).unwrap();
            let bare = read.strip_prefix('\'').filter(|rest| rest.starts_with(TRIGGERS)).unwrap_or(read);
            prop_assert_eq!(bare, &note);
            let exact = rows(&table);
            prop_assert_eq!(exact[0]["note"].as_str(), Some(note.as_str()));
        }
    }
}
