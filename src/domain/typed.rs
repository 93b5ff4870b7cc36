//! What a person typed, and what it means: numbers and dates.
//!
//! A number keeps its text and an exact decimal. Nothing here guesses: what can be read two ways is asked about.

use chrono::NaiveDate;
use rust_decimal::Decimal;

/// A number as typed, with its exact value and the decimals that were typed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Number {
    pub text: String,
    pub value: Decimal,
    pub decimals: u32,
}

/// Why a text is not a number that can be recorded.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NumberFault {
    #[error("{0} is empty. Type the value that was read.")]
    Empty(String),
    #[error("{label}: “{text}” is not a number. Type digits with one decimal mark, such as 7.10.")]
    NotANumber { label: String, text: String },
    #[error("{label}: “{text}” has more than one decimal mark. Type it with one, without thousands marks.")]
    TwoMarks { label: String, text: String },
    #[error(
        "{label}: write a digit on both sides of the decimal mark, such as 0.5 or 5.0, in place of “{text}”."
    )]
    BareMark { label: String, text: String },
    #[error("{label}: “{text}” has more decimals than can exist here; at most {most}.")]
    TooManyDecimals { label: String, text: String, most: u32 },
    #[error("{label}: {text} cannot be; it must lie between {least} and {most}.")]
    OutsidePossible { label: String, text: String, least: Decimal, most: Decimal },
    #[error("{label} is recorded in {unit}, and “{text}” carries another unit. Type the value in {unit}.")]
    WrongUnit { label: String, text: String, unit: String },
    #[error("{label}: “{text}” can be {as_decimal} or {as_thousands}. Type it without the comma.")]
    TwoReadings { label: String, text: String, as_decimal: String, as_thousands: String },
    #[error("{label} is a count. Type a whole number such as 17.")]
    NotWhole { label: String },
}

/// What a numeric field accepts.
#[derive(Clone, Debug)]
pub struct NumberRule {
    pub label: String,
    pub unit: Option<String>,
    pub least: Decimal,
    pub most: Decimal,
    pub most_decimals: u32,
}

impl NumberRule {
    /// Any number of at most six decimals; narrow it with the struct fields.
    pub fn any(label: &str) -> NumberRule {
        NumberRule {
            label: label.to_string(),
            unit: None,
            least: Decimal::from(-1_000_000_000_i64),
            most: Decimal::from(1_000_000_000_i64),
            most_decimals: 9,
        }
    }

    pub fn between(label: &str, least: i64, most: i64) -> NumberRule {
        NumberRule { least: Decimal::from(least), most: Decimal::from(most), ..NumberRule::any(label) }
    }

    pub fn unit(self, unit: &str) -> NumberRule {
        NumberRule { unit: Some(unit.to_string()), ..self }
    }
}

/// Takes off what does no harm: spaces of all kinds at the ends, zero-width marks, the field's own unit.
pub fn clean(text: &str, unit: Option<&str>) -> String {
    let visible: String =
        text.chars().filter(|c| !matches!(c, '\u{200b}'..='\u{200f}' | '\u{feff}')).collect();
    let trimmed = visible.trim_matches(|c: char| c.is_whitespace() || c == '\u{a0}' || c == '\u{202f}');
    let without = match unit.filter(|unit| !unit.is_empty()) {
        Some(unit) => trimmed.strip_suffix(unit).unwrap_or(trimmed),
        None => trimmed,
    };
    without.trim_end_matches(|c: char| c.is_whitespace() || c == '\u{a0}' || c == '\u{202f}').to_string()
}

/// Reads a number as typed, or says which of its faults it has.
pub fn number(text: &str, rule: &NumberRule) -> Result<Number, NumberFault> {
    let label = rule.label.clone();
    let typed = clean(text, rule.unit.as_deref());
    if typed.is_empty() {
        return Err(NumberFault::Empty(label));
    }
    let unsigned = typed.trim_start_matches(['-', '+', '\u{2212}']);
    if typed.chars().count() - unsigned.chars().count() > 1 {
        return Err(NumberFault::NotANumber { label, text: typed });
    }
    if let Some(fault) = shape_fault(&label, &typed, unsigned, rule) {
        return Err(fault);
    }
    if let Some(fault) = two_readings(&label, &typed, unsigned, rule) {
        return Err(fault);
    }
    let decimals = unsigned.find(['.', ',']).map_or(0, |mark| unsigned.len() - mark - 1) as u32;
    if decimals > rule.most_decimals {
        return Err(NumberFault::TooManyDecimals { label, text: typed, most: rule.most_decimals });
    }
    let plain = typed.replace('\u{2212}', "-").replace(',', ".");
    let Ok(value) = Decimal::from_str_exact(plain.trim_start_matches('+')) else {
        return Err(NumberFault::NotANumber { label, text: typed });
    };
    if value < rule.least || value > rule.most {
        let (least, most) = (rule.least, rule.most);
        return Err(NumberFault::OutsidePossible { label, text: typed, least, most });
    }
    Ok(Number { text: typed, value, decimals })
}

fn shape_fault(label: &str, typed: &str, unsigned: &str, rule: &NumberRule) -> Option<NumberFault> {
    let (label, text) = (label.to_string(), typed.to_string());
    let letters =
        unsigned.trim_start_matches(|c: char| c.is_ascii_digit() || c == '.' || c == ',' || c == ' ');
    if unsigned.chars().all(|c| c.is_ascii_digit() || c == '.' || c == ',') {
        let marks = unsigned.matches(['.', ',']).count();
        if marks > 1 {
            return Some(NumberFault::TwoMarks { label, text });
        }
        let bare = unsigned.starts_with(['.', ',']) || unsigned.ends_with(['.', ',']);
        return if bare { Some(NumberFault::BareMark { label, text }) } else { None };
    }
    match &rule.unit {
        Some(unit)
            if unsigned.starts_with(|c: char| c.is_ascii_digit())
                && !letters.is_empty()
                && letters.chars().all(|c| c.is_alphabetic() || "%°/·µ²³".contains(c))
                && !letters.starts_with(['e', 'E']) =>
        {
            Some(NumberFault::WrongUnit { label, text, unit: unit.clone() })
        }
        _ => Some(NumberFault::NotANumber { label, text }),
    }
}

/// `1,234` is 1.234 in half the world and 1234 in the other half: asked where both are possible here.
fn two_readings(label: &str, typed: &str, unsigned: &str, rule: &NumberRule) -> Option<NumberFault> {
    let mark = unsigned.find(',')?;
    let (whole, rest) = (&unsigned[..mark], &unsigned[mark + 1..]);
    if rest.len() != 3 || whole.len() > 3 || whole.starts_with('0') {
        return None;
    }
    let as_decimal = format!("{whole}.{rest}");
    let as_thousands = format!("{whole}{rest}");
    let possible = |text: &str| {
        Decimal::from_str_exact(text).is_ok_and(|value| value >= rule.least && value <= rule.most)
    };
    if !possible(&as_decimal) || !possible(&as_thousands) || rule.most_decimals < 3 {
        return None;
    }
    Some(NumberFault::TwoReadings {
        label: label.to_string(),
        text: typed.to_string(),
        as_decimal,
        as_thousands,
    })
}

/// Reads a whole number, such as a count of inversions.
pub fn count(text: &str, rule: &NumberRule) -> Result<Number, NumberFault> {
    let read = number(text, rule)?;
    if read.decimals > 0 {
        return Err(NumberFault::NotWhole { label: rule.label.clone() });
    }
    Ok(read)
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum DateFault {
    #[error("{0} is empty. Type a date such as 3 Mar 2027.")]
    Empty(String),
    #[error("{label}: “{text}” is not a date. Type it such as 3 Mar 2027 or 2027-03-03.")]
    NotADate { label: String, text: String },
}

/// Reads `3 mar 2027`, `3 March 2027`, `03/03/2027` (day first), `2027-03-03`.
pub fn date(text: &str, label: &str) -> Result<NaiveDate, DateFault> {
    let typed = clean(text, None);
    if typed.is_empty() {
        return Err(DateFault::Empty(label.to_string()));
    }
    let words = typed.split([' ', '/', '.', '-']).filter(|word| !word.is_empty()).collect::<Vec<_>>();
    let fault = || DateFault::NotADate { label: label.to_string(), text: typed.clone() };
    let [first, second, third] = words[..] else { return Err(fault()) };
    let (year, month, day) = if first.len() == 4 { (first, second, third) } else { (third, second, first) };
    if year.len() != 4 {
        return Err(fault());
    }
    let month = month_number(month).ok_or_else(fault)?;
    let (Ok(year), Ok(day)) = (year.parse(), day.parse()) else { return Err(fault()) };
    NaiveDate::from_ymd_opt(year, month, day).ok_or_else(fault)
}

fn month_number(word: &str) -> Option<u32> {
    if word.chars().all(|c| c.is_ascii_digit()) {
        return word.parse().ok();
    }
    const MONTHS: [&str; 12] = [
        "january",
        "february",
        "march",
        "april",
        "may",
        "june",
        "july",
        "august",
        "september",
        "october",
        "november",
        "december",
    ];
    let word = word.to_lowercase();
    let at = MONTHS.iter().position(|month| word.len() >= 3 && month.starts_with(&word))?;
    u32::try_from(at + 1).ok()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn rule() -> NumberRule {
        NumberRule::between("pH", 0, 2000).unit("mL")
    }

    /// screen_U08: harmless characters are ignored.
    #[test]
    fn harmless_characters_are_ignored() {
        for pasted in [
            "7.10",
            " 7.10 ",
            "\u{a0}7.10\u{a0}",
            "7.10 mL",
            "7.10mL",
            "\u{200b}7.10",
            "7.10\u{202f}mL",
            "+7.10",
            "7,10",
        ] {
            let read = number(pasted, &rule()).unwrap();
            assert_eq!(read.value, "7.10".parse().unwrap(), "{pasted:?}");
            assert_eq!(read.decimals, 2);
        }
    }

    /// screen_U05, screen_U42: each fault has its own sentence.
    #[test]
    fn each_fault_has_its_own_sentence() {
        let table = [
            ("", "Empty"),
            ("abc", "NotANumber"),
            ("--3", "NotANumber"),
            ("1e3", "NotANumber"),
            ("1 234", "NotANumber"),
            ("１２", "NotANumber"),
            ("1.2.3", "TwoMarks"),
            ("1,234.5", "TwoMarks"),
            (".5", "BareMark"),
            ("5.", "BareMark"),
            ("1.0000000001", "TooManyDecimals"),
            ("2001", "OutsidePossible"),
            ("-1", "OutsidePossible"),
            ("12 L", "WrongUnit"),
            ("1,234", "TwoReadings"),
        ];
        for (text, name) in table {
            let fault = number(text, &rule()).unwrap_err();
            assert!(format!("{fault:?}").starts_with(name), "{text:?}: {fault:?}");
        }
        assert!(matches!(count("3.5", &rule()), Err(NumberFault::NotWhole { .. })));
    }

    /// screen_U43: asked only where both readings are possible.
    #[test]
    fn a_comma_before_three_digits_is_asked_about_only_where_both_readings_can_be() {
        assert!(number("1,234", &NumberRule::between("V", 0, 2000)).is_err());
        assert_eq!(
            number("1,234", &NumberRule::between("pH", 0, 14)).unwrap().value,
            "1.234".parse().unwrap()
        );
        assert_eq!(
            number("0,234", &NumberRule::between("F", 0, 2000)).unwrap().value,
            "0.234".parse().unwrap()
        );
        assert_eq!(
            number("1,23", &NumberRule::between("V", 0, 2000)).unwrap().value,
            "1.23".parse().unwrap()
        );
    }

    /// screen_U44: the text stays, and ten tenths are one.
    #[test]
    fn the_text_stays_and_ten_tenths_are_one() {
        let tenth = number("0.1", &rule()).unwrap();
        let sum: Decimal = std::iter::repeat_n(tenth.value, 10).sum();
        assert_eq!(sum, Decimal::ONE);
        assert_eq!(number("7.10", &rule()).unwrap().text, "7.10");
    }

    /// screen_U17: months as words, day first.
    #[test]
    fn dates_are_read_as_people_write_them() {
        let expected = NaiveDate::from_ymd_opt(2027, 3, 4).unwrap();
        for text in ["4 mar 2027", "4 March 2027", "04/03/2027", "2027-03-04", " 4.3.2027 ", "4-Mar-2027"] {
            assert_eq!(date(text, "Made on"), Ok(expected), "{text}");
        }
        for text in ["", "31 Feb 2027", "4 mar 27", "march", "4 xyz 2027", "2027"] {
            assert!(date(text, "Made on").is_err(), "{text}");
        }
    }

    proptest! {
        #[test]
        fn what_is_written_is_read_back(units in -1_000_000_i64..1_000_000, scale in 0_u32..6) {
            let value = Decimal::new(units, scale);
            let read = number(&value.to_string(), &NumberRule::any("value")).unwrap();
            prop_assert_eq!(read.value, value);
        }

        #[test]
        fn no_text_makes_it_panic(text in "\\PC{0,24}") {
            let _ = number(&text, &rule());
            let _ = date(&text, "date");
        }
    }
}
