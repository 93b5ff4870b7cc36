//! Grids whose number of rows is not fixed: what is there, some empty ones, and as many as were typed.

use super::form::Typed;
use super::visit::Visit;
use crate::domain::typed::NumberRule;
use rust_decimal::Decimal;

/// More rows than any form of ours needs; a request with more is refused for its unknown fields.
const MOST_ROWS: usize = 80;

/// The rows of the grid `prefix.1.…`: those of a form that comes back, else those present and some empty
/// ones.
pub fn count(visit: &Visit, prefix: &str, present: usize, empty: usize) -> usize {
    let number = |name: &str| -> Option<usize> {
        name.strip_prefix(prefix)?.strip_prefix('.')?.split('.').next()?.parse().ok()
    };
    let typed = visit.form.iter().filter_map(|(name, _)| number(name)).max();
    typed.unwrap_or(present + empty).min(MOST_ROWS)
}

/// The name of a field of a row: `grade.3.word`.
pub fn name(prefix: &str, row: usize, field: &str) -> String {
    format!("{prefix}.{row}.{field}")
}

/// The rows in which anything was typed, ticks apart.
pub fn filled(typed: &Typed<'_>, prefix: &str, rows: usize, fields: &[&str]) -> Vec<usize> {
    let has_text = |row: &usize| fields.iter().any(|field| !typed.raw(&name(prefix, *row, field)).is_empty());
    (1..=rows).filter(has_text).collect()
}

/// A decimal of a field with this label.
pub fn decimal(typed: &mut Typed<'_>, name: &str, label: &str) -> Option<Decimal> {
    typed.decimal(name, &NumberRule::any(label)).map(|number| number.value)
}

/// A decimal that may be missing.
pub fn maybe_decimal(typed: &mut Typed<'_>, name: &str, label: &str) -> Option<Option<Decimal>> {
    Some(typed.maybe_decimal(name, &NumberRule::any(label))?.map(|number| number.value))
}

/// A whole number of 0 or more.
pub fn whole(typed: &mut Typed<'_>, name: &str, least: i64, most: i64) -> Option<u32> {
    typed.count(name, least, most).and_then(|count| u32::try_from(count).ok())
}

/// All of them, or none where one has a fault; every one is read, so that every fault shows.
pub fn all<T>(read: Vec<Option<T>>) -> Option<Vec<T>> {
    read.into_iter().collect()
}

/// A value that may be missing, as a form field shows it.
pub fn shown(value: Option<Decimal>) -> String {
    value.map(|value| value.to_string()).unwrap_or_default()
}
