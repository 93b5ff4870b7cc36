//! On which days the site is open, and how long each person is at the bench: what the week's sums stand against.

use chrono::{Datelike, NaiveDate, Weekday};

use super::moment::{date_from_stored, date_stored};
use super::refusal::NamedReason;

/// The days of a week as the form and the history call them.
pub const WEEKDAYS: [(Weekday, &str); 7] = [
    (Weekday::Mon, "Monday"),
    (Weekday::Tue, "Tuesday"),
    (Weekday::Wed, "Wednesday"),
    (Weekday::Thu, "Thursday"),
    (Weekday::Fri, "Friday"),
    (Weekday::Sat, "Saturday"),
    (Weekday::Sun, "Sunday"),
];

/// Names of the settings that hold this, `HOURS` with the number of the account behind it.
pub const CLOSED_WEEKDAYS: &str = "days.closed-weekdays";
pub const CLOSED_DATES: &str = "days.closed-dates";
pub const MINUTES_A_DAY: &str = "days.minutes-of-account.";

/// The most minutes a day has.
pub const MOST_MINUTES: u32 = 24 * 60;
/// The most closed dates kept: ten years of public holidays.
pub const MOST_DATES: usize = 200;

/// Closed days of the site and stated bench time of its people. Nothing stated: every day is open, no time is compared.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct WorkingDays {
    pub closed_weekdays: Vec<Weekday>,
    /// Single closed dates, such as public holidays, in order.
    pub closed_dates: Vec<NaiveDate>,
    /// Account and minutes at the bench on an open day.
    pub minutes_a_day: Vec<(i64, u32)>,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum WorkingDaysRefusal {
    #[error("All seven weekdays are closed, so nothing could ever be taken. Leave at least one open.")]
    WeekAllClosed,
    #[error("{0} closed dates; at most {MOST_DATES} fit. Leave out those that are past.")]
    TooManyDates(usize),
    #[error("{0} minutes a day is more than a day has.")]
    DayTooLong(u32),
}

impl NamedReason for WorkingDaysRefusal {}

impl WorkingDays {
    pub fn is_closed(&self, day: NaiveDate) -> bool {
        self.closed_weekdays.contains(&day.weekday()) || self.closed_dates.contains(&day)
    }

    /// A person's stated minutes on a day; none on a closed one. `None`: nothing is stated for the person.
    pub fn minutes_of(&self, account: i64, day: NaiveDate) -> Option<u32> {
        let (_, minutes) = self.minutes_a_day.iter().find(|(known, _)| *known == account)?;
        Some(if self.is_closed(day) { 0 } else { *minutes })
    }

    /// All stated minutes of a day together; `None` where nobody's are stated.
    pub fn minutes_on(&self, day: NaiveDate) -> Option<u32> {
        let stated = self.minutes_a_day.iter().filter_map(|(account, _)| self.minutes_of(*account, day));
        (!self.minutes_a_day.is_empty()).then(|| stated.sum())
    }

    /// The closed days of a span that can be taken from `first` to `last`, both included.
    pub fn closed_between(&self, first: NaiveDate, last: NaiveDate) -> Vec<NaiveDate> {
        first.iter_days().take_while(|day| *day <= last).filter(|day| self.is_closed(*day)).collect()
    }

    /// As stored: ISO numbers of weekdays, 1 is Monday.
    pub fn weekdays_stored(&self) -> String {
        let numbers = self.closed_weekdays.iter().map(|day| day.number_from_monday().to_string());
        numbers.collect::<Vec<_>>().join(",")
    }

    /// As stored: ISO dates.
    pub fn dates_stored(&self) -> String {
        self.closed_dates.iter().map(|day| date_stored(*day)).collect::<Vec<_>>().join(",")
    }

    /// From the settings as stored.
    pub fn of_stored(weekdays: &str, dates: &str, minutes_a_day: Vec<(i64, u32)>) -> WorkingDays {
        let weekday = |number: &str| {
            WEEKDAYS.iter().map(|(day, _)| *day).find(|day| day.number_from_monday().to_string() == number)
        };
        WorkingDays {
            closed_weekdays: weekdays.split(',').filter_map(weekday).collect(),
            closed_dates: dates.split(',').filter_map(date_from_stored).collect(),
            minutes_a_day,
        }
    }
}

/// Refuses in this order: no open weekday, too many dates, a day longer than a day.
pub fn may_be_set(days: &WorkingDays) -> Result<(), WorkingDaysRefusal> {
    if WEEKDAYS.iter().all(|(day, _)| days.closed_weekdays.contains(day)) {
        return Err(WorkingDaysRefusal::WeekAllClosed);
    }
    if days.closed_dates.len() > MOST_DATES {
        return Err(WorkingDaysRefusal::TooManyDates(days.closed_dates.len()));
    }
    match days.minutes_a_day.iter().find(|(_, minutes)| *minutes > MOST_MINUTES) {
        Some((_, minutes)) => Err(WorkingDaysRefusal::DayTooLong(*minutes)),
        None => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn weekend_and_holiday() -> WorkingDays {
        WorkingDays {
            closed_weekdays: vec![Weekday::Sat, Weekday::Sun],
            closed_dates: vec![day("2026-12-25")],
            minutes_a_day: vec![(4, 360), (5, 120)],
        }
    }

    #[test]
    fn a_closed_day_has_no_stated_minutes() {
        let days = weekend_and_holiday();
        for (on, is_closed, minutes) in [
            ("2026-12-24", false, 480),
            ("2026-12-25", true, 0),
            ("2026-12-26", true, 0),
            ("2026-12-28", false, 480),
        ] {
            assert_eq!(days.is_closed(day(on)), is_closed, "{on}");
            assert_eq!(days.minutes_on(day(on)), Some(minutes), "{on}");
        }
        assert_eq!(days.minutes_of(6, day("2026-12-24")), None);
        assert_eq!(WorkingDays::default().minutes_on(day("2026-12-26")), None);
        let closed = days.closed_between(day("2026-12-24"), day("2026-12-28"));
        assert_eq!(closed, [day("2026-12-25"), day("2026-12-26"), day("2026-12-27")]);
    }

    #[test]
    fn what_is_stored_comes_back() {
        let days = weekend_and_holiday();
        assert_eq!(days.weekdays_stored(), "6,7");
        let back =
            WorkingDays::of_stored(&days.weekdays_stored(), &days.dates_stored(), days.minutes_a_day.clone());
        assert_eq!(back, days);
        assert_eq!(WorkingDays::of_stored("", "", Vec::new()), WorkingDays::default());
    }

    #[test]
    fn refusals_come_in_their_order() {
        let good = weekend_and_holiday();
        let all = WEEKDAYS.map(|(day, _)| day).to_vec();
        let many = vec![day("2026-12-25"); 201];
        let table = [
            (good.clone(), ""),
            (
                WorkingDays { closed_weekdays: all, closed_dates: many.clone(), ..good.clone() },
                "WeekAllClosed",
            ),
            (
                WorkingDays { closed_dates: many, minutes_a_day: vec![(4, 1441)], ..good.clone() },
                "TooManyDates",
            ),
            (WorkingDays { minutes_a_day: vec![(4, 1441)], ..good }, "DayTooLong"),
        ];
        for (days, expected) in table {
            let said = may_be_set(&days).err().map(|why| format!("{why:?}")).unwrap_or_default();
            assert!(said.starts_with(expected) && said.is_empty() == expected.is_empty(), "{said}");
        }
    }
}
