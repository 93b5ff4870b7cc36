//! Instruments: calibration, daily check, in or out of service; an expired one is a hard stop at the bench.

use chrono::NaiveDate;
use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::moment::date_shown;
use super::refusal::NamedReason;
use super::stop::Stop;

/// The kinds of the register, as methods name them.
pub const KINDS: [&str; 7] =
    ["pH meter", "viscometer", "balance", "cylinder", "thermometer", "chromatograph", "other"];

/// The kind whose daily check records buffers and slope.
pub const PH_METER: &str = "pH meter";

/// An instrument about to enter the register.
#[derive(Clone, Debug)]
pub struct NewInstrument {
    pub code: String,
    pub name: String,
    pub kind: String,
    pub needs_daily_check: bool,
}

/// What happens to an instrument.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum EventKind {
    Calibrated,
    DailyCheck,
    OutOfService,
    InService,
}

impl EventKind {
    pub const ALL: [EventKind; 4] =
        [EventKind::Calibrated, EventKind::DailyCheck, EventKind::OutOfService, EventKind::InService];

    /// As stored in `instrument_event.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            EventKind::Calibrated => "calibrated",
            EventKind::DailyCheck => "daily check",
            EventKind::OutOfService => "out of service",
            EventKind::InService => "in service",
        }
    }

    pub fn from_words(words: &str) -> Option<EventKind> {
        EventKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// What was recorded with an event; stored as JSON.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct EventDetail {
    /// Whether a calibration or check met its limits; one that did not never makes an instrument usable.
    pub is_within_limits: bool,
    /// Nominal values of the buffers of a pH check, pH units.
    pub buffers: Vec<Decimal>,
    /// Electrode slope in percent of the theoretical one.
    pub slope_percent: Option<Decimal>,
    /// Certificate, buffer lots, weight set.
    pub reference: String,
    pub note: String,
}

impl EventDetail {
    /// `buffers 4.01, 7.00; slope 98.6 %; lots B-11, B-12; within limits`.
    pub fn words(&self, kind: EventKind) -> String {
        let mut parts = Vec::new();
        if !self.buffers.is_empty() {
            let buffers: Vec<String> = self.buffers.iter().map(Decimal::to_string).collect();
            parts.push(format!("buffers {}", buffers.join(", ")));
        }
        if let Some(slope) = self.slope_percent {
            parts.push(format!("slope {slope}\u{202f}%"));
        }
        parts.extend([&self.reference, &self.note].into_iter().filter(|text| !text.is_empty()).cloned());
        if matches!(kind, EventKind::Calibrated | EventKind::DailyCheck) {
            let within = if self.is_within_limits { "within limits" } else { "outside its limits" };
            parts.push(within.to_string());
        }
        parts.join("; ")
    }
}

/// An event about to be recorded.
#[derive(Clone, Debug)]
pub struct NewEvent {
    pub kind: EventKind,
    pub performed_on: NaiveDate,
    /// When the next calibration is due.
    pub due_on: Option<NaiveDate>,
    pub detail: EventDetail,
}

/// A calibration or check as it counts now.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Performed {
    pub on: NaiveDate,
    pub due_on: Option<NaiveDate>,
    pub detail: EventDetail,
}

/// All that decides whether an instrument may be used on a day.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct InstrumentFacts {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub kind: String,
    pub needs_daily_check: bool,
    /// Since when it is out of service, where it is.
    pub out_of_service_since: Option<NaiveDate>,
    pub calibration: Option<Performed>,
    pub daily_check: Option<Performed>,
    /// The stops QA has lifted for the day the facts were asked for.
    pub lifted: Vec<Stop>,
}

impl InstrumentFacts {
    fn stands(&self, stop: Stop) -> bool {
        !self.lifted.contains(&stop)
    }

    /// The daily check of this day, with its buffers and slope.
    pub fn check_of(&self, today: NaiveDate) -> Option<&EventDetail> {
        self.daily_check.as_ref().filter(|check| check.on == today).map(|check| &check.detail)
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum InstrumentRefusal {
    #[error("{code} is out of service since {}. Choose another instrument.", date_shown(*since))]
    InstrumentOutOfService { code: String, since: NaiveDate },
    #[error("{code} has no calibration on record. Record it, or choose another instrument.")]
    CalibrationMissing { code: String },
    #[error("The last calibration of {code} was outside its limits. Choose another instrument.")]
    CalibrationFailed { code: String },
    #[error("The calibration of {code} was due on {}. Choose another instrument.", date_shown(*due))]
    CalibrationOverdue { code: String, due: NaiveDate },
    #[error("{code} has no daily check today. Record it first, or choose another instrument.")]
    DailyCheckMissing { code: String },
    #[error("Today's check of {code} was outside its limits. Choose another instrument.")]
    DailyCheckFailed { code: String },
    #[error("The code {0} is in the register already. Codes are never used twice.")]
    InstrumentCodeTaken(String),
    #[error("This day is still to come. Record what was done, on the day it was done.")]
    EventInFuture,
    #[error("Say when the next calibration is due, after the day of this one.")]
    DueDateMissing,
    #[error("A check of a pH meter needs at least two buffers.")]
    BuffersMissing,
    #[error("A check of a pH meter needs the slope, in % of the theoretical one.")]
    SlopeMissing,
    #[error("Say why, in at least ten characters.")]
    EventReasonMissing,
    #[error("{0} is out of service already.")]
    AlreadyOutOfService(String),
    #[error("{0} is in service already.")]
    AlreadyInService(String),
}

impl NamedReason for InstrumentRefusal {
    fn field(&self) -> Option<String> {
        let field = match self {
            InstrumentRefusal::InstrumentCodeTaken(_) => "code",
            InstrumentRefusal::EventInFuture => "performed_on",
            InstrumentRefusal::DueDateMissing => "due_on",
            InstrumentRefusal::BuffersMissing => "buffer.1",
            InstrumentRefusal::SlopeMissing => "slope_percent",
            InstrumentRefusal::EventReasonMissing => "note",
            InstrumentRefusal::AlreadyOutOfService(_) | InstrumentRefusal::AlreadyInService(_) => "kind",
            _ => "instrument",
        };
        Some(field.to_string())
    }
}

/// Whether the instrument may be used today (decision A10). Refuses in this order: out of service, no
/// calibration, calibration outside its limits, calibration overdue, no daily check today, check outside its
/// limits. A stop that QA lifted for the day is passed over.
pub fn may_use(facts: &InstrumentFacts, today: NaiveDate) -> Result<(), InstrumentRefusal> {
    let code = || facts.code.clone();
    if let Some(since) = facts.out_of_service_since.filter(|_| facts.stands(Stop::OutOfService)) {
        return Err(InstrumentRefusal::InstrumentOutOfService { code: code(), since });
    }
    if facts.stands(Stop::Calibration) {
        let Some(calibration) = &facts.calibration else {
            return Err(InstrumentRefusal::CalibrationMissing { code: code() });
        };
        if !calibration.detail.is_within_limits {
            return Err(InstrumentRefusal::CalibrationFailed { code: code() });
        }
        if let Some(due) = calibration.due_on.filter(|due| *due < today) {
            return Err(InstrumentRefusal::CalibrationOverdue { code: code(), due });
        }
    }
    if facts.needs_daily_check && facts.stands(Stop::DailyCheck) {
        match facts.check_of(today) {
            None => return Err(InstrumentRefusal::DailyCheckMissing { code: code() }),
            Some(check) if !check.is_within_limits => {
                return Err(InstrumentRefusal::DailyCheckFailed { code: code() });
            }
            Some(_) => {}
        }
    }
    Ok(())
}

/// Refuses a code that is or was in use.
pub fn may_add(new: &NewInstrument, is_taken: bool) -> Result<(), InstrumentRefusal> {
    if is_taken { Err(InstrumentRefusal::InstrumentCodeTaken(new.code.clone())) } else { Ok(()) }
}

/// Refuses in this order: a day to come, the due date, buffers, slope, the reason, the state it has already.
pub fn may_record(
    event: &NewEvent,
    facts: &InstrumentFacts,
    today: NaiveDate,
) -> Result<(), InstrumentRefusal> {
    if event.performed_on > today {
        return Err(InstrumentRefusal::EventInFuture);
    }
    match event.kind {
        EventKind::Calibrated if event.due_on.is_none_or(|due| due <= event.performed_on) => {
            Err(InstrumentRefusal::DueDateMissing)
        }
        EventKind::DailyCheck if facts.kind == PH_METER && event.detail.buffers.len() < 2 => {
            Err(InstrumentRefusal::BuffersMissing)
        }
        EventKind::DailyCheck if facts.kind == PH_METER && event.detail.slope_percent.is_none() => {
            Err(InstrumentRefusal::SlopeMissing)
        }
        EventKind::OutOfService | EventKind::InService if event.detail.note.trim().chars().count() < 10 => {
            Err(InstrumentRefusal::EventReasonMissing)
        }
        EventKind::OutOfService if facts.out_of_service_since.is_some() => {
            Err(InstrumentRefusal::AlreadyOutOfService(facts.code.clone()))
        }
        EventKind::InService if facts.out_of_service_since.is_none() => {
            Err(InstrumentRefusal::AlreadyInService(facts.code.clone()))
        }
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn today() -> NaiveDate {
        day("2026-12-01")
    }

    fn performed(on: &str, due: Option<&str>, is_within_limits: bool) -> Option<Performed> {
        let detail = EventDetail { is_within_limits, ..EventDetail::default() };
        Some(Performed { on: day(on), due_on: due.map(day), detail })
    }

    fn good() -> InstrumentFacts {
        InstrumentFacts {
            id: 1,
            code: "PH-02".to_string(),
            name: "pH meter, bench 2".to_string(),
            kind: PH_METER.to_string(),
            needs_daily_check: true,
            out_of_service_since: None,
            calibration: performed("2026-06-01", Some("2026-12-01"), true),
            daily_check: performed("2026-12-01", None, true),
            lifted: Vec::new(),
        }
    }

    fn with(change: impl FnOnce(&mut InstrumentFacts)) -> InstrumentFacts {
        let mut facts = good();
        change(&mut facts);
        facts
    }

    fn name_of(result: Result<(), InstrumentRefusal>) -> String {
        match result {
            Ok(()) => "usable".to_string(),
            Err(refusal) => super::super::refusal::Refusal::from(refusal).name,
        }
    }

    /// Decision A10: expired or out of service is a hard stop; the due day itself is still good.
    #[test]
    fn an_instrument_is_stopped_by_its_register() {
        let table = [
            (good(), "usable"),
            (with(|facts| facts.out_of_service_since = Some(today())), "InstrumentOutOfService"),
            (with(|facts| facts.calibration = None), "CalibrationMissing"),
            (
                with(|facts| facts.calibration = performed("2026-06-01", Some("2027-06-01"), false)),
                "CalibrationFailed",
            ),
            (
                with(|facts| facts.calibration = performed("2026-05-30", Some("2026-11-30"), true)),
                "CalibrationOverdue",
            ),
            (with(|facts| facts.daily_check = None), "DailyCheckMissing"),
            (with(|facts| facts.daily_check = performed("2026-11-30", None, true)), "DailyCheckMissing"),
            (with(|facts| facts.daily_check = performed("2026-12-01", None, false)), "DailyCheckFailed"),
            (
                with(|facts| {
                    facts.daily_check = None;
                    facts.needs_daily_check = false;
                }),
                "usable",
            ),
        ];
        for (facts, expected) in table {
            assert_eq!(name_of(may_use(&facts, today())), expected);
        }
    }

    #[test]
    fn a_lifted_stop_is_passed_over_and_the_others_stand() {
        let nothing = with(|facts| {
            facts.out_of_service_since = Some(today());
            facts.calibration = None;
            facts.daily_check = None;
        });
        let lifting = |lifted: &[Stop]| InstrumentFacts { lifted: lifted.to_vec(), ..nothing.clone() };
        let table: [(&[Stop], &str); 4] = [
            (&[], "InstrumentOutOfService"),
            (&[Stop::OutOfService], "CalibrationMissing"),
            (&[Stop::OutOfService, Stop::Calibration], "DailyCheckMissing"),
            (&[Stop::OutOfService, Stop::Calibration, Stop::DailyCheck], "usable"),
        ];
        for (lifted, expected) in table {
            assert_eq!(name_of(may_use(&lifting(lifted), today())), expected);
        }
    }

    #[test]
    fn events_need_what_makes_them_worth_something() {
        let event = |kind, performed_on: &str, due: Option<&str>, detail: EventDetail| NewEvent {
            kind,
            performed_on: day(performed_on),
            due_on: due.map(day),
            detail,
        };
        let plain = EventDetail::default;
        let buffers = || EventDetail { buffers: vec![Decimal::from(4), Decimal::from(7)], ..plain() };
        let slope = || EventDetail { slope_percent: Some(Decimal::from(98)), ..buffers() };
        let why = || EventDetail { note: "electrode broken".to_string(), ..plain() };
        let table = [
            (event(EventKind::DailyCheck, "2026-12-02", None, slope()), "EventInFuture"),
            (event(EventKind::Calibrated, "2026-12-01", None, plain()), "DueDateMissing"),
            (event(EventKind::Calibrated, "2026-12-01", Some("2026-12-01"), plain()), "DueDateMissing"),
            (event(EventKind::Calibrated, "2026-12-01", Some("2027-06-01"), plain()), "usable"),
            (event(EventKind::DailyCheck, "2026-12-01", None, plain()), "BuffersMissing"),
            (event(EventKind::DailyCheck, "2026-12-01", None, buffers()), "SlopeMissing"),
            (event(EventKind::DailyCheck, "2026-12-01", None, slope()), "usable"),
            (event(EventKind::OutOfService, "2026-12-01", None, plain()), "EventReasonMissing"),
            (event(EventKind::OutOfService, "2026-12-01", None, why()), "usable"),
            (event(EventKind::InService, "2026-12-01", None, why()), "AlreadyInService"),
        ];
        for (event, expected) in table {
            assert_eq!(name_of(may_record(&event, &good(), today())), expected, "{event:?}");
        }
        let out = with(|facts| facts.out_of_service_since = Some(today()));
        let again = event(EventKind::OutOfService, "2026-12-01", None, why());
        assert_eq!(name_of(may_record(&again, &out, today())), "AlreadyOutOfService");
    }

    #[test]
    fn an_event_is_told_with_its_numbers() {
        let detail = EventDetail {
            is_within_limits: true,
            buffers: vec!["4.01".parse().unwrap(), "7.00".parse().unwrap()],
            slope_percent: Some("98.6".parse().unwrap()),
            reference: "lots B-11, B-12".to_string(),
            note: String::new(),
        };
        let words = "buffers 4.01, 7.00; slope 98.6\u{202f}%; lots B-11, B-12; within limits";
        assert_eq!(detail.words(EventKind::DailyCheck), words);
    }
}
