//! Stored values as people read them: times of the site, dates in letters, names of columns as headings.

use chrono_tz::Tz;
use serde_json::Value;

use crate::domain::lot_file::Cell;
use crate::domain::moment::{Moment, date_from_stored, date_shown};

/// What stands where nothing is recorded.
const NOTHING: &str = "–";

/// The heading of a column: `recorded_at` becomes `Recorded at`.
pub fn head(column: &str) -> String {
    let words = column.strip_prefix("is_").unwrap_or(column).replace('_', " ");
    let mut letters = words.chars();
    letters.next().map(|first| first.to_uppercase().chain(letters).collect()).unwrap_or_default()
}

/// A cell by what its column says of it.
pub fn shown(column: &str, cell: &Cell, zone: Tz) -> String {
    let text = cell.text();
    if text.is_empty() {
        return NOTHING.to_string();
    }
    if column == "at" || column.ends_with("_at") || column == "held_from" {
        return Moment::from_stored(&text, zone).map(|moment| moment.shown()).unwrap_or(text);
    }
    if column.ends_with("_on") {
        return date_from_stored(&text).map(date_shown).unwrap_or(text);
    }
    match (column.starts_with("is_"), cell) {
        (true, Cell::Integer(0)) => "no".to_string(),
        (true, Cell::Integer(_)) => "yes".to_string(),
        _ => text,
    }
}

/// A JSON document as lines of place and value: `arms, 1, orientation` · `inverted`.
pub fn flat(content: &str) -> Vec<(String, String)> {
    let mut lines = Vec::new();
    match serde_json::from_str::<Value>(content) {
        Ok(value) => gather(&value, &mut Vec::new(), &mut lines),
        Err(_) => lines.push(("content".to_string(), content.to_string())),
    }
    lines
}

fn gather(value: &Value, place: &mut Vec<String>, lines: &mut Vec<(String, String)>) {
    match value {
        Value::Object(fields) if !fields.is_empty() => {
            for (name, inner) in fields {
                place.push(name.replace('_', " "));
                gather(inner, place, lines);
                place.pop();
            }
        }
        Value::Array(items) if !items.is_empty() => {
            for (at, inner) in items.iter().enumerate() {
                place.push((at + 1).to_string());
                gather(inner, place, lines);
                place.pop();
            }
        }
        Value::String(text) if text.is_empty() => lines.push((place.join(", "), NOTHING.to_string())),
        Value::String(text) => lines.push((place.join(", "), text.clone())),
        Value::Bool(is) => lines.push((place.join(", "), if *is { "yes" } else { "no" }.to_string())),
        Value::Number(number) => lines.push((place.join(", "), number.to_string())),
        Value::Null | Value::Object(_) | Value::Array(_) => {
            lines.push((place.join(", "), NOTHING.to_string()))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_say_how_their_values_are_read() {
        let zone = chrono_tz::Europe::London;
        let text = |text: &str| Cell::Text(text.to_string());
        assert_eq!(
            shown("recorded_at", &text("2026-06-30T23:30:00.000Z"), zone),
            "1 Jul 2026, 00:30 (+01:00)"
        );
        assert_eq!(shown("due_on", &text("2026-06-30"), zone), "30 Jun 2026");
        assert_eq!(shown("is_newest", &Cell::Integer(1), zone), "yes");
        assert_eq!(shown("value", &Cell::Missing, zone), "–");
        assert_eq!(head("is_labelled_condition"), "Labelled condition");
    }

    #[test]
    fn a_document_becomes_lines() {
        let lines = flat(r#"{"unit":"%","arms":[{"needs_check":true},{}],"n":3}"#);
        let found: Vec<String> = lines.iter().map(|(place, value)| format!("{place}={value}")).collect();
        assert_eq!(found, ["arms, 1, needs check=yes", "arms, 2=–", "n=3", "unit=%"]);
    }
}
