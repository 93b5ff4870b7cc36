//! Starting the record of a lot.

use rust_decimal::Decimal;

use crate::domain::formulation::FormulationContent;
use crate::domain::lot::Scale;
use crate::domain::master::scale::{ScaleFault, Scaled, scale};
use crate::domain::refusal::NamedReason;

/// A lot about to be made here.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewBatch {
    pub number: String,
    pub presentation: i64,
    pub formulation_version: i64,
    pub size: Decimal,
    pub scale: Scale,
    pub container_closure: String,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum StartRefusal {
    #[error("This version has no master record, so no lot can be made from it step by step.")]
    NoMasterRecord,
    #[error("The master record has the batch sizes {0}. Choose one of these.")]
    SizeNotInMaster(String),
    #[error("{0}")]
    NotScalable(ScaleFault),
}

impl NamedReason for StartRefusal {
    fn field(&self) -> Option<String> {
        Some(if *self == StartRefusal::NoMasterRecord { "formulation_version" } else { "size" }.to_string())
    }
}

/// The amounts of the lot's batch size. Refuses in this order: no master record, a size it does not have, an amount
/// that cannot be scaled.
pub fn may_start_record(content: &FormulationContent, size: Decimal) -> Result<Scaled, StartRefusal> {
    let Some(master) = &content.master else { return Err(StartRefusal::NoMasterRecord) };
    if !master.batch_sizes.contains(&size) {
        let sizes: Vec<String> = master.batch_sizes.iter().map(Decimal::to_string).collect();
        return Err(StartRefusal::SizeNotInMaster(format!("{} {}", sizes.join(", "), master.size_unit)));
    }
    scale(content, master, size).map_err(StartRefusal::NotScalable)
}
