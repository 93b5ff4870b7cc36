//! The week: which day a pull belongs to, which cylinder readings are still to come, and how days are called.

use chrono::{Datelike, NaiveDate, Weekday};

use super::moment::{Moment, plus_days};

/// How many days the week page shows, today included.
pub const DAYS: i64 = 7;

const MONTHS: [&str; 12] = [
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
];

fn weekday_words(date: NaiveDate) -> &'static str {
    match date.weekday() {
        Weekday::Mon => "Monday",
        Weekday::Tue => "Tuesday",
        Weekday::Wed => "Wednesday",
        Weekday::Thu => "Thursday",
        Weekday::Fri => "Friday",
        Weekday::Sat => "Saturday",
        Weekday::Sun => "Sunday",
    }
}

/// `Thursday 3 December`.
pub fn day_words(date: NaiveDate) -> String {
    format!("{} {} {}", weekday_words(date), date.day(), MONTHS[date.month0() as usize])
}

/// `Thu 3`.
pub fn short_day(date: NaiveDate) -> String {
    format!("{} {}", &weekday_words(date)[..3], date.day())
}

/// The seven days from today on.
pub fn days(today: NaiveDate) -> Vec<NaiveDate> {
    (0..DAYS).map(|day| plus_days(today, day)).collect()
}

/// The day under which a pull stands: its due date, or today while its window is open and the due date is past.
pub fn day_of(due_on: NaiveDate, today: NaiveDate) -> NaiveDate {
    due_on.max(today)
}

/// First and last day of the coming weeks, the first one after the seven days.
pub fn coming_weeks(today: NaiveDate) -> [(NaiveDate, NaiveDate); 4] {
    [1, 2, 3, 4].map(|number| {
        let first = plus_days(today, DAYS * number);
        (first, plus_days(first, DAYS - 1))
    })
}

/// A cylinder that was filled and shaken, with the minutes at which it is read and those read already.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Cylinder {
    pub shaken_at: Moment,
    pub planned_minutes: Vec<u32>,
    pub read_minutes: Vec<u32>,
}

impl Cylinder {
    /// Minute and instant of each reading still to come, the soonest first.
    pub fn to_read(&self) -> Vec<(u32, Moment)> {
        let mut minutes: Vec<u32> = self
            .planned_minutes
            .iter()
            .copied()
            .filter(|minute| !self.read_minutes.contains(minute))
            .collect();
        minutes.sort_unstable();
        minutes.into_iter().map(|minute| (minute, self.shaken_at.plus_minutes(i64::from(minute)))).collect()
    }
}

/// `30 min`, `2 h`, `7 d`: the age of a cylinder reading.
pub fn minute_words(minute: u32) -> String {
    match minute {
        0 => "0 min".to_string(),
        minute if minute % 1440 == 0 && minute > 1440 => format!("{} d", minute / 1440),
        minute if minute % 60 == 0 => format!("{} h", minute / 60),
        minute => format!("{minute} min"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    #[test]
    fn a_pull_stands_under_its_due_day_or_under_today() {
        let today = day("2026-12-01");
        for (due_on, expected) in
            [("2026-11-28", "2026-12-01"), ("2026-12-01", "2026-12-01"), ("2026-12-04", "2026-12-04")]
        {
            assert_eq!(day_of(day(due_on), today), day(expected));
        }
        assert_eq!(days(today)[6], day("2026-12-07"));
        assert_eq!(coming_weeks(today)[0], (day("2026-12-08"), day("2026-12-14")));
        assert_eq!(coming_weeks(today)[3], (day("2026-12-29"), day("2027-01-04")));
        assert_eq!(day_words(day("2026-12-03")), "Thursday 3 December");
    }

    #[test]
    fn the_readings_to_come_are_those_planned_and_not_read() {
        let shaken_at = Moment::new("2026-12-01T10:00:00Z".parse().unwrap(), chrono_tz::Europe::London);
        let cylinder = Cylinder { shaken_at, planned_minutes: vec![0, 1440, 30], read_minutes: vec![0] };
        let to_read = cylinder.to_read();
        assert_eq!(to_read.iter().map(|(minute, _)| *minute).collect::<Vec<_>>(), [30, 1440]);
        assert_eq!(to_read[1].1.shown(), "2 Dec 2026, 10:00 (+00:00)");
    }

    #[test]
    fn reading_ages_have_words() {
        for (minute, words) in [(0, "0 min"), (45, "45 min"), (120, "2 h"), (1440, "24 h"), (10080, "7 d")] {
            assert_eq!(minute_words(minute), words);
        }
    }
}
