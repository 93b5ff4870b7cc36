//! Numbers, dates and instants as text: the one place that decides how they look.

use chrono_tz::Tz;

use crate::domain::moment::{Moment, date_from_stored, date_shown};

/// A stored instant in site time: `3 Mar 2027, 09:05 (+01:00)`.
pub fn instant(stored: &str, zone: Tz) -> String {
    Moment::from_stored(stored, zone).map(|moment| moment.shown()).unwrap_or_else(|| stored.to_string())
}

/// A stored calendar date: `3 Mar 2027`.
pub fn date(stored: &str) -> String {
    date_from_stored(stored).map(date_shown).unwrap_or_else(|| stored.to_string())
}

/// A digest in groups of eight.
pub fn digest(hex: &str) -> String {
    hex.as_bytes()
        .chunks(8)
        .map(|group| String::from_utf8_lossy(group).into_owned())
        .collect::<Vec<_>>()
        .join(" ")
}

/// `1 pull`, `14 pulls`.
pub fn counted(count: usize, one: &str, many: &str) -> String {
    if count == 1 { format!("1 {one}") } else { format!("{count} {many}") }
}

/// A value with its unit and a thin no-break space between them.
pub fn with_unit(value: &str, unit: &str) -> String {
    if unit.is_empty() { value.to_string() } else { format!("{value}\u{202f}{unit}") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_dates_and_units_have_one_form() {
        assert_eq!(counted(1, "pull", "pulls"), "1 pull");
        assert_eq!(counted(0, "pull", "pulls"), "0 pulls");
        assert_eq!(date("2027-03-03"), "3 Mar 2027");
        assert_eq!(with_unit("6.83", "pH units"), "6.83\u{202f}pH units");
        assert_eq!(digest("9f2c41d0a7b3"), "9f2c41d0 a7b3");
    }
}
