//! Stages that were passed without their readings.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::method::Stage;
use crate::domain::stage::StageLoss;

/// The losses of samples (a JSON list) with their sample, oldest first.
pub fn losses_of(reader: &Reader<'_>, samples: &str) -> Answer<Vec<(i64, StageLoss)>> {
    reader.all(
        "select sample, container, stage, why
         from stage_loss
         where sample in (select value from json_each(:samples))
         order by id",
        named_params! { ":samples": samples },
        |row| {
            let stage: String = row.get(2)?;
            let stage = Stage::from_words(&stage).ok_or(rusqlite::Error::InvalidQuery)?;
            Ok((row.get(0)?, StageLoss { container: row.get(1)?, stage, why: row.get(3)? }))
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
