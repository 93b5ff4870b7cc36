//! Retain samples: enough for all tests twice, looked at once a year, kept a year past expiry (21 CFR 211.170 (b)).

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::moment::{date_shown, plus_months};
use super::refusal::NamedReason;

/// A retain about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewRetain {
    pub containers: i64,
    pub quantity: Decimal,
    pub unit: String,
    /// What one set of all tests takes, in the same unit.
    pub test_quantity: Decimal,
    pub location: String,
    pub stored_on: NaiveDate,
}

/// What happens to a retain.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum RetainEventKind {
    LookedAt,
    Taken,
    Discarded,
}

impl RetainEventKind {
    pub const ALL: [RetainEventKind; 3] =
        [RetainEventKind::LookedAt, RetainEventKind::Taken, RetainEventKind::Discarded];

    /// As stored in `retain_event.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            RetainEventKind::LookedAt => "looked at",
            RetainEventKind::Taken => "taken",
            RetainEventKind::Discarded => "discarded",
        }
    }

    pub fn from_words(words: &str) -> Option<RetainEventKind> {
        RetainEventKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// An event about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewRetainEvent {
    pub kind: RetainEventKind,
    pub happened_on: NaiveDate,
    /// Of a look: whether anything has changed.
    pub is_changed: Option<bool>,
    /// How many containers were taken.
    pub containers: Option<i64>,
    pub note: String,
}

/// Where a retain stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RetainFacts {
    pub number: String,
    pub containers_left: i64,
    pub stored_on: NaiveDate,
    pub last_look_on: Option<NaiveDate>,
    /// The expiry of its lot, once it is released.
    pub expires_on: Option<NaiveDate>,
    pub is_discarded: bool,
}

impl RetainFacts {
    /// The last day of the next look: a year after the last one, or after it was stored.
    pub fn next_look_on(&self) -> NaiveDate {
        plus_months(self.last_look_on.unwrap_or(self.stored_on), 12)
    }

    /// The last day it is kept: a year after the expiry; `None` without an expiry.
    pub fn kept_until(&self) -> Option<NaiveDate> {
        self.expires_on.map(|day| plus_months(day, 12))
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum RetainRefusal {
    #[error("The lot was imported, not made here. Its retains are kept where it was made.")]
    RetainOfImported,
    #[error("The day it was stored lies ahead. Record it once it stands there.")]
    StoredInFuture,
    #[error("The day it was stored lies before the lot was made. Look at the date.")]
    StoredBeforeMade,
    #[error("A retain and its tests take more than 0 {0}.")]
    RetainOfNothing(String),
    #[error(
        "A retain holds at least twice what all tests take: {needed} {unit}, and this is {quantity} {unit}. \
         Keep more containers."
    )]
    RetainTooSmall { needed: Decimal, quantity: Decimal, unit: String },

    #[error("{0} was discarded. Nothing more can be recorded on it.")]
    RetainDiscarded(String),
    #[error("This day lies ahead, or before the retain was stored. Look at the date.")]
    RetainDayImpossible,
    #[error("Say whether anything has changed.")]
    LookWithoutFinding,
    #[error("Say what has changed in at least ten characters; a deviation is opened with it.")]
    ChangeNotDescribed,
    #[error("Say how many containers were taken: 1 to {0}.")]
    TakenImpossible(i64),
    #[error("The lot has no expiry yet, so nobody can say when its retain may go. Keep it.")]
    RetainWithoutExpiry,
    #[error("{number} is kept until {}, a year past the expiry. Keep it.", date_shown(*until))]
    RetainStillKept { number: String, until: NaiveDate },
}

impl NamedReason for RetainRefusal {
    fn field(&self) -> Option<String> {
        use RetainRefusal::*;
        let name = match self {
            StoredInFuture | StoredBeforeMade => "stored_on",
            RetainOfNothing(_) | RetainTooSmall { .. } => "quantity",
            RetainDayImpossible => "happened_on",
            LookWithoutFinding => "is_changed",
            ChangeNotDescribed => "note",
            TakenImpossible(_) => "containers",
            RetainWithoutExpiry | RetainStillKept { .. } => "kind",
            RetainOfImported | RetainDiscarded(_) => return None,
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: imported, stored ahead, stored before made, nothing, less than twice the tests.
pub fn may_keep(
    new: &NewRetain,
    made_on: Option<NaiveDate>,
    is_imported: bool,
    today: NaiveDate,
) -> Result<(), RetainRefusal> {
    if is_imported {
        return Err(RetainRefusal::RetainOfImported);
    }
    if new.stored_on > today {
        return Err(RetainRefusal::StoredInFuture);
    }
    if made_on.is_some_and(|made_on| new.stored_on < made_on) {
        return Err(RetainRefusal::StoredBeforeMade);
    }
    if new.quantity <= Decimal::ZERO || new.test_quantity <= Decimal::ZERO {
        return Err(RetainRefusal::RetainOfNothing(new.unit.clone()));
    }
    let needed = new.test_quantity * Decimal::TWO;
    if new.quantity < needed {
        let (quantity, unit) = (new.quantity, new.unit.clone());
        return Err(RetainRefusal::RetainTooSmall { needed, quantity, unit });
    }
    Ok(())
}

/// Refuses in this order: discarded, the day, then by kind: a look without finding or description, more taken than
/// there is, discarded without expiry or before its day.
pub fn may_record(new: &NewRetainEvent, facts: &RetainFacts, today: NaiveDate) -> Result<(), RetainRefusal> {
    let number = || facts.number.clone();
    if facts.is_discarded {
        return Err(RetainRefusal::RetainDiscarded(number()));
    }
    if new.happened_on > today || new.happened_on < facts.stored_on {
        return Err(RetainRefusal::RetainDayImpossible);
    }
    match new.kind {
        RetainEventKind::LookedAt => match new.is_changed {
            None => Err(RetainRefusal::LookWithoutFinding),
            Some(true) if new.note.trim().chars().count() < 10 => Err(RetainRefusal::ChangeNotDescribed),
            Some(_) => Ok(()),
        },
        RetainEventKind::Taken => {
            let left = facts.containers_left;
            match new.containers {
                Some(taken) if taken >= 1 && taken <= left => Ok(()),
                _ => Err(RetainRefusal::TakenImpossible(left)),
            }
        }
        RetainEventKind::Discarded => match facts.kept_until() {
            None => Err(RetainRefusal::RetainWithoutExpiry),
            Some(until) if new.happened_on <= until => {
                Err(RetainRefusal::RetainStillKept { number: number(), until })
            }
            Some(_) => Ok(()),
        },
    }
}

/// Until when the records of a lot are kept: a year past the expiry (21 CFR 211.180) or five years past the
/// certification (EU GMP chapter 4, 4.11), whichever is longer. `None` before a decision with an expiry.
pub fn records_kept_until(
    expires_on: Option<NaiveDate>,
    certified_on: Option<NaiveDate>,
) -> Option<NaiveDate> {
    let by_expiry = expires_on.map(|day| plus_months(day, 12));
    let by_certification = certified_on.map(|day| plus_months(day, 60));
    by_expiry.zip(by_certification).map(|(one, other)| one.max(other))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn dec(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    /// req_L10 and req_U12: the later of the two.
    #[test]
    fn records_are_kept_by_the_longer_rule() {
        let table = [
            (Some("2028-12-01"), Some("2026-12-01"), Some("2031-12-01")),
            (Some("2032-02-29"), Some("2026-12-01"), Some("2033-02-28")),
            (None, Some("2026-12-01"), None),
            (Some("2028-12-01"), None, None),
        ];
        for (expires, certified, expected) in table {
            assert_eq!(records_kept_until(expires.map(day), certified.map(day)), expected.map(day));
        }
    }

    #[test]
    fn a_retain_holds_all_tests_twice() {
        use RetainRefusal::*;
        let new = || NewRetain {
            containers: 4,
            quantity: dec("800"),
            unit: "mL".to_string(),
            test_quantity: dec("400"),
            location: "retain room".to_string(),
            stored_on: day("2026-12-01"),
        };
        let made = Some(day("2026-11-30"));
        let today = day("2026-12-01");
        let small = RetainTooSmall { needed: dec("800"), quantity: dec("799"), unit: "mL".to_string() };
        let table = [
            (new(), false, Ok(())),
            (new(), true, Err(RetainOfImported)),
            (NewRetain { stored_on: day("2026-12-02"), ..new() }, false, Err(StoredInFuture)),
            (NewRetain { stored_on: day("2026-11-29"), ..new() }, false, Err(StoredBeforeMade)),
            (NewRetain { test_quantity: dec("0"), ..new() }, false, Err(RetainOfNothing("mL".to_string()))),
            (NewRetain { quantity: dec("799"), ..new() }, false, Err(small)),
        ];
        for (new, is_imported, expected) in table {
            assert_eq!(may_keep(&new, made, is_imported, today), expected, "{new:?}");
        }
    }

    #[test]
    fn a_retain_is_looked_at_each_year_and_kept_a_year_past_expiry() {
        use RetainRefusal::*;
        let facts = || RetainFacts {
            number: "TW-104-T1".to_string(),
            containers_left: 3,
            stored_on: day("2026-12-01"),
            last_look_on: None,
            expires_on: Some(day("2028-11-30")),
            is_discarded: false,
        };
        assert_eq!(facts().next_look_on(), day("2027-12-01"));
        let looked = RetainFacts { last_look_on: Some(day("2027-02-28")), ..facts() };
        assert_eq!(looked.next_look_on(), day("2028-02-28"));
        let new = |kind| NewRetainEvent {
            kind,
            happened_on: day("2029-12-01"),
            is_changed: Some(false),
            containers: Some(3),
            note: String::new(),
        };
        use RetainEventKind::*;
        let kept = RetainStillKept { number: "TW-104-T1".to_string(), until: day("2029-11-30") };
        let on = |text: &str, new: NewRetainEvent| NewRetainEvent { happened_on: day(text), ..new };
        let table = [
            (
                new(Discarded),
                RetainFacts { is_discarded: true, ..facts() },
                Err(RetainDiscarded("TW-104-T1".into())),
            ),
            (on("2029-12-02", new(LookedAt)), facts(), Err(RetainDayImpossible)),
            (on("2026-11-30", new(LookedAt)), facts(), Err(RetainDayImpossible)),
            (NewRetainEvent { is_changed: None, ..new(LookedAt) }, facts(), Err(LookWithoutFinding)),
            (NewRetainEvent { is_changed: Some(true), ..new(LookedAt) }, facts(), Err(ChangeNotDescribed)),
            (NewRetainEvent { containers: Some(4), ..new(Taken) }, facts(), Err(TakenImpossible(3))),
            (NewRetainEvent { containers: None, ..new(Taken) }, facts(), Err(TakenImpossible(3))),
            (new(Discarded), RetainFacts { expires_on: None, ..facts() }, Err(RetainWithoutExpiry)),
            (on("2029-11-30", new(Discarded)), facts(), Err(kept)),
            (new(Discarded), facts(), Ok(())),
            (new(Taken), facts(), Ok(())),
            (new(LookedAt), facts(), Ok(())),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_record(&new, &facts, day("2029-12-01")), expected, "{new:?}");
        }
    }
}
