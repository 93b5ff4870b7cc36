//! Receiving material lots, their assay and status, and what moves their stock.

use rust_decimal::Decimal;

use super::signature::{MaterialStatus as MaterialStatusMeaning, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::material_lot::{
    MaterialStatus, NewAssay, NewMaterialLot, NewStatus, dispensed, may_receive, may_set, may_use,
};
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::stock::{EntryKind, LedgerFacts, NewMovement, moved};
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::material_lot::MaterialLot;
use crate::store::stock::NewStockEntry;

/// Receives a delivery: it comes in under quarantine, with its first line in the ledger.
///
/// Refuses in the order of [`may_receive`].
pub fn receive(db: &Db, actor: &Actor, new: &NewMaterialLot) -> Result<i64, Failure> {
    db.change(actor, Act::ReceiveMaterialLot, &Reason::none(), |change| {
        let is_taken = store::material_lot::by_scan(change, &new.number)?.is_some();
        may_receive(new, is_taken, actor.at.date())?;
        let material = store::material::get(change, new.material)?;
        let id = store::material_lot::insert(change, new)?;
        let why = format!("received on {}", date_shown(new.received_on));
        let first = NewStatus { status: MaterialStatus::Quarantine, retest_on: None, why };
        store::material_lot::insert_status(change, id, &first, None)?;
        let entry = NewStockEntry {
            material_lot: id,
            kind: EntryKind::Received,
            quantity: new.quantity,
            balance: new.quantity,
            lot: None,
            why: None,
            witness: None,
        };
        store::stock::insert(change, &entry)?;
        change.concerns(Kind::MaterialLot, id)?;
        change.concerns(Kind::Material, new.material)?;
        change.tell(format!(
            "{}: {} {} of {}, {} lot {}",
            new.number, new.quantity, new.unit, material.name, new.supplier, new.supplier_lot
        ));
        Ok(id)
    })
}

/// Records assay and water; the newest count at dispensing.
pub fn record_assay(db: &Db, actor: &Actor, id: i64, new: &NewAssay) -> Result<(), Failure> {
    db.change(actor, Act::RecordMaterialAssay, &Reason::none(), |change| {
        let found = store::material_lot::get(change, id)?;
        store::material_lot::insert_assay(change, id, new)?;
        change.concerns(Kind::MaterialLot, id)?;
        let assay = new.assay.map(|value| format!("assay {value} {} ({})", new.assay_unit, new.assay_basis));
        let water = new.water.map(|value| format!("water {value} {}", new.water_unit));
        let words: Vec<String> = assay.into_iter().chain(water).collect();
        change.tell(format!("{}: {}, {}", found.facts.number, words.join(", "), new.reference));
        Ok(())
    })
}

/// QA signs a status. Refuses in the order of [`may_set`].
pub fn set_status(
    db: &Db,
    actor: &Actor,
    id: i64,
    new: &NewStatus,
    signed: &Signed<MaterialStatusMeaning>,
) -> Result<(), Failure> {
    db.change(actor, Act::SignMaterialStatus, &Reason::stated(&new.why), |change| {
        let found = store::material_lot::get(change, id)?;
        may_set(new, &found.facts, actor.at.date())?;
        let canonical = store::material_lot::canonical(&found.facts, new);
        let signature = signed.put_under(change, Subject::new(Kind::MaterialLot, id), &canonical)?;
        store::material_lot::insert_status(change, id, new, Some(signature))?;
        let retest = new.retest_on.map(|day| format!(", retest {}", date_shown(day))).unwrap_or_default();
        change.tell(format!("{} {}{retest}", found.facts.number, new.status.words()));
        Ok(())
    })
}

/// Records what was adjusted after counting, destroyed, or brought back from a lot.
///
/// Refuses in the order of [`moved`].
pub fn move_stock(db: &Db, actor: &Actor, id: i64, new: &NewMovement) -> Result<i64, Failure> {
    db.change(actor, Act::MoveStock, &Reason::stated(&new.why), |change| {
        let found = store::material_lot::get(change, id)?;
        let returned_from = match new.lot {
            None => None,
            Some(lot) => {
                Some((store::lot::get(change, lot)?.number, store::stock::taken_by(change, id, lot)?))
            }
        };
        let facts = LedgerFacts {
            number: found.facts.number.clone(),
            unit: found.facts.unit.clone(),
            balance: found.facts.balance,
            returned_from,
            doer: actor.account,
        };
        let quantity = moved(new, &facts)?;
        let entry = NewStockEntry {
            material_lot: id,
            kind: new.kind,
            quantity,
            balance: found.facts.balance + quantity,
            lot: new.lot,
            why: Some(new.why.clone()),
            witness: new.witness,
        };
        let line = store::stock::insert(change, &entry)?;
        told(change, &found, &entry)?;
        Ok(line)
    })
}

/// What a weighing takes from a material lot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewTake {
    pub material_lot: i64,
    /// The material the step asks for.
    pub material: i64,
    /// The lot it goes into.
    pub lot: i64,
    pub quantity: Decimal,
    pub unit: String,
}

/// What was taken.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Taken {
    pub stock_entry: i64,
    pub number: String,
    /// In the unit of the ledger.
    pub quantity: Decimal,
    pub balance: Decimal,
    pub unit: String,
}

/// Takes from a material lot inside another act, such as a weighing. The stops are hard, and an attempt with a wrong,
/// expired or unreleased lot stays in the trail.
///
/// Refuses in the order of [`may_use`], then of [`dispensed`].
pub fn take_inside(change: &mut Change<'_>, new: &NewTake) -> Result<Taken, Failure> {
    let found = store::material_lot::get(change, new.material_lot)?;
    let wanted = store::material::get(change, new.material)?;
    change.concerns(Kind::MaterialLot, new.material_lot)?;
    change.concerns(Kind::Lot, new.lot)?;
    may_use(&found.facts, (new.material, &wanted.name), change.actor().at.date())?;
    let quantity = dispensed(new.quantity, &new.unit, &found.facts)?;
    let balance = found.facts.balance - quantity;
    let entry = NewStockEntry {
        material_lot: new.material_lot,
        kind: EntryKind::Dispensed,
        quantity: -quantity,
        balance,
        lot: Some(new.lot),
        why: None,
        witness: None,
    };
    let stock_entry = store::stock::insert(change, &entry)?;
    Ok(Taken { stock_entry, number: found.facts.number, quantity, balance, unit: found.facts.unit })
}

/// Brings back into the ledger what an earlier weighing took, inside the act that corrects it. `quantity` is in the
/// unit of the ledger.
///
/// Refuses in the order of [`moved`] for a return.
pub fn return_inside(
    change: &mut Change<'_>,
    material_lot: i64,
    lot: i64,
    quantity: Decimal,
    why: &str,
) -> Result<i64, Failure> {
    let found = store::material_lot::get(change, material_lot)?;
    let new = NewMovement {
        kind: EntryKind::Returned,
        quantity,
        lot: Some(lot),
        why: why.to_string(),
        witness: None,
    };
    let facts = LedgerFacts {
        number: found.facts.number.clone(),
        unit: found.facts.unit.clone(),
        balance: found.facts.balance,
        returned_from: Some((
            store::lot::get(change, lot)?.number,
            store::stock::taken_by(change, material_lot, lot)?,
        )),
        doer: change.actor().account,
    };
    let quantity = moved(&new, &facts)?;
    change.concerns(Kind::MaterialLot, material_lot)?;
    let entry = NewStockEntry {
        material_lot,
        kind: EntryKind::Returned,
        quantity,
        balance: found.facts.balance + quantity,
        lot: Some(lot),
        why: Some(why.to_string()),
        witness: None,
    };
    store::stock::insert(change, &entry)
}

fn told(change: &mut Change<'_>, found: &MaterialLot, entry: &NewStockEntry) -> Result<(), Failure> {
    change.concerns(Kind::MaterialLot, found.facts.id)?;
    if let Some(lot) = entry.lot {
        change.concerns(Kind::Lot, lot)?;
    }
    let unit = &found.facts.unit;
    change.tell(format!(
        "{} {}: {} {unit}, balance {} {unit}",
        found.facts.number,
        entry.kind.words(),
        entry.quantity.normalize(),
        entry.balance.normalize()
    ));
    Ok(())
}
