//! Material lots: one delivery of a material, its status, and what makes it fit to be dispensed.

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::moment::date_shown;
use super::refusal::NamedReason;
use super::stock::{LedgerFacts, StockRefusal, in_unit, taken};

/// Where a material lot stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum MaterialStatus {
    Quarantine,
    Released,
    Rejected,
    UsedUp,
}

impl MaterialStatus {
    pub const ALL: [MaterialStatus; 4] = [
        MaterialStatus::Quarantine,
        MaterialStatus::Released,
        MaterialStatus::Rejected,
        MaterialStatus::UsedUp,
    ];

    /// As stored in `material_lot_status.status`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            MaterialStatus::Quarantine => "quarantine",
            MaterialStatus::Released => "released",
            MaterialStatus::Rejected => "rejected",
            MaterialStatus::UsedUp => "used up",
        }
    }

    pub fn from_words(words: &str) -> Option<MaterialStatus> {
        MaterialStatus::ALL.into_iter().find(|status| status.words() == words)
    }
}

/// A delivery about to be received.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewMaterialLot {
    pub material: i64,
    pub number: String,
    pub supplier: String,
    pub supplier_lot: String,
    pub received_on: NaiveDate,
    pub quantity: Decimal,
    pub unit: String,
    pub packages: Option<i64>,
    pub retest_on: Option<NaiveDate>,
    pub expires_on: Option<NaiveDate>,
    pub location: String,
}

/// Assay and water of a material lot, by which a dispensed amount is corrected.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct NewAssay {
    pub assay: Option<Decimal>,
    pub assay_unit: String,
    /// `as is`, `anhydrous` or `dried`.
    pub assay_basis: String,
    /// Water or loss on drying.
    pub water: Option<Decimal>,
    pub water_unit: String,
    pub reference: String,
}

/// What an assay can refer to.
pub const ASSAY_BASES: [&str; 3] = ["as is", "anhydrous", "dried"];

/// All that decides whether something may be done with a material lot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MaterialLotFacts {
    pub id: i64,
    pub number: String,
    pub material: i64,
    pub material_name: String,
    pub status: MaterialStatus,
    /// The day of its retest as it stands now.
    pub retest_on: Option<NaiveDate>,
    pub expires_on: Option<NaiveDate>,
    pub unit: String,
    pub balance: Decimal,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum MaterialLotRefusal {
    #[error("The number {0} is in use already. A material lot's number is never used twice.")]
    MaterialLotNumberTaken(String),
    #[error("The day it was received lies ahead. Record the delivery once it is here.")]
    ReceivedInFuture,
    #[error("A delivery is more than 0 {0}.")]
    NothingReceived(String),
    #[error("Fill in the retest date or the expiry: without either nobody can say how long it may be used.")]
    NoRetestNoExpiry,
    #[error("{what} {} lies before the day it was received. Look at the dates.", date_shown(*day))]
    DatedBeforeReceipt { what: &'static str, day: NaiveDate },

    #[error("{number} is {found}, and the step asks for {wanted}. Fetch a lot of {wanted}.")]
    WrongMaterial { number: String, found: String, wanted: String },
    #[error("{0} is in quarantine. Take a released lot, or ask QA to decide on this one.")]
    NotReleased(String),
    #[error("{0} was rejected. Take a released lot, and put this one where rejected material stands.")]
    MaterialRejected(String),
    #[error("{0} is used up. Take a released lot.")]
    MaterialUsedUp(String),
    #[error("{number} expired on {}. Take a lot that is in date.", date_shown(*on))]
    MaterialExpired { number: String, on: NaiveDate },
    #[error("{number} was to be retested on {}. Take a lot that is in date, or have it retested.", date_shown(*on))]
    RetestPassed { number: String, on: NaiveDate },

    #[error("{0} is {1} already.")]
    StatusSetAlready(String, &'static str),
    #[error("{0} was rejected. A rejected lot stays rejected.")]
    StaysRejected(String),
    #[error("{number} expired on {}. An expired lot is not released.", date_shown(*on))]
    ExpiredNotReleased { number: String, on: NaiveDate },
    #[error("The retest of {number} was due on {}. Type the next retest date, after today.", date_shown(*on))]
    RetestDateNeeded { number: String, on: NaiveDate },
    #[error("The next retest date lies after today and not after the expiry.")]
    RetestDateOutside,
    #[error("{number} still holds {balance} {unit}. Adjust or destroy the rest first.")]
    NotEmpty { number: String, balance: Decimal, unit: String },
    #[error("Say why in at least ten characters: certificate, test record, or what was found.")]
    StatusReasonMissing,
    #[error("A status is signed as released, rejected or used up.")]
    StatusNotSignable,
}

impl NamedReason for MaterialLotRefusal {
    fn field(&self) -> Option<String> {
        use MaterialLotRefusal::*;
        let name = match self {
            MaterialLotNumberTaken(_) => "number",
            ReceivedInFuture => "received_on",
            NothingReceived(_) => "quantity",
            NoRetestNoExpiry => "retest_on",
            DatedBeforeReceipt { what, .. } if *what == "The expiry" => "expires_on",
            DatedBeforeReceipt { .. } | RetestDateNeeded { .. } | RetestDateOutside => "retest_on",
            WrongMaterial { .. }
            | NotReleased(_)
            | MaterialRejected(_)
            | MaterialUsedUp(_)
            | MaterialExpired { .. }
            | RetestPassed { .. } => "material_lot",
            StatusReasonMissing => "why",
            _ => "status",
        };
        Some(name.to_string())
    }

    /// A wrong, expired or unreleased material at the balance stays in the trail.
    fn is_noted(&self) -> bool {
        self.field().as_deref() == Some("material_lot")
    }
}

/// Refuses in this order: number taken, day ahead, nothing received, neither retest nor expiry, a date before receipt.
pub fn may_receive(new: &NewMaterialLot, is_taken: bool, today: NaiveDate) -> Result<(), MaterialLotRefusal> {
    if is_taken {
        return Err(MaterialLotRefusal::MaterialLotNumberTaken(new.number.clone()));
    }
    if new.received_on > today {
        return Err(MaterialLotRefusal::ReceivedInFuture);
    }
    if new.quantity <= Decimal::ZERO {
        return Err(MaterialLotRefusal::NothingReceived(new.unit.clone()));
    }
    if new.retest_on.is_none() && new.expires_on.is_none() {
        return Err(MaterialLotRefusal::NoRetestNoExpiry);
    }
    for (what, day) in [("The retest date", new.retest_on), ("The expiry", new.expires_on)] {
        if let Some(day) = day.filter(|day| *day < new.received_on) {
            return Err(MaterialLotRefusal::DatedBeforeReceipt { what, day });
        }
    }
    Ok(())
}

/// Whether the lot is one a step may use today. `wanted` is the material the step asks for, with its name.
///
/// Refuses in this order: wrong material, rejected, in quarantine, used up, expired, retest passed. The retest date
/// and the expiry are the last days of use.
pub fn may_use(
    facts: &MaterialLotFacts,
    wanted: (i64, &str),
    today: NaiveDate,
) -> Result<(), MaterialLotRefusal> {
    let number = || facts.number.clone();
    if facts.material != wanted.0 {
        let (found, wanted) = (facts.material_name.clone(), wanted.1.to_string());
        return Err(MaterialLotRefusal::WrongMaterial { number: number(), found, wanted });
    }
    match facts.status {
        MaterialStatus::Rejected => return Err(MaterialLotRefusal::MaterialRejected(number())),
        MaterialStatus::Quarantine => return Err(MaterialLotRefusal::NotReleased(number())),
        MaterialStatus::UsedUp => return Err(MaterialLotRefusal::MaterialUsedUp(number())),
        MaterialStatus::Released => {}
    }
    if let Some(on) = facts.expires_on.filter(|day| *day < today) {
        return Err(MaterialLotRefusal::MaterialExpired { number: number(), on });
    }
    match facts.retest_on.filter(|day| *day < today) {
        Some(on) => Err(MaterialLotRefusal::RetestPassed { number: number(), on }),
        None => Ok(()),
    }
}

/// The quantity in the unit of the ledger that leaves it, more than zero.
///
/// Refuses in this order: another kind of unit, nothing taken, not enough.
pub fn dispensed(quantity: Decimal, unit: &str, facts: &MaterialLotFacts) -> Result<Decimal, StockRefusal> {
    let Some(quantity) = in_unit(quantity, unit, &facts.unit) else {
        return Err(StockRefusal::UnitsDiffer {
            number: facts.number.clone(),
            kept: facts.unit.clone(),
            asked: unit.to_string(),
        });
    };
    if quantity <= Decimal::ZERO {
        return Err(StockRefusal::NothingMoved(unit.to_string()));
    }
    let ledger = LedgerFacts {
        number: facts.number.clone(),
        unit: facts.unit.clone(),
        balance: facts.balance,
        returned_from: None,
        doer: 0,
    };
    taken(quantity, &ledger).map(|change| -change)
}

/// A status about to be signed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewStatus {
    pub status: MaterialStatus,
    /// The next retest, where a release follows one.
    pub retest_on: Option<NaiveDate>,
    pub why: String,
}

/// Refuses in this order: a status nobody signs, the state it has already, rejected before, then for a release:
/// expired, retest passed without a new date, a date outside; for used up: not empty; last the reason.
pub fn may_set(
    new: &NewStatus,
    facts: &MaterialLotFacts,
    today: NaiveDate,
) -> Result<(), MaterialLotRefusal> {
    let number = || facts.number.clone();
    if new.status == MaterialStatus::Quarantine {
        return Err(MaterialLotRefusal::StatusNotSignable);
    }
    let is_retest = new.status == MaterialStatus::Released && new.retest_on.is_some();
    if new.status == facts.status && !is_retest {
        return Err(MaterialLotRefusal::StatusSetAlready(number(), new.status.words()));
    }
    if facts.status == MaterialStatus::Rejected {
        return Err(MaterialLotRefusal::StaysRejected(number()));
    }
    match new.status {
        MaterialStatus::Released => may_release(new, facts, today)?,
        MaterialStatus::UsedUp if !facts.balance.is_zero() => {
            let (balance, unit) = (facts.balance.normalize(), facts.unit.clone());
            return Err(MaterialLotRefusal::NotEmpty { number: number(), balance, unit });
        }
        _ => {}
    }
    if new.why.trim().chars().count() < 10 {
        return Err(MaterialLotRefusal::StatusReasonMissing);
    }
    Ok(())
}

fn may_release(
    new: &NewStatus,
    facts: &MaterialLotFacts,
    today: NaiveDate,
) -> Result<(), MaterialLotRefusal> {
    let number = || facts.number.clone();
    if let Some(on) = facts.expires_on.filter(|day| *day < today) {
        return Err(MaterialLotRefusal::ExpiredNotReleased { number: number(), on });
    }
    if let Some(on) = facts.retest_on.filter(|day| *day < today && new.retest_on.is_none()) {
        return Err(MaterialLotRefusal::RetestDateNeeded { number: number(), on });
    }
    match new.retest_on {
        Some(day) if day <= today || facts.expires_on.is_some_and(|expires| day > expires) => {
            Err(MaterialLotRefusal::RetestDateOutside)
        }
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use MaterialLotRefusal::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn dec(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn facts() -> MaterialLotFacts {
        MaterialLotFacts {
            id: 1,
            number: "ML-0042".to_string(),
            material: 7,
            material_name: "xanthan gum".to_string(),
            status: MaterialStatus::Released,
            retest_on: Some(day("2026-12-01")),
            expires_on: Some(day("2027-06-30")),
            unit: "kg".to_string(),
            balance: dec("12.5"),
        }
    }

    #[test]
    fn only_the_right_released_material_in_date_is_used() {
        let number = || "ML-0042".to_string();
        let with = |status| MaterialLotFacts { status, ..facts() };
        let late = |retest: &str, expiry: &str| MaterialLotFacts {
            retest_on: Some(day(retest)),
            expires_on: Some(day(expiry)),
            ..facts()
        };
        let wrong = |wanted: &str| {
            Err(WrongMaterial { number: number(), found: "xanthan gum".into(), wanted: wanted.into() })
        };
        let table = [
            (facts(), 7, Ok(())),
            (with(MaterialStatus::Rejected), 8, wrong("bentonite")),
            (with(MaterialStatus::Rejected), 7, Err(MaterialRejected(number()))),
            (with(MaterialStatus::Quarantine), 7, Err(NotReleased(number()))),
            (with(MaterialStatus::UsedUp), 7, Err(MaterialUsedUp(number()))),
            (
                late("2026-11-30", "2026-11-30"),
                7,
                Err(MaterialExpired { number: number(), on: day("2026-11-30") }),
            ),
            (
                late("2026-11-30", "2026-12-01"),
                7,
                Err(RetestPassed { number: number(), on: day("2026-11-30") }),
            ),
            (MaterialLotFacts { retest_on: None, expires_on: None, ..facts() }, 7, Ok(())),
        ];
        for (facts, material, expected) in table {
            assert_eq!(may_use(&facts, (material, "bentonite"), day("2026-12-01")), expected, "{facts:?}");
        }
    }

    #[test]
    fn what_is_dispensed_is_in_the_unit_of_the_ledger_and_not_more_than_it_holds() {
        assert_eq!(dispensed(dec("12500"), "g", &facts()), Ok(dec("12.5")));
        assert_eq!(dispensed(dec("0"), "g", &facts()), Err(StockRefusal::NothingMoved("g".to_string())));
        assert!(matches!(dispensed(dec("1"), "mL", &facts()), Err(StockRefusal::UnitsDiffer { .. })));
        assert!(matches!(dispensed(dec("12500.1"), "g", &facts()), Err(StockRefusal::NotEnough { .. })));
    }

    #[test]
    fn a_delivery_is_refused_for_its_first_fault() {
        let new = || NewMaterialLot {
            material: 7,
            number: "ML-0042".to_string(),
            supplier: "Fellside Minerals".to_string(),
            supplier_lot: "F-118".to_string(),
            received_on: day("2026-12-01"),
            quantity: dec("25"),
            unit: "kg".to_string(),
            packages: Some(1),
            retest_on: None,
            expires_on: Some(day("2027-12-01")),
            location: "cage 2".to_string(),
        };
        let early = day("2026-11-30");
        let table = [
            (new(), false, Ok(())),
            (new(), true, Err(MaterialLotNumberTaken("ML-0042".to_string()))),
            (NewMaterialLot { received_on: day("2026-12-02"), ..new() }, false, Err(ReceivedInFuture)),
            (NewMaterialLot { quantity: dec("0"), ..new() }, false, Err(NothingReceived("kg".to_string()))),
            (NewMaterialLot { expires_on: None, ..new() }, false, Err(NoRetestNoExpiry)),
            (
                NewMaterialLot { retest_on: Some(early), ..new() },
                false,
                Err(DatedBeforeReceipt { what: "The retest date", day: early }),
            ),
        ];
        for (new, is_taken, expected) in table {
            assert_eq!(may_receive(&new, is_taken, day("2026-12-01")), expected, "{new:?}");
        }
    }

    #[test]
    fn a_status_is_refused_for_its_first_fault() {
        let number = || "ML-0042".to_string();
        let new = |status| NewStatus { status, retest_on: None, why: "certificate C-118 agrees".to_string() };
        let retest = |on: &str| NewStatus { retest_on: Some(day(on)), ..new(MaterialStatus::Released) };
        let with = |status| MaterialLotFacts { status, ..facts() };
        let waiting = || with(MaterialStatus::Quarantine);
        let overdue = || MaterialLotFacts { retest_on: Some(day("2026-11-30")), ..waiting() };
        let expired = || MaterialLotFacts { expires_on: Some(day("2026-11-30")), ..waiting() };
        let empty = || MaterialLotFacts { balance: Decimal::ZERO, ..facts() };
        let short = NewStatus { why: "fine".to_string(), ..new(MaterialStatus::Released) };
        let table = [
            (new(MaterialStatus::Released), waiting(), Ok(())),
            (new(MaterialStatus::Quarantine), facts(), Err(StatusNotSignable)),
            (new(MaterialStatus::Released), facts(), Err(StatusSetAlready(number(), "released"))),
            (new(MaterialStatus::Released), with(MaterialStatus::Rejected), Err(StaysRejected(number()))),
            (
                new(MaterialStatus::Released),
                expired(),
                Err(ExpiredNotReleased { number: number(), on: day("2026-11-30") }),
            ),
            (
                new(MaterialStatus::Released),
                overdue(),
                Err(RetestDateNeeded { number: number(), on: day("2026-11-30") }),
            ),
            (retest("2026-12-01"), facts(), Err(RetestDateOutside)),
            (retest("2027-07-01"), facts(), Err(RetestDateOutside)),
            (retest("2027-06-30"), facts(), Ok(())),
            (
                new(MaterialStatus::UsedUp),
                facts(),
                Err(NotEmpty { number: number(), balance: dec("12.5"), unit: "kg".to_string() }),
            ),
            (new(MaterialStatus::UsedUp), empty(), Ok(())),
            (new(MaterialStatus::Rejected), facts(), Ok(())),
            (short, waiting(), Err(StatusReasonMissing)),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_set(&new, &facts, day("2026-12-01")), expected, "{new:?} {facts:?}");
        }
    }
}
