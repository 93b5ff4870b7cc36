//! Pull windows: how many days before and after the due date a pull may be taken.
//!
//! No guideline gives days; the defaults are common practice (decision A11) and a protocol may state its own.

use chrono::NaiveDate;

use super::age::Age;
use super::moment::{date_shown, month_shown, plus_days, push_number};
use super::setting::WINDOWS;

/// First and last calendar date of the site on which a pull is in its window.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Window {
    pub earliest_on: NaiveDate,
    pub latest_on: NaiveDate,
}

/// The site's default windows: days after the due date for each class of age, young to old.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Defaults {
    days_after: [u32; 5],
}

impl Default for Defaults {
    /// In use up to 3 days: the same day (two hours after, which a calendar date cannot tell); 4 to 28 days: one
    /// day after; up to 2 months: 3 days after; 3 to 12 months: 7 days after; later: 14 days after.
    fn default() -> Defaults {
        Defaults { days_after: WINDOWS.map(|setting| setting.default.try_into().unwrap_or(0)) }
    }
}

impl Defaults {
    /// From the values of [`WINDOWS`] as stored, in its order; what is not stored has its default.
    pub fn of_stored(stored: [Option<String>; 5]) -> Defaults {
        let mut days_after = [0; 5];
        for (place, (setting, text)) in WINDOWS.iter().zip(stored).enumerate() {
            days_after[place] = setting.value(text.as_deref()).try_into().unwrap_or(0);
        }
        Defaults { days_after }
    }

    /// Days allowed before and after the due date. Never before.
    pub fn days(&self, age: Age) -> (u32, u32) {
        let class = match age {
            Age::Days(0..=3) => 0,
            Age::Days(4..=28) => 1,
            Age::Days(29..=75) | Age::Months(0..=2) => 2,
            Age::Days(76..=365) | Age::Months(3..=12) => 3,
            Age::Days(_) | Age::Months(_) => 4,
        };
        (0, self.days_after[class])
    }
}

/// The window of a pull. `stated` is the protocol's own, else the site's default holds; the last point of an arm
/// is never early.
pub fn window(
    age: Age,
    due_on: NaiveDate,
    stated: Option<(u32, u32)>,
    is_last: bool,
    defaults: &Defaults,
) -> Window {
    let (before, after) = stated.unwrap_or_else(|| defaults.days(age));
    let before = if is_last { 0 } else { before };
    Window {
        earliest_on: plus_days(due_on, -i64::from(before)),
        latest_on: plus_days(due_on, i64::from(after)),
    }
}

impl Window {
    /// `3–10 Mar 2027`, `28 Nov–2 Dec 2026`, `3 Mar 2027`.
    pub fn words(&self) -> String {
        let (first, last) = self.ends();
        first + &last
    }

    /// The words in two parts, so that a page can stress the last day: `3–` and `10 Mar 2027`.
    pub fn ends(&self) -> (String, String) {
        use chrono::Datelike;
        let (first, last) = (self.earliest_on, self.latest_on);
        let mut first_words = String::with_capacity(16);
        match (first.year() == last.year(), first.month() == last.month()) {
            _ if first == last => return (first_words, date_shown(last)),
            (true, true) => push_number(&mut first_words, first.day()),
            (true, false) => {
                push_number(&mut first_words, first.day());
                first_words.push(' ');
                first_words.push_str(month_shown(first));
            }
            _ => first_words.push_str(&date_shown(first)),
        }
        first_words.push('–');
        (first_words, date_shown(last))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    /// req_C13, decision A11: the defaults.
    #[test]
    fn default_windows_follow_the_age() {
        let table = [
            (Age::Days(1), (0, 0)),
            (Age::Days(3), (0, 0)),
            (Age::Days(4), (0, 1)),
            (Age::Days(28), (0, 1)),
            (Age::Months(0), (0, 3)),
            (Age::Months(1), (0, 3)),
            (Age::Months(2), (0, 3)),
            (Age::Months(3), (0, 7)),
            (Age::Months(12), (0, 7)),
            (Age::Months(18), (0, 14)),
            (Age::Months(60), (0, 14)),
        ];
        for (age, expected) in table {
            assert_eq!(Defaults::default().days(age), expected, "{age:?}");
        }
        let own = Defaults::of_stored([None, None, Some("5".to_string()), None, None]);
        assert_eq!(own.days(Age::Months(1)), (0, 5));
        assert_eq!(own.days(Age::Months(3)), (0, 7));
    }

    #[test]
    fn a_stated_window_counts_but_the_last_point_is_never_early() {
        let due = day("2027-03-03");
        let table = [
            (None, false, "2027-03-03", "2027-03-10", "3–10 Mar 2027"),
            (Some((5, 5)), false, "2027-02-26", "2027-03-08", "26 Feb–8 Mar 2027"),
            (Some((5, 5)), true, "2027-03-03", "2027-03-08", "3–8 Mar 2027"),
            (Some((0, 0)), false, "2027-03-03", "2027-03-03", "3 Mar 2027"),
        ];
        for (stated, is_last, earliest, latest, words) in table {
            let found = window(Age::Months(12), due, stated, is_last, &Defaults::default());
            assert_eq!(found, Window { earliest_on: day(earliest), latest_on: day(latest) });
            assert_eq!(found.words(), words);
        }
        let over_new_year = Window { earliest_on: day("2026-12-30"), latest_on: day("2027-01-06") };
        assert_eq!(over_new_year.words(), "30 Dec 2026–6 Jan 2027");
    }
}
