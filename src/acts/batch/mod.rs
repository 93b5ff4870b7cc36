//! Making a lot: its record is started as a copy of the approved master record, carried out, and closed.

pub mod check;
pub mod correction;
pub mod step;
pub mod weighing;
pub mod yields;

use rust_decimal::Decimal;

use super::signature::{Authorship, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::refusal::StepRefusal;
use crate::domain::batch::rule::{StepFacts, may_close};
use crate::domain::batch::start::{NewBatch, may_start_record};
use crate::domain::batch::{Entry, PhaseYield, RecordContent};
use crate::domain::deviation::NewDeviation;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::formulation::FormulationContent;
use crate::domain::lot::NewLot;
use crate::domain::reason::Reason;
use crate::domain::signature::SignatureRefusal;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::Versioned;
use crate::store;
use crate::store::batch::BatchRecord;
use crate::store::door::{Change, Db};

/// Starts the record of a lot: the lot is recorded as made from today on, to the approved version, and its record is a
/// copy of the master record at the batch size.
///
/// Refuses in this order: as [`super::lot::make`] does, then as [`may_start_record`] does.
pub fn start(db: &Db, actor: &Actor, new: &NewBatch) -> Result<i64, Failure> {
    db.change(actor, Act::StartBatchRecord, &Reason::none(), |change| {
        let version = store::version::get(change, Versioned::Formulation, new.formulation_version)?;
        let content: FormulationContent = version.read()?;
        let size_unit = content.master.as_ref().map(|master| master.size_unit.clone());
        let lot = NewLot {
            number: new.number.clone(),
            presentation: new.presentation,
            formulation_version: new.formulation_version,
            made_on: actor.at.date(),
            size: Some(new.size),
            size_unit: Some(size_unit.unwrap_or_default()),
            scale: new.scale,
            container_closure: new.container_closure.clone(),
            bulk_lot: None,
        };
        let lot = super::lot::make_inside(change, &lot)?;
        let scaled = may_start_record(&content, new.size)?;
        let made = store::lot::get(change, lot)?;
        let copy = RecordContent {
            product: format!("{} {}", made.product_code, made.product_name),
            presentation: format!("{}: {}", made.presentation_code, made.presentation_words),
            formulation: format!("{} version {}", made.formulation_code, made.formulation_number),
            formulation_digest: made.formulation_digest,
            size: new.size,
            size_unit: scaled.size_unit.clone(),
            scaled,
            master: content.master.unwrap_or_default(),
        };
        let document = serde_json::to_string(&copy)?;
        let digest = sha256_hex(document.as_bytes());
        let id = store::batch::insert(change, lot, &format!("BR-{}", new.number), &document, &digest)?;
        change.concerns(Kind::BatchRecord, id)?;
        change.tell(format!(
            "{} at {} {}, copied from {}, sha256 {}",
            new.number,
            copy.size,
            copy.size_unit,
            copy.formulation,
            &digest[..12]
        ));
        Ok(id)
    })
}

/// A record with everything done in it.
pub struct Loaded {
    pub record: BatchRecord,
    pub entries: Vec<Entry>,
    pub yields: Vec<PhaseYield>,
}

impl Loaded {
    pub fn of(reader: &store::Reader<'_>, record: i64) -> Result<Loaded, Failure> {
        Ok(Loaded {
            record: store::batch::get(reader, record)?,
            entries: store::batch::entry::of_record(reader, record)?,
            yields: store::batch::yields::of_record(reader, record)?,
        })
    }

    /// What decides about a step, counted from 1.
    pub fn facts(&self, step: usize) -> Result<StepFacts<'_>, Failure> {
        let missing = || Failure::missing(format!("step {step} in this record"));
        Ok(StepFacts {
            content: &self.record.content,
            planned: self.record.content.step(step).ok_or_else(missing)?,
            entries: &self.entries,
            yields: &self.yields,
            is_closed: self.record.is_closed,
            record: &self.record.number,
            lot_decided: self.record.lot_decision.as_deref(),
        })
    }
}

/// The act stands in the history of the record and of its lot.
fn concerns(change: &Change<'_>, record: &BatchRecord) -> Result<(), Failure> {
    change.concerns(Kind::BatchRecord, record.id)?;
    change.concerns(Kind::Lot, record.lot)
}

/// Opens a deviation of a step inside its act. A description that is too short is told at `field`.
fn open_deviation(
    change: &mut Change<'_>,
    record: &BatchRecord,
    step: Option<(usize, String)>,
    (title, described, field): (&str, &str, &str),
) -> Result<(i64, i64), Failure> {
    let new = NewDeviation {
        title: title.to_string(),
        described: described.to_string(),
        occurred_on: change.actor().at.date(),
        lot: Some(record.lot),
        step: step.map(|(number, words)| (Some(number as i64), words)),
        material_lot: None,
        equipment: None,
        study: None,
    };
    at_field(super::deviation::open_inside(change, &new), field)
}

/// A refusal of another noun, told at the field of this form.
fn at_field<T>(answer: Result<T, Failure>, field: &str) -> Result<T, Failure> {
    answer.map_err(|failure| match failure {
        Failure::Refused(mut refusal) => {
            refusal.field = Some(field.to_string());
            Failure::Refused(refusal)
        }
        other => other,
    })
}

/// Closes a record: everything is done and checked. `seen` is the digest of the record as it was shown.
///
/// Refuses in this order: the lot decided on, then as [`may_close`] does, changed since it was seen.
pub fn close(
    db: &Db,
    actor: &Actor,
    id: i64,
    seen: &str,
    signed: &Signed<Authorship>,
) -> Result<(), Failure> {
    db.change(actor, Act::CloseBatchRecord, &Reason::none(), |change| {
        let loaded = Loaded::of(change, id)?;
        let record = &loaded.record;
        concerns(change, record)?;
        if let Some(decided) = &record.lot_decision {
            return Err(StepRefusal::LotDecided(decided.clone()).into());
        }
        may_close((&record.content, &loaded.entries, &loaded.yields), record.is_closed, &record.number)?;
        let canonical = store::batch::canonical(change, id, None)?;
        if sha256_hex(canonical.as_bytes()) != seen {
            return Err(SignatureRefusal::ChangedSinceSeen.into());
        }
        let signature = signed.put_under(change, Subject::new(Kind::BatchRecord, id), &canonical)?;
        store::batch::insert_event(change, id, "closed", None, Some(signature))?;
        change.tell(record.number.clone());
        Ok(())
    })
}

/// Opens a closed record again, with a reason. Refuses in this order: the lot decided on, open already.
pub fn reopen(db: &Db, actor: &Actor, id: i64, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::ReopenBatchRecord, reason, |change| {
        let record = store::batch::get(change, id)?;
        concerns(change, &record)?;
        if let Some(decided) = &record.lot_decision {
            return Err(StepRefusal::LotDecided(decided.clone()).into());
        }
        if !record.is_closed {
            return Err(StepRefusal::RecordOpen.into());
        }
        store::batch::insert_event(change, id, "reopened", reason.text(), None)?;
        change.tell(record.number.clone());
        Ok(())
    })
}

/// A decimal without the zeros at its end, for a sentence.
fn plain(value: Decimal) -> Decimal {
    value.normalize()
}
