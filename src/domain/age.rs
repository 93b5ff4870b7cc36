//! The planned age of a pull: months on a stability arm, days in use or in an imported file.

use chrono::NaiveDate;
use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::moment::{plus_days, plus_months};

/// A planned age.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Age {
    Months(u32),
    Days(u32),
}

impl Age {
    /// `Initial`, `1 month`, `18 months`, `day 14`.
    pub fn words(self) -> String {
        match self {
            Age::Months(0) | Age::Days(0) => "Initial".to_string(),
            Age::Months(1) => "1 month".to_string(),
            Age::Months(months) => format!("{months} months"),
            Age::Days(days) => format!("day {days}"),
        }
    }

    /// The due date: calendar months or days after time zero.
    pub fn due_on(self, time_zero: NaiveDate) -> NaiveDate {
        match self {
            Age::Months(months) => plus_months(time_zero, months),
            Age::Days(days) => plus_days(time_zero, i64::from(days)),
        }
    }

    /// The nominal age in months, for charts and grouping; days count 30.4375 to the month.
    pub fn nominal_months(self) -> Decimal {
        match self {
            Age::Months(months) => Decimal::from(months),
            Age::Days(days) => Decimal::from(days) / Decimal::new(304_375, 4),
        }
    }
}

/// The actual age in months of a pull taken on a date: days / 30.4375 (decision A11).
pub fn actual_months(time_zero: NaiveDate, taken_on: NaiveDate) -> Decimal {
    Decimal::from((taken_on - time_zero).num_days()) / Decimal::new(304_375, 4)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ages_have_words_due_dates_and_months() {
        let zero = NaiveDate::from_ymd_opt(2026, 8, 31).unwrap();
        assert_eq!(Age::Months(6).due_on(zero), NaiveDate::from_ymd_opt(2027, 2, 28).unwrap());
        assert_eq!(Age::Days(14).due_on(zero), NaiveDate::from_ymd_opt(2026, 9, 14).unwrap());
        assert_eq!(Age::Months(0).words(), "Initial");
        assert_eq!(Age::Months(18).words(), "18 months");
        assert_eq!(Age::Days(14).words(), "day 14");
        assert_eq!(actual_months(zero, zero), Decimal::ZERO);
    }
}
