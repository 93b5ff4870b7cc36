//! Stages that were passed without their readings.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::method::Stage;
use crate::domain::stage::StageLoss;

/// The losses of a sample, oldest first.
pub fn losses(reader: &Reader<'_>, sample: i64) -> Answer<Vec<StageLoss>> {
    reader.all(
        "select container, stage, why from stage_loss where sample = :sample order by id",
        named_params! { ":sample": sample },
        |row| {
            let stage: String = row.get(1)?;
            let stage = Stage::from_words(&stage).ok_or(rusqlite::Error::InvalidQuery)?;
            Ok(StageLoss { container: row.get(0)?, stage, why: row.get(2)? })
        },
    )
}

pub fn insert(change: &Change<'_>, sample: i64, loss: &StageLoss) -> Answer<i64> {
    change.insert(
        "insert into stage_loss (sample, container, stage, why) values (:sample, :container, :stage, :why)",
        named_params! {
            ":sample": sample,
            ":container": loss.container,
            ":stage": loss.stage.words(),
            ":why": loss.why,
        },
    )
}
