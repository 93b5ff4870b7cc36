//! Instants in UTC with the site's zone, and calendar dates of the site.

use chrono::{DateTime, Datelike, Days, Months, NaiveDate, Offset, SecondsFormat, TimeZone, Utc};
use chrono_tz::Tz;

/// An instant with the zone of the site, so that its calendar date and offset are known.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Moment {
    pub utc: DateTime<Utc>,
    pub zone: Tz,
}

impl Moment {
    pub fn new(utc: DateTime<Utc>, zone: Tz) -> Moment {
        Moment { utc, zone }
    }

    /// The instant as stored: UTC, milliseconds, `2026-12-01T13:06:23.000Z`. Sorts as text.
    pub fn stored(&self) -> String {
        self.utc.to_rfc3339_opts(SecondsFormat::Millis, true)
    }

    /// Reads what [`Moment::stored`] wrote.
    pub fn from_stored(text: &str, zone: Tz) -> Option<Moment> {
        let utc = DateTime::parse_from_rfc3339(text).ok()?.with_timezone(&Utc);
        Some(Moment { utc, zone })
    }

    /// The calendar date of the site at this instant.
    pub fn date(&self) -> NaiveDate {
        self.utc.with_timezone(&self.zone).date_naive()
    }

    /// The site's offset from UTC at this instant, in minutes.
    pub fn offset_minutes(&self) -> i32 {
        self.utc.with_timezone(&self.zone).offset().fix().local_minus_utc() / 60
    }

    /// `3 Mar 2027, 09:05 (+01:00)`: site time with its offset, month in letters.
    pub fn shown(&self) -> String {
        let local = self.utc.with_timezone(&self.zone);
        format!("{}, {} ({})", date_shown(local.date_naive()), local.format("%H:%M"), local.format("%:z"))
    }

    /// `14:32:07`, site time, for the save line.
    pub fn clock_shown(&self) -> String {
        self.utc.with_timezone(&self.zone).format("%H:%M:%S").to_string()
    }

    /// RFC 3339 in site time with the offset, for exports.
    pub fn exported(&self) -> String {
        self.utc.with_timezone(&self.zone).to_rfc3339_opts(SecondsFormat::Millis, false)
    }

    /// The instant of a wall-clock time of the site; at a clock change the earlier of two, the later of none.
    pub fn of_site(date: NaiveDate, hour: u32, minute: u32, zone: Tz) -> Option<Moment> {
        let local = date.and_hms_opt(hour, minute, 0)?;
        let utc = match zone.from_local_datetime(&local) {
            chrono::LocalResult::Single(found) => found.with_timezone(&Utc),
            chrono::LocalResult::Ambiguous(earlier, _) => earlier.with_timezone(&Utc),
            chrono::LocalResult::None => zone
                .from_local_datetime(&(local + chrono::Duration::hours(1)))
                .earliest()?
                .with_timezone(&Utc),
        };
        Some(Moment { utc, zone })
    }

    pub fn plus_minutes(&self, minutes: i64) -> Moment {
        Moment { utc: self.utc + chrono::Duration::minutes(minutes), zone: self.zone }
    }

    pub fn plus_seconds(&self, seconds: i64) -> Moment {
        Moment { utc: self.utc + chrono::Duration::seconds(seconds), zone: self.zone }
    }
}

const MONTHS: [&str; 12] =
    ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

/// `Mar`.
pub fn month_shown(date: NaiveDate) -> &'static str {
    MONTHS[date.month0() as usize]
}

/// `3 Mar 2027`: the one way a date is shown.
pub fn date_shown(date: NaiveDate) -> String {
    let mut text = String::with_capacity(12);
    push_number(&mut text, date.day());
    text.push(' ');
    text.push_str(month_shown(date));
    text.push(' ');
    match u32::try_from(date.year()) {
        Ok(year) => push_number(&mut text, year),
        Err(_) => text.push_str(&date.year().to_string()),
    }
    text
}

/// Writes a number without the machinery of formatting: lists of work show hundreds of dates.
pub fn push_number(text: &mut String, number: u32) {
    if number > 9 {
        push_number(text, number / 10);
    }
    text.push(char::from(b'0' + (number % 10) as u8));
}

/// `2027-03-03`, as stored.
pub fn date_stored(date: NaiveDate) -> String {
    let Some(year) = u32::try_from(date.year()).ok().filter(|year| *year <= 9999) else {
        return date.format("%Y-%m-%d").to_string();
    };
    let mut text = String::with_capacity(10);
    let mut digits = |number: u32, ten: u32| {
        let mut place = ten;
        while place > 0 {
            text.push(char::from(b'0' + (number / place % 10) as u8));
            place /= 10;
        }
    };
    digits(year, 1000);
    digits(100 + date.month(), 10);
    digits(100 + date.day(), 10);
    text.insert(4, '-');
    text.insert(7, '-');
    text
}

/// Only what [`date_stored`] writes for the years 0 to 9999.
pub fn date_from_stored(text: &str) -> Option<NaiveDate> {
    let [y0, y1, y2, y3, b'-', m0, m1, b'-', d0, d1] = *text.as_bytes() else { return None };
    let number = |digits: &[u8]| {
        digits
            .iter()
            .try_fold(0, |sum, digit| digit.is_ascii_digit().then(|| sum * 10 + u32::from(digit - b'0')))
    };
    let year = i32::try_from(number(&[y0, y1, y2, y3])?).ok()?;
    NaiveDate::from_ymd_opt(year, number(&[m0, m1])?, number(&[d0, d1])?)
}

/// Adds calendar months; a day that does not exist becomes the last day of the month
/// (31 Jan + 1 month = 28 or 29 Feb). Common practice for due dates.
pub fn plus_months(date: NaiveDate, months: u32) -> NaiveDate {
    date.checked_add_months(Months::new(months)).unwrap_or(date)
}

pub fn plus_days(date: NaiveDate, days: i64) -> NaiveDate {
    let moved = if days >= 0 {
        date.checked_add_days(Days::new(days.unsigned_abs()))
    } else {
        date.checked_sub_days(Days::new(days.unsigned_abs()))
    };
    moved.unwrap_or(date)
}

/// `2 days late`, `closes today`, `closes in 3 days`: always shown beside the date itself.
pub fn until_shown(today: NaiveDate, last_day: NaiveDate) -> String {
    let days = (last_day - today).num_days();
    let number = u32::try_from(days.unsigned_abs()).unwrap_or(u32::MAX);
    let mut text = String::with_capacity(24);
    match days {
        0 => text.push_str("closes today 23:59"),
        1 => text.push_str("closes tomorrow 23:59"),
        -1 => text.push_str("1 day late"),
        2.. => {
            text.push_str("closes in ");
            push_number(&mut text, number);
            text.push_str(" days");
        }
        _ => {
            push_number(&mut text, number);
            text.push_str(" days late");
        }
    }
    text
}

/// `opens in 3 days`, for a first day to come.
pub fn opens_shown(today: NaiveDate, first_day: NaiveDate) -> String {
    let days = (first_day - today).num_days();
    let mut text = String::with_capacity(24);
    text.push_str("opens in ");
    push_number(&mut text, u32::try_from(days).unwrap_or_default());
    text.push_str(if days == 1 { " day" } else { " days" });
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        date_from_stored(text).unwrap()
    }

    /// req_C14: due date by calendar months, clipped at the month's end, also in leap years.
    #[test]
    fn months_clip_at_the_end_of_the_month() {
        let table = [
            ("2026-01-31", 1, "2026-02-28"),
            ("2028-01-31", 1, "2028-02-29"),
            ("2026-08-31", 6, "2027-02-28"),
            ("2027-08-31", 6, "2028-02-29"),
            ("2028-02-29", 12, "2029-02-28"),
            ("2026-12-01", 3, "2027-03-01"),
            ("2026-11-30", 3, "2027-02-28"),
            ("2026-10-31", 18, "2028-04-30"),
            ("2026-05-15", 36, "2029-05-15"),
        ];
        for (start, months, expected) in table {
            assert_eq!(plus_months(day(start), months), day(expected), "{start} + {months}");
        }
    }

    #[test]
    fn dates_are_stored_and_read_back_as_the_calendar_says() {
        let first = NaiveDate::from_ymd_opt(1999, 12, 25).unwrap();
        for days in (0..20_000).step_by(17) {
            let date = plus_days(first, days);
            assert_eq!(date_stored(date), date.format("%Y-%m-%d").to_string());
            assert_eq!(date_from_stored(&date_stored(date)), Some(date));
            assert_eq!(date_shown(date), date.format("%-d %b %Y").to_string());
        }
        for wrong in ["", "2027-3-03", "2027-02-29", "2027-13-01", "27-03-03", "2027/03/03", "2027-03-0é"] {
            assert_eq!(date_from_stored(wrong), None, "{wrong}");
        }
    }

    #[test]
    fn the_date_is_the_sites_date_and_the_offset_is_shown() {
        let utc = "2026-06-30T23:30:00Z".parse::<DateTime<Utc>>().unwrap();
        let moment = Moment::new(utc, chrono_tz::Europe::London);
        assert_eq!(moment.date(), day("2026-07-01"));
        assert_eq!(moment.shown(), "1 Jul 2026, 00:30 (+01:00)");
        assert_eq!(moment.offset_minutes(), 60);
        assert_eq!(Moment::from_stored(&moment.stored(), moment.zone), Some(moment));
    }

    #[test]
    fn the_hour_that_does_not_exist_and_the_hour_that_exists_twice_have_one_instant() {
        let zone = chrono_tz::Europe::London;
        let missing = Moment::of_site(day("2026-03-29"), 1, 30, zone).unwrap();
        assert_eq!(missing.stored(), "2026-03-29T01:30:00.000Z");
        let twice = Moment::of_site(day("2026-10-25"), 1, 30, zone).unwrap();
        assert_eq!(twice.stored(), "2026-10-25T00:30:00.000Z");
    }

    #[test]
    fn relative_words_count_site_days() {
        let today = day("2026-12-01");
        assert_eq!(until_shown(today, day("2026-12-01")), "closes today 23:59");
        assert_eq!(until_shown(today, day("2026-12-02")), "closes tomorrow 23:59");
        assert_eq!(until_shown(today, day("2026-12-05")), "closes in 4 days");
        assert_eq!(until_shown(today, day("2026-11-29")), "2 days late");
    }
}
