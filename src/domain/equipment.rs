//! Equipment: vessels, mills, fillers. Clean, calibrated and in service, or not used.

use chrono::NaiveDate;

use super::moment::{date_shown, plus_days};
use super::refusal::NamedReason;

/// Classes of equipment, as the steps of a master record name them (terms of the trade).
pub const CLASSES: [&str; 10] = [
    "mixing vessel",
    "homogeniser",
    "colloid mill",
    "bead mill",
    "sieve",
    "transfer pump",
    "holding tank",
    "filling machine",
    "capping machine",
    "other",
];

/// A piece of equipment about to enter the register.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewEquipment {
    pub code: String,
    pub name: String,
    pub class: String,
    pub location: String,
    /// Days it stays clean unused after a cleaning.
    pub clean_hold_days: i64,
    /// Days over which lots of one product may follow each other without cleaning; 0: cleaned after each lot.
    pub campaign_days: i64,
    pub needs_clean_check: bool,
    pub needs_calibration: bool,
}

/// What happens to equipment.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum EquipmentEventKind {
    Cleaned,
    CheckedClean,
    Used,
    Calibrated,
    OutOfService,
    InService,
}

impl EquipmentEventKind {
    pub const ALL: [EquipmentEventKind; 6] = [
        EquipmentEventKind::Cleaned,
        EquipmentEventKind::CheckedClean,
        EquipmentEventKind::Used,
        EquipmentEventKind::Calibrated,
        EquipmentEventKind::OutOfService,
        EquipmentEventKind::InService,
    ];

    /// As stored in `equipment_event.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            EquipmentEventKind::Cleaned => "cleaned",
            EquipmentEventKind::CheckedClean => "checked clean",
            EquipmentEventKind::Used => "used",
            EquipmentEventKind::Calibrated => "calibrated",
            EquipmentEventKind::OutOfService => "out of service",
            EquipmentEventKind::InService => "in service",
        }
    }

    pub fn from_words(words: &str) -> Option<EquipmentEventKind> {
        EquipmentEventKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// An event about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewEquipmentEvent {
    pub kind: EquipmentEventKind,
    pub happened_on: NaiveDate,
    /// Of a calibration: the last day it holds.
    pub due_on: Option<NaiveDate>,
    pub lot: Option<i64>,
    pub note: String,
}

/// The newest cleaning.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Cleaning {
    pub event: i64,
    pub on: NaiveDate,
    pub by: i64,
    pub is_checked: bool,
}

/// A use since the newest cleaning.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Use {
    pub lot: i64,
    pub lot_number: String,
    pub product: i64,
    pub on: NaiveDate,
}

/// All that decides whether a piece of equipment may be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct EquipmentFacts {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub class: String,
    pub location: String,
    pub clean_hold_days: i64,
    pub campaign_days: i64,
    pub needs_clean_check: bool,
    pub needs_calibration: bool,
    pub out_of_service_since: Option<NaiveDate>,
    /// The last day of the newest calibration.
    pub calibrated_until: Option<NaiveDate>,
    pub cleaning: Option<Cleaning>,
    /// In the order they happened.
    pub uses: Vec<Use>,
}

/// The lot it is to be used in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct ForLot {
    pub lot: i64,
    pub product: i64,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum EquipmentRefusal {
    #[error("{code} is out of service since {}. Choose another one.", date_shown(*since))]
    EquipmentOutOfService { code: String, since: NaiveDate },
    #[error("{0} has no calibration on record. Record it, or choose another one.")]
    EquipmentNotCalibrated(String),
    #[error("The calibration of {code} ended on {}. Have it calibrated, or choose another one.", date_shown(*on))]
    EquipmentCalibrationEnded { code: String, on: NaiveDate },
    #[error("{0} has no cleaning on record. Clean it and record that, or choose another one.")]
    NeverCleaned(String),
    #[error(
        "{code} is dirty since its use in {lot} on {}. Clean it and record that, or choose another one.",
        date_shown(*on)
    )]
    DirtySinceUse { code: String, lot: String, on: NaiveDate },
    #[error("{0} was cleaned and nobody has checked it. A second person looks at it and records that.")]
    CleaningNotChecked(String),
    #[error(
        "{code} was cleaned on {} and stays clean for {days} days unused. Clean it again.",
        date_shown(*on)
    )]
    CleanHoldPassed { code: String, on: NaiveDate, days: i64 },

    #[error("The code {0} is in the register already. Codes are never used twice.")]
    EquipmentCodeTaken(String),
    #[error("This day is still to come. Record what was done, on the day it was done.")]
    HappensInFuture,
    #[error("Say until when the calibration holds: a day after the day it was done.")]
    CalibrationEndMissing,
    #[error("Name the lot it was used in.")]
    UseWithoutLot,
    #[error("There is no unchecked cleaning of {0} to check.")]
    NothingToCheck(String),
    #[error("You cleaned {code} yourself. A second person checks it.")]
    CleanerChecks { code: String, cleaner: i64 },
    #[error("Say why, in at least ten characters.")]
    EquipmentReasonMissing,
    #[error("{0} is out of service already.")]
    OutOfServiceAlready(String),
    #[error("{0} is in service already.")]
    InServiceAlready(String),
}

impl NamedReason for EquipmentRefusal {
    fn field(&self) -> Option<String> {
        use EquipmentRefusal::*;
        let name = match self {
            EquipmentCodeTaken(_) => "code",
            HappensInFuture => "happened_on",
            CalibrationEndMissing => "due_on",
            UseWithoutLot => "lot",
            EquipmentReasonMissing => "note",
            NothingToCheck(_) | CleanerChecks { .. } | OutOfServiceAlready(_) | InServiceAlready(_) => "kind",
            _ => "equipment",
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            EquipmentRefusal::CleanerChecks { cleaner, .. } => Some(vec![*cleaner]),
            _ => None,
        }
    }

    /// Dirty or uncalibrated equipment at a step stays in the trail.
    fn is_noted(&self) -> bool {
        self.field().as_deref() == Some("equipment")
    }
}

/// Whether it may be used in a lot on a day. Without a lot: whether it is clean for any.
///
/// Refuses in this order: out of service, not calibrated, calibration ended, never cleaned, dirty since a use, cleaning
/// not checked, clean hold passed. A lot that uses it already goes on; within a campaign lots of one product follow
/// each other.
pub fn may_use(
    facts: &EquipmentFacts,
    lot: Option<ForLot>,
    today: NaiveDate,
) -> Result<(), EquipmentRefusal> {
    let code = || facts.code.clone();
    if let Some(since) = facts.out_of_service_since {
        return Err(EquipmentRefusal::EquipmentOutOfService { code: code(), since });
    }
    if facts.needs_calibration {
        match facts.calibrated_until {
            None => return Err(EquipmentRefusal::EquipmentNotCalibrated(code())),
            Some(on) if on < today => {
                return Err(EquipmentRefusal::EquipmentCalibrationEnded { code: code(), on });
            }
            Some(_) => {}
        }
    }
    let Some(cleaning) = &facts.cleaning else { return Err(EquipmentRefusal::NeverCleaned(code())) };
    if let Some(last) = facts.uses.last() {
        let dirty =
            EquipmentRefusal::DirtySinceUse { code: code(), lot: last.lot_number.clone(), on: last.on };
        return if goes_on(facts, lot, today) { Ok(()) } else { Err(dirty) };
    }
    if facts.needs_clean_check && !cleaning.is_checked {
        return Err(EquipmentRefusal::CleaningNotChecked(code()));
    }
    if today > clean_until(facts, cleaning) {
        let (on, days) = (cleaning.on, facts.clean_hold_days);
        return Err(EquipmentRefusal::CleanHoldPassed { code: code(), on, days });
    }
    Ok(())
}

/// The last day it counts as clean unused.
pub fn clean_until(facts: &EquipmentFacts, cleaning: &Cleaning) -> NaiveDate {
    plus_days(cleaning.on, facts.clean_hold_days)
}

fn goes_on(facts: &EquipmentFacts, lot: Option<ForLot>, today: NaiveDate) -> bool {
    let (Some(lot), Some(first), Some(last)) = (lot, facts.uses.first(), facts.uses.last()) else {
        return false;
    };
    let is_one_product = facts.uses.iter().all(|one| one.product == lot.product);
    last.lot == lot.lot
        || (facts.campaign_days > 0 && is_one_product && today <= plus_days(first.on, facts.campaign_days))
}

/// Refuses a code that is or was in use.
pub fn may_add(new: &NewEquipment, is_taken: bool) -> Result<(), EquipmentRefusal> {
    if is_taken { Err(EquipmentRefusal::EquipmentCodeTaken(new.code.clone())) } else { Ok(()) }
}

/// Refuses in this order: a day to come, then by kind: the end of a calibration, the lot of a use, nothing to check,
/// the cleaner checks, the reason, the state it has already.
pub fn may_record(
    new: &NewEquipmentEvent,
    facts: &EquipmentFacts,
    doer: i64,
    today: NaiveDate,
) -> Result<(), EquipmentRefusal> {
    use EquipmentEventKind::*;
    let code = || facts.code.clone();
    if new.happened_on > today {
        return Err(EquipmentRefusal::HappensInFuture);
    }
    match new.kind {
        Calibrated if new.due_on.is_none_or(|due| due <= new.happened_on) => {
            Err(EquipmentRefusal::CalibrationEndMissing)
        }
        Used if new.lot.is_none() => Err(EquipmentRefusal::UseWithoutLot),
        CheckedClean => {
            match facts.cleaning.as_ref().filter(|one| !one.is_checked && facts.uses.is_empty()) {
                None => Err(EquipmentRefusal::NothingToCheck(code())),
                Some(cleaning) if cleaning.by == doer => {
                    Err(EquipmentRefusal::CleanerChecks { code: code(), cleaner: doer })
                }
                Some(_) => Ok(()),
            }
        }
        OutOfService | InService if new.note.trim().chars().count() < 10 => {
            Err(EquipmentRefusal::EquipmentReasonMissing)
        }
        OutOfService if facts.out_of_service_since.is_some() => {
            Err(EquipmentRefusal::OutOfServiceAlready(code()))
        }
        InService if facts.out_of_service_since.is_none() => Err(EquipmentRefusal::InServiceAlready(code())),
        _ => Ok(()),
    }
}

/// Where it stands, in a sentence: what its page and the register say.
pub fn state_words(facts: &EquipmentFacts, today: NaiveDate) -> String {
    match (may_use(facts, None, today), &facts.cleaning) {
        (Err(EquipmentRefusal::DirtySinceUse { lot, on, .. }), _) => {
            format!("dirty since its use in {lot} on {}", date_shown(on))
        }
        (Err(refusal), _) => {
            let sentence = refusal.to_string();
            let first = sentence.split(". ").next().unwrap_or_default();
            first.trim_end_matches('.').to_string()
        }
        (Ok(()), Some(cleaning)) => format!("clean until {}", date_shown(clean_until(facts, cleaning))),
        (Ok(()), None) => "may be used".to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use EquipmentRefusal::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn today() -> NaiveDate {
        day("2026-12-10")
    }

    fn clean() -> EquipmentFacts {
        EquipmentFacts {
            id: 1,
            code: "V-03".to_string(),
            name: "mixing vessel, 500 L".to_string(),
            class: "mixing vessel".to_string(),
            location: "room 4".to_string(),
            clean_hold_days: 7,
            campaign_days: 5,
            needs_clean_check: true,
            needs_calibration: true,
            out_of_service_since: None,
            calibrated_until: Some(day("2026-12-10")),
            cleaning: Some(Cleaning { event: 3, on: day("2026-12-03"), by: 4, is_checked: true }),
            uses: Vec::new(),
        }
    }

    fn used(lot: i64, product: i64, on: &str) -> Use {
        Use { lot, lot_number: format!("TW-{lot}"), product, on: day(on) }
    }

    #[test]
    fn only_clean_calibrated_equipment_in_service_is_used() {
        let code = || "V-03".to_string();
        let cleaning = |on: &str, is_checked| Some(Cleaning { event: 3, on: day(on), by: 4, is_checked });
        let dirty =
            |lot: i64, on: &str| Err(DirtySinceUse { code: code(), lot: format!("TW-{lot}"), on: day(on) });
        let uses = |uses: Vec<Use>| EquipmentFacts { uses, ..clean() };
        let table = [
            (clean(), Ok(())),
            (
                EquipmentFacts { out_of_service_since: Some(today()), calibrated_until: None, ..clean() },
                Err(EquipmentOutOfService { code: code(), since: today() }),
            ),
            (EquipmentFacts { calibrated_until: None, ..clean() }, Err(EquipmentNotCalibrated(code()))),
            (
                EquipmentFacts { calibrated_until: Some(day("2026-12-09")), ..clean() },
                Err(EquipmentCalibrationEnded { code: code(), on: day("2026-12-09") }),
            ),
            (EquipmentFacts { cleaning: None, ..clean() }, Err(NeverCleaned(code()))),
            (
                EquipmentFacts { cleaning: cleaning("2026-12-09", false), ..clean() },
                Err(CleaningNotChecked(code())),
            ),
            (
                EquipmentFacts { cleaning: cleaning("2026-12-02", true), ..clean() },
                Err(CleanHoldPassed { code: code(), on: day("2026-12-02"), days: 7 }),
            ),
            (uses(vec![used(640, 7, "2026-11-01")]), Ok(())),
            (uses(vec![used(639, 7, "2026-12-05")]), Ok(())),
            (uses(vec![used(639, 7, "2026-12-04")]), dirty(639, "2026-12-04")),
            (uses(vec![used(639, 8, "2026-12-09")]), dirty(639, "2026-12-09")),
            (uses(vec![used(638, 8, "2026-12-08"), used(639, 7, "2026-12-09")]), dirty(639, "2026-12-09")),
        ];
        for (facts, expected) in table {
            let lot = Some(ForLot { lot: 640, product: 7 });
            assert_eq!(may_use(&facts, lot, today()), expected, "{facts:?}");
        }
        assert!(may_use(&uses(vec![used(640, 7, "2026-12-10")]), None, today()).is_err());
        assert_eq!(state_words(&clean(), today()), "clean until 10 Dec 2026");
        let words = "dirty since its use in TW-640 on 10 Dec 2026";
        assert_eq!(state_words(&uses(vec![used(640, 7, "2026-12-10")]), today()), words);
    }

    #[test]
    fn an_event_is_refused_for_its_first_fault() {
        use EquipmentEventKind::*;
        let new = |kind| NewEquipmentEvent {
            kind,
            happened_on: today(),
            due_on: None,
            lot: None,
            note: "seal of the shaft leaks".to_string(),
        };
        let unchecked = || EquipmentFacts {
            cleaning: Some(Cleaning { event: 3, on: today(), by: 4, is_checked: false }),
            ..clean()
        };
        let out = || EquipmentFacts { out_of_service_since: Some(today()), ..clean() };
        let code = || "V-03".to_string();
        let table = [
            (new(Cleaned), clean(), Ok(())),
            (
                NewEquipmentEvent { happened_on: day("2026-12-11"), ..new(Cleaned) },
                clean(),
                Err(HappensInFuture),
            ),
            (new(Calibrated), clean(), Err(CalibrationEndMissing)),
            (
                NewEquipmentEvent { due_on: Some(today()), ..new(Calibrated) },
                clean(),
                Err(CalibrationEndMissing),
            ),
            (new(Used), clean(), Err(UseWithoutLot)),
            (new(CheckedClean), clean(), Err(NothingToCheck(code()))),
            (new(CheckedClean), unchecked(), Err(CleanerChecks { code: code(), cleaner: 4 })),
            (
                NewEquipmentEvent { note: "leaks".into(), ..new(OutOfService) },
                clean(),
                Err(EquipmentReasonMissing),
            ),
            (new(OutOfService), out(), Err(OutOfServiceAlready(code()))),
            (new(InService), clean(), Err(InServiceAlready(code()))),
            (new(InService), out(), Ok(())),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_record(&new, &facts, 4, today()), expected, "{new:?}");
        }
        assert_eq!(may_record(&new(CheckedClean), &unchecked(), 5, today()), Ok(()));
    }
}
