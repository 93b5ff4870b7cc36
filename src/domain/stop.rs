//! Hard stops of the registers, and lifting one for a day by QA's signature.

use chrono::NaiveDate;

use super::moment::plus_days;
use super::refusal::NamedReason;

/// A hard stop at the bench that QA can lift for one day.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Stop {
    Calibration,
    DailyCheck,
    OutOfService,
    Qualification,
}

impl Stop {
    pub const ALL: [Stop; 4] = [Stop::Calibration, Stop::DailyCheck, Stop::OutOfService, Stop::Qualification];

    /// As stored in `stop_override.stop`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Stop::Calibration => "calibration",
            Stop::DailyCheck => "daily check",
            Stop::OutOfService => "out of service",
            Stop::Qualification => "qualification",
        }
    }

    pub fn from_words(words: &str) -> Option<Stop> {
        Stop::ALL.into_iter().find(|stop| stop.words() == words)
    }

    /// Whether the stop belongs to an instrument; the other one belongs to a person.
    pub fn is_of_instrument(self) -> bool {
        self != Stop::Qualification
    }
}

/// What an override lifts: stops of an instrument, or of a person with a method version.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewOverride {
    pub stop: Stop,
    pub instrument: Option<i64>,
    pub account: Option<i64>,
    pub method_version: Option<i64>,
    pub valid_on: NaiveDate,
    pub reason: String,
}

impl NewOverride {
    /// The text that is signed.
    pub fn canonical(&self) -> String {
        let number = |id: Option<i64>| id.map_or("none".to_string(), |id| id.to_string());
        format!(
            "override of {}\ninstrument {}\naccount {}\nmethod version {}\nvalid on {}\nreason {}",
            self.stop.words(),
            number(self.instrument),
            number(self.account),
            number(self.method_version),
            self.valid_on,
            self.reason.trim()
        )
    }
}

/// An override may be signed so many days ahead.
pub const MOST_DAYS_AHEAD: i64 = 7;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum OverrideRefusal {
    #[error("Choose the instrument whose stop is lifted.")]
    InstrumentNotNamed,
    #[error("Choose the person whose stop is lifted.")]
    PersonNotNamed,
    #[error("Choose the method version the person may use that day.")]
    MethodNotNamed,
    #[error(
        "An override holds for today or one of the next {MOST_DAYS_AHEAD} days, never for a day that is past."
    )]
    DayNotOpen,
    #[error("Say why in at least 20 characters: what makes the reading trustworthy all the same.")]
    ReasonTooShort,
    #[error("You cannot lift your own stop. Another QA reviewer can.")]
    OwnStop,
}

impl NamedReason for OverrideRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            OverrideRefusal::InstrumentNotNamed => "instrument",
            OverrideRefusal::PersonNotNamed | OverrideRefusal::OwnStop => "account",
            OverrideRefusal::MethodNotNamed => "method_version",
            OverrideRefusal::DayNotOpen => "valid_on",
            OverrideRefusal::ReasonTooShort => "reason",
        };
        Some(field.to_string())
    }
}

/// Refuses in this order: what is lifted is not named, the own stop, the day, the reason.
pub fn may_override(new: &NewOverride, signer: i64, today: NaiveDate) -> Result<(), OverrideRefusal> {
    if new.stop.is_of_instrument() && new.instrument.is_none() {
        return Err(OverrideRefusal::InstrumentNotNamed);
    }
    if !new.stop.is_of_instrument() {
        if new.account.is_none() {
            return Err(OverrideRefusal::PersonNotNamed);
        }
        if new.method_version.is_none() {
            return Err(OverrideRefusal::MethodNotNamed);
        }
        if new.account == Some(signer) {
            return Err(OverrideRefusal::OwnStop);
        }
    }
    if new.valid_on < today || new.valid_on > plus_days(today, MOST_DAYS_AHEAD) {
        return Err(OverrideRefusal::DayNotOpen);
    }
    if new.reason.trim().chars().count() < 20 {
        return Err(OverrideRefusal::ReasonTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    #[test]
    fn an_override_names_what_it_lifts_for_an_open_day_with_a_reason() {
        let good = NewOverride {
            stop: Stop::Calibration,
            instrument: Some(3),
            account: None,
            method_version: None,
            valid_on: day("2026-12-01"),
            reason: "Checked against two buffers today, both within 0.02".to_string(),
        };
        let person = NewOverride {
            stop: Stop::Qualification,
            instrument: None,
            account: Some(5),
            method_version: Some(2),
            ..good.clone()
        };
        let with = |change: fn(&mut NewOverride), from: &NewOverride| {
            let mut new = from.clone();
            change(&mut new);
            new
        };
        let table = [
            (good.clone(), Ok(())),
            (person.clone(), Ok(())),
            (with(|new| new.instrument = None, &good), Err(OverrideRefusal::InstrumentNotNamed)),
            (with(|new| new.account = None, &person), Err(OverrideRefusal::PersonNotNamed)),
            (with(|new| new.method_version = None, &person), Err(OverrideRefusal::MethodNotNamed)),
            (with(|new| new.account = Some(9), &person), Err(OverrideRefusal::OwnStop)),
            (with(|new| new.valid_on = day("2026-11-30"), &good), Err(OverrideRefusal::DayNotOpen)),
            (with(|new| new.valid_on = day("2026-12-09"), &good), Err(OverrideRefusal::DayNotOpen)),
            (with(|new| new.valid_on = day("2026-12-08"), &good), Ok(())),
            (with(|new| new.reason = "fine".to_string(), &good), Err(OverrideRefusal::ReasonTooShort)),
        ];
        for (new, expected) in table {
            assert_eq!(may_override(&new, 9, day("2026-12-01")), expected, "{new:?}");
        }
    }
}
