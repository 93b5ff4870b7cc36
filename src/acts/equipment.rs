//! Equipment: adding to the register, cleaning and its check, use, calibration, in and out of service.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::equipment::{
    EquipmentEventKind, ForLot, NewEquipment, NewEquipmentEvent, may_add, may_record, may_use,
};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::{Change, Db};

/// Adds a piece of equipment. Before its first cleaning on record it cannot be used.
pub fn add(db: &Db, actor: &Actor, new: &NewEquipment) -> Result<i64, Failure> {
    db.change(actor, Act::AddEquipment, &Reason::none(), |change| {
        may_add(new, store::equipment::is_code_taken(change, &new.code)?)?;
        let id = store::equipment::insert(change, new)?;
        change.concerns(Kind::Equipment, id)?;
        change.tell(format!("{}, {} ({})", new.code, new.name, new.class));
        Ok(id)
    })
}

/// Records what happened to a piece of equipment. A use is refused as [`use_inside`] refuses it.
///
/// Refuses in the order of [`may_record`].
pub fn record_event(db: &Db, actor: &Actor, id: i64, new: &NewEquipmentEvent) -> Result<(), Failure> {
    db.change(actor, Act::RecordEquipmentEvent, &Reason::none(), |change| {
        let facts = store::equipment::facts(change, id)?;
        change.concerns(Kind::Equipment, id)?;
        may_record(new, &facts, actor.account, actor.at.date())?;
        if let (EquipmentEventKind::Used, Some(lot)) = (new.kind, new.lot) {
            may_use(&facts, Some(for_lot(change, lot)?), new.happened_on)?;
            change.concerns(Kind::Lot, lot)?;
        }
        let looked_at = facts.cleaning.as_ref().map(|cleaning| cleaning.event);
        let cleaning = looked_at.filter(|_| new.kind == EquipmentEventKind::CheckedClean);
        store::equipment::insert_event(change, id, new, cleaning)?;
        let until = new.due_on.map(|due| format!(", until {}", date_shown(due))).unwrap_or_default();
        let (kind, on) = (new.kind.words(), date_shown(new.happened_on));
        change.tell(format!("{} {kind} {on}{until} {}", facts.code, new.note).trim_end().to_string());
        Ok(())
    })
}

/// Uses a piece of equipment in a lot inside another act, such as a step; entered once for a lot and cleaning.
///
/// Refuses in the order of [`may_use`]; an attempt with dirty or uncalibrated equipment stays in the trail.
pub fn use_inside(change: &mut Change<'_>, equipment: i64, lot: i64) -> Result<(), Failure> {
    let facts = store::equipment::facts(change, equipment)?;
    let today = change.actor().at.date();
    change.concerns(Kind::Equipment, equipment)?;
    may_use(&facts, Some(for_lot(change, lot)?), today)?;
    if facts.uses.iter().any(|used| used.lot == lot && used.on == today) {
        return Ok(());
    }
    let new = NewEquipmentEvent {
        kind: EquipmentEventKind::Used,
        happened_on: today,
        due_on: None,
        lot: Some(lot),
        note: String::new(),
    };
    store::equipment::insert_event(change, equipment, &new, None)?;
    Ok(())
}

fn for_lot(change: &Change<'_>, lot: i64) -> Result<ForLot, Failure> {
    Ok(ForLot { lot, product: store::lot::get(change, lot)?.product })
}
