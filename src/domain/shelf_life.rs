//! Shelf life: assigned by QA, never taken from a computation (decision A12), and the expiry that follows.

use chrono::{Datelike, NaiveDate};

use super::moment::{plus_days, plus_months};
use super::refusal::NamedReason;

/// The controlled list of storage statements (req_A22: none says "room temperature" or "ambient").
pub const STORAGE_STATEMENTS: [&str; 8] = [
    "Do not store above 25 °C",
    "Do not store above 30 °C",
    "Store below 25 °C. Do not freeze",
    "Store in a refrigerator (2 °C to 8 °C)",
    "Store in a refrigerator (2 °C to 8 °C). Do not freeze",
    "Store in the original pack to protect from light. Do not store above 25 °C",
    "Keep the container tightly closed. Do not store above 25 °C",
    "No special storage conditions",
];

/// How an expiry is printed and what it means.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ExpiryFormat {
    /// Exact calendar months after the day it was made.
    Day,
    /// Month and year, read as its last day, never later than the exact date.
    Month,
    /// Month and year of the exact date, read as its last day, so up to a month later: by approval only.
    MonthEnd,
}

impl ExpiryFormat {
    pub const ALL: [ExpiryFormat; 3] = [ExpiryFormat::Day, ExpiryFormat::Month, ExpiryFormat::MonthEnd];

    /// As stored in `shelf_life_assignment.expiry_format`.
    pub fn code(self) -> &'static str {
        match self {
            ExpiryFormat::Day => "day",
            ExpiryFormat::Month => "month",
            ExpiryFormat::MonthEnd => "month end",
        }
    }

    pub fn words(self) -> &'static str {
        match self {
            ExpiryFormat::Day => "day: the exact date",
            ExpiryFormat::Month => "month: never later than the exact date",
            ExpiryFormat::MonthEnd => "month end: the end of the exact date's month, by approval",
        }
    }

    pub fn from_code(code: &str) -> Option<ExpiryFormat> {
        ExpiryFormat::ALL.into_iter().find(|format| format.code() == code)
    }
}

/// The last day a lot may be used: calendar months after it was made, then as its format reads.
pub fn expiry(made_on: NaiveDate, months: u32, format: ExpiryFormat) -> NaiveDate {
    let exact = plus_months(made_on, months);
    match format {
        ExpiryFormat::Day => exact,
        ExpiryFormat::MonthEnd => month_end(exact),
        ExpiryFormat::Month if exact == month_end(exact) => exact,
        ExpiryFormat::Month => plus_days(exact, -i64::from(exact.day())),
    }
}

/// From which day the shelf life counts, and by which rule.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LifeStart {
    pub on: NaiveDate,
    pub rule: String,
}

/// The start of the shelf life of a lot that is released on a day: the release, or the production where more than
/// `most_days` passed between them (EMA CPMP/QWP/072/96: 30 days). With 0 days it is always the production.
pub fn life_start(made_on: NaiveDate, released_on: NaiveDate, most_days: i64) -> LifeStart {
    let days = (released_on - made_on).num_days();
    let after = if days == 1 { "1 day after it".to_string() } else { format!("{days} days after it") };
    let made = |rule: String| LifeStart { on: made_on, rule };
    match (most_days, days) {
        (0, _) => made("from the day it was made, by the site's setting".to_string()),
        (most, days) if days > most => made(format!(
            "from the day it was made, because the release comes {after}, later than {most} days"
        )),
        (most, _) => LifeStart {
            on: released_on,
            rule: format!("from the release, which comes {after} was made, within {most} days"),
        },
    }
}

fn month_end(date: NaiveDate) -> NaiveDate {
    let first = plus_days(date, 1 - i64::from(date.day()));
    plus_days(plus_months(first, 1), -1)
}

/// An assignment about to be recorded.
#[derive(Clone, Debug)]
pub struct NewShelfLife {
    pub presentation: i64,
    pub market: String,
    pub storage_statement: String,
    pub months: u32,
    pub in_use_days: Option<u32>,
    /// `tentative` or `verified`.
    pub basis: String,
    /// Report, protocol or registration that it rests on.
    pub reference: String,
    pub effective_from: NaiveDate,
    pub expiry_format: ExpiryFormat,
}

impl NewShelfLife {
    /// The text that is signed.
    pub fn canonical(&self) -> String {
        let in_use = self.in_use_days.map_or("none".to_string(), |days| days.to_string());
        format!(
            "shelf life of presentation {}\nmarket {}\nstorage {}\nmonths {}\nin-use days {in_use}\nbasis {}\n\
             reference {}\neffective from {}\nexpiry format {}",
            self.presentation,
            self.market,
            self.storage_statement,
            self.months,
            self.basis,
            self.reference,
            self.effective_from,
            self.expiry_format.code()
        )
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ShelfLifeRefusal {
    #[error(
        "An assignment holds for lots made from its day on; earlier lots stay as they are. Type today or a later day."
    )]
    EffectiveInPast,
    #[error("A shelf life is 1 to 120 months.")]
    MonthsImpossible,
    #[error("Choose a statement from the list.")]
    StatementNotListed,
}

impl NamedReason for ShelfLifeRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            ShelfLifeRefusal::EffectiveInPast => "effective_from",
            ShelfLifeRefusal::MonthsImpossible => "months",
            ShelfLifeRefusal::StatementNotListed => "storage_statement",
        };
        Some(field.to_string())
    }
}

/// Refuses in this order: the months, the statement, a first day that is past.
pub fn may_assign(new: &NewShelfLife, today: NaiveDate) -> Result<(), ShelfLifeRefusal> {
    if !(1..=120).contains(&new.months) {
        return Err(ShelfLifeRefusal::MonthsImpossible);
    }
    if !STORAGE_STATEMENTS.contains(&new.storage_statement.as_str()) {
        return Err(ShelfLifeRefusal::StatementNotListed);
    }
    if new.effective_from < today {
        return Err(ShelfLifeRefusal::EffectiveInPast);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    /// Decision A12: day exact; month never later than exact; month end by approval.
    #[test]
    fn an_expiry_is_counted_in_calendar_months_and_read_as_its_format_says() {
        let table = [
            ("2026-01-15", 24, "2028-01-15", "2027-12-31", "2028-01-31"),
            ("2026-01-31", 1, "2026-02-28", "2026-02-28", "2026-02-28"),
            ("2026-01-31", 25, "2028-02-29", "2028-02-29", "2028-02-29"),
            ("2026-03-01", 36, "2029-03-01", "2029-02-28", "2029-03-31"),
            ("2026-12-01", 12, "2027-12-01", "2027-11-30", "2027-12-31"),
            ("2026-11-30", 3, "2027-02-28", "2027-02-28", "2027-02-28"),
            ("2026-08-31", 18, "2028-02-29", "2028-02-29", "2028-02-29"),
            ("2026-08-30", 18, "2028-02-29", "2028-02-29", "2028-02-29"),
            ("2026-06-30", 12, "2027-06-30", "2027-06-30", "2027-06-30"),
            ("2026-02-28", 12, "2027-02-28", "2027-02-28", "2027-02-28"),
            ("2028-02-28", 12, "2029-02-28", "2029-02-28", "2029-02-28"),
            ("2027-02-28", 12, "2028-02-28", "2028-01-31", "2028-02-29"),
        ];
        for (made, months, exact, month, end) in table {
            assert_eq!(expiry(day(made), months, ExpiryFormat::Day), day(exact), "{made} + {months}");
            assert_eq!(
                expiry(day(made), months, ExpiryFormat::Month),
                day(month),
                "{made} + {months}, month"
            );
            assert_eq!(expiry(day(made), months, ExpiryFormat::MonthEnd), day(end), "{made} + {months}, end");
        }
    }

    /// req_L11: the release starts the shelf life, the production where more than 30 days passed; the 31-day case.
    #[test]
    fn the_shelf_life_starts_at_the_release_or_after_30_days_at_the_production() {
        let table = [
            ("2026-11-01", "2026-11-01", 30, "2026-11-01"),
            ("2026-11-01", "2026-12-01", 30, "2026-12-01"),
            ("2026-11-01", "2026-12-02", 30, "2026-11-01"),
            ("2026-11-01", "2026-11-20", 0, "2026-11-01"),
        ];
        for (made, released, most, expected) in table {
            assert_eq!(life_start(day(made), day(released), most).on, day(expected), "{made} {released}");
        }
        let rule = life_start(day("2026-11-01"), day("2026-12-02"), 30).rule;
        assert!(rule.contains("31 days after it, later than 30 days"), "{rule}");
    }

    proptest! {
        #[test]
        fn a_month_is_never_later_than_the_exact_day_and_is_a_month_end(offset in 0_i64..4000, months in 1_u32..120) {
            let made = plus_days(day("2024-01-01"), offset);
            let exact = expiry(made, months, ExpiryFormat::Day);
            let month = expiry(made, months, ExpiryFormat::Month);
            prop_assert!(month <= exact && (exact - month).num_days() < 31);
            prop_assert_eq!(plus_days(month, 1).day(), 1);
            prop_assert!(expiry(made, months, ExpiryFormat::MonthEnd) >= exact);
        }
    }

    #[test]
    fn an_assignment_never_reaches_back() {
        let new = NewShelfLife {
            presentation: 1,
            market: "United Kingdom".to_string(),
            storage_statement: STORAGE_STATEMENTS[0].to_string(),
            months: 24,
            in_use_days: None,
            basis: "tentative".to_string(),
            reference: "report 12".to_string(),
            effective_from: day("2026-12-01"),
            expiry_format: ExpiryFormat::Day,
        };
        assert_eq!(may_assign(&new, day("2026-12-01")), Ok(()));
        assert_eq!(may_assign(&new, day("2026-12-02")), Err(ShelfLifeRefusal::EffectiveInPast));
        let free = NewShelfLife { storage_statement: "Store at ambient".to_string(), ..new.clone() };
        assert_eq!(may_assign(&free, day("2026-12-01")), Err(ShelfLifeRefusal::StatementNotListed));
        let long = NewShelfLife { months: 121, ..free };
        assert_eq!(may_assign(&long, day("2026-12-01")), Err(ShelfLifeRefusal::MonthsImpossible));
    }
}
