//! The ledger of a material lot: what went in and out, in exact decimals, never below zero.

use rust_decimal::Decimal;

use super::refusal::NamedReason;

/// Units a material lot can be kept in.
pub const UNITS: [&str; 6] = ["g", "kg", "mg", "mL", "L", "pieces"];

/// The same quantity in another unit, exactly; `None` where the two do not measure the same thing.
pub fn in_unit(quantity: Decimal, from: &str, to: &str) -> Option<Decimal> {
    let size = |unit: &str| match unit {
        "mg" => Some(("mass", Decimal::new(1, 3))),
        "g" => Some(("mass", Decimal::ONE)),
        "kg" => Some(("mass", Decimal::ONE_THOUSAND)),
        "mL" => Some(("volume", Decimal::ONE)),
        "L" => Some(("volume", Decimal::ONE_THOUSAND)),
        "pieces" => Some(("count", Decimal::ONE)),
        _ => None,
    };
    let ((what, from), (other, to)) = (size(from)?, size(to)?);
    if what != other {
        return None;
    }
    (quantity * from).checked_div(to).map(|found| found.normalize())
}

/// What moves a balance.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum EntryKind {
    Received,
    Dispensed,
    Adjusted,
    Destroyed,
    Returned,
}

impl EntryKind {
    pub const ALL: [EntryKind; 5] = [
        EntryKind::Received,
        EntryKind::Dispensed,
        EntryKind::Adjusted,
        EntryKind::Destroyed,
        EntryKind::Returned,
    ];

    /// As stored in `stock_entry.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            EntryKind::Received => "received",
            EntryKind::Dispensed => "dispensed",
            EntryKind::Adjusted => "adjusted",
            EntryKind::Destroyed => "destroyed",
            EntryKind::Returned => "returned",
        }
    }

    pub fn from_words(words: &str) -> Option<EntryKind> {
        EntryKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// A movement that a person records by itself: not a dispensing, which a weighing makes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewMovement {
    pub kind: EntryKind,
    /// For an adjustment the quantity that was found by counting or weighing; else what moved, more than zero.
    pub quantity: Decimal,
    pub lot: Option<i64>,
    pub why: String,
    /// Who saw it destroyed.
    pub witness: Option<i64>,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum StockRefusal {
    #[error("A quantity that moves is more than 0 {0}. Type what was weighed or counted.")]
    NothingMoved(String),
    #[error("Type what was found, 0 {0} or more; the program works out the difference.")]
    FoundBelowZero(String),
    #[error(
        "{number} holds {balance} {unit} and {wanted} {unit} are asked for. Take another lot for the rest."
    )]
    NotEnough { number: String, balance: Decimal, wanted: Decimal, unit: String },
    #[error("{0} holds exactly that already. There is nothing to adjust.")]
    NothingToAdjust(String),
    #[error("Say why in at least ten characters; it stands in the ledger.")]
    MovementReasonMissing,
    #[error("Name who saw it destroyed: another person than you.")]
    WitnessMissing,
    #[error("You cannot witness what you destroy yourself. Name another person.")]
    WitnessIsDoer,
    #[error("Name the lot it comes back from.")]
    ReturnWithoutLot,
    #[error("{lot} had {taken} {unit} of {number}, so {wanted} {unit} cannot come back from it.")]
    ReturnsMoreThanTaken { lot: String, number: String, taken: Decimal, wanted: Decimal, unit: String },
    #[error("{number} is kept in {kept} and the quantity is in {asked}. Type it in {kept}.")]
    UnitsDiffer { number: String, kept: String, asked: String },
}

impl NamedReason for StockRefusal {
    fn field(&self) -> Option<String> {
        use StockRefusal::*;
        let name = match self {
            NothingMoved(_)
            | FoundBelowZero(_)
            | NotEnough { .. }
            | NothingToAdjust(_)
            | ReturnsMoreThanTaken { .. }
            | UnitsDiffer { .. } => "quantity",
            MovementReasonMissing => "why",
            WitnessMissing | WitnessIsDoer => "witness",
            ReturnWithoutLot => "lot",
        };
        Some(name.to_string())
    }
}

/// What is known of a ledger when something is to move.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LedgerFacts {
    pub number: String,
    pub unit: String,
    pub balance: Decimal,
    /// Number of the lot it comes back from, with what it had taken and not yet brought back.
    pub returned_from: Option<(String, Decimal)>,
    pub doer: i64,
}

/// The signed quantity that a movement adds to the balance.
///
/// Refuses in this order: the quantity (nothing moved, found below zero), the reason, then by kind: the witness of a
/// destruction, the lot of a return and what it had, a balance that would not hold, an adjustment by nothing.
pub fn moved(new: &NewMovement, facts: &LedgerFacts) -> Result<Decimal, StockRefusal> {
    if new.kind == EntryKind::Adjusted && new.quantity < Decimal::ZERO {
        return Err(StockRefusal::FoundBelowZero(facts.unit.clone()));
    }
    if new.kind != EntryKind::Adjusted && new.quantity <= Decimal::ZERO {
        return Err(StockRefusal::NothingMoved(facts.unit.clone()));
    }
    if new.kind != EntryKind::Received && new.why.trim().chars().count() < 10 {
        return Err(StockRefusal::MovementReasonMissing);
    }
    match new.kind {
        EntryKind::Received => Ok(new.quantity),
        EntryKind::Adjusted if new.quantity == facts.balance => {
            Err(StockRefusal::NothingToAdjust(facts.number.clone()))
        }
        EntryKind::Adjusted => Ok(new.quantity - facts.balance),
        EntryKind::Returned => returned(new, facts),
        EntryKind::Destroyed => {
            witnessed(new, facts)?;
            taken(new.quantity, facts)
        }
        EntryKind::Dispensed => taken(new.quantity, facts),
    }
}

fn witnessed(new: &NewMovement, facts: &LedgerFacts) -> Result<(), StockRefusal> {
    match new.witness {
        None => Err(StockRefusal::WitnessMissing),
        Some(witness) if witness == facts.doer => Err(StockRefusal::WitnessIsDoer),
        Some(_) => Ok(()),
    }
}

fn returned(new: &NewMovement, facts: &LedgerFacts) -> Result<Decimal, StockRefusal> {
    let Some((lot, had)) = &facts.returned_from else { return Err(StockRefusal::ReturnWithoutLot) };
    if new.quantity > *had {
        return Err(StockRefusal::ReturnsMoreThanTaken {
            lot: lot.clone(),
            number: facts.number.clone(),
            taken: had.normalize(),
            wanted: new.quantity,
            unit: facts.unit.clone(),
        });
    }
    Ok(new.quantity)
}

/// What leaves a balance: never more than it holds.
pub fn taken(quantity: Decimal, facts: &LedgerFacts) -> Result<Decimal, StockRefusal> {
    if quantity > facts.balance {
        return Err(StockRefusal::NotEnough {
            number: facts.number.clone(),
            balance: facts.balance.normalize(),
            wanted: quantity.normalize(),
            unit: facts.unit.clone(),
        });
    }
    Ok(-quantity)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn dec(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    #[test]
    fn units_of_one_kind_change_exactly_and_others_not() {
        let table = [
            ("2.5", "kg", "g", Some("2500")),
            ("125", "g", "kg", Some("0.125")),
            ("0.5", "mg", "kg", Some("0.0000005")),
            ("1.25", "L", "mL", Some("1250")),
            ("3", "pieces", "pieces", Some("3")),
            ("3", "g", "mL", None),
            ("3", "drops", "mL", None),
        ];
        for (quantity, from, to, expected) in table {
            assert_eq!(in_unit(dec(quantity), from, to), expected.map(dec), "{quantity} {from} {to}");
        }
    }

    fn facts() -> LedgerFacts {
        LedgerFacts {
            number: "ML-0042".to_string(),
            unit: "kg".to_string(),
            balance: dec("12.500"),
            returned_from: Some(("TW-104-0640".to_string(), dec("2"))),
            doer: 4,
        }
    }

    fn new(kind: EntryKind, quantity: &str) -> NewMovement {
        let why = "counted at the end of the week".to_string();
        NewMovement { kind, quantity: dec(quantity), lot: None, why, witness: Some(5) }
    }

    #[test]
    fn a_movement_is_refused_for_its_first_fault() {
        use EntryKind::*;
        let kg = || "kg".to_string();
        let short = |kind, quantity| NewMovement { why: "lost".to_string(), ..new(kind, quantity) };
        let table = [
            (new(Received, "4"), Ok(dec("4"))),
            (short(Destroyed, "0"), Err(StockRefusal::NothingMoved(kg()))),
            (short(Adjusted, "-1"), Err(StockRefusal::FoundBelowZero(kg()))),
            (short(Destroyed, "1"), Err(StockRefusal::MovementReasonMissing)),
            (NewMovement { witness: None, ..new(Destroyed, "1") }, Err(StockRefusal::WitnessMissing)),
            (NewMovement { witness: Some(4), ..new(Destroyed, "1") }, Err(StockRefusal::WitnessIsDoer)),
            (new(Destroyed, "12.5"), Ok(dec("-12.5"))),
            (
                new(Destroyed, "12.501"),
                Err(StockRefusal::NotEnough {
                    number: "ML-0042".to_string(),
                    balance: dec("12.5"),
                    wanted: dec("12.501"),
                    unit: kg(),
                }),
            ),
            (new(Adjusted, "12.5"), Err(StockRefusal::NothingToAdjust("ML-0042".to_string()))),
            (new(Adjusted, "12.1"), Ok(dec("-0.4"))),
            (new(Adjusted, "13"), Ok(dec("0.5"))),
            (new(Returned, "2"), Ok(dec("2"))),
            (
                new(Returned, "2.1"),
                Err(StockRefusal::ReturnsMoreThanTaken {
                    lot: "TW-104-0640".to_string(),
                    number: "ML-0042".to_string(),
                    taken: dec("2"),
                    wanted: dec("2.1"),
                    unit: kg(),
                }),
            ),
        ];
        for (new, expected) in table {
            assert_eq!(moved(&new, &facts()), expected, "{new:?}");
        }
        let none = LedgerFacts { returned_from: None, ..facts() };
        assert_eq!(moved(&new(Returned, "1"), &none), Err(StockRefusal::ReturnWithoutLot));
    }

    proptest! {
        #[test]
        fn no_series_of_movements_goes_below_zero(moves in prop::collection::vec((0_usize..5, -500_i64..5000), 1..60)) {
            let mut balance = Decimal::ZERO;
            for (kind, thousandths) in moves {
                let one = NewMovement { quantity: Decimal::new(thousandths, 3), ..new(EntryKind::ALL[kind], "1") };
                if let Ok(change) = moved(&one, &LedgerFacts { balance, ..facts() }) {
                    balance += change;
                }
                prop_assert!(balance >= Decimal::ZERO);
            }
        }
    }
}
