//! Closing a stage that was passed without its readings.

use super::reading::concerns;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reading::{in_slot, may_touch, standing};
use crate::domain::reason::Reason;
use crate::domain::stage::{Column, StageLoss, StageTest, may_close};
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::Db;

/// Closes what is still open of a stage as "lost, because …": of one container, or of the whole sample.
///
/// Refuses in this order: the pull, the signature or completion is no bar, nothing open.
pub fn close(db: &Db, actor: &Actor, sample: i64, loss: &StageLoss, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::CloseStage, reason, |change| {
        let sample = store::bench::sample(change, sample)?;
        if let Some(test) = sample.tests.first() {
            may_touch(sample.state(test))?;
        }
        may_close(&tests_of(&sample), &sample.losses, loss.stage, loss.container)?;
        store::stage::insert(change, sample.id, loss)?;
        concerns(change, &sample)?;
        let container = sample.containers.iter().find(|one| Some(one.id) == loss.container);
        let of = container.map(|one| format!(" of {}", one.label)).unwrap_or_default();
        change.tell(format!("{}: {}{of} lost, because {}", sample.number, loss.stage.words(), loss.why));
        Ok(())
    })
}

/// The tests of a sample as the stages see them.
pub fn tests_of(sample: &BenchSample) -> Vec<StageTest> {
    sample
        .tests
        .iter()
        .map(|test| StageTest {
            title: test.title.clone(),
            stage: test.content.stage,
            columns: columns(sample, test),
        })
        .collect()
}

/// The columns of a test: which are begun, which are filled. A test that stands complete is filled.
pub fn columns(sample: &BenchSample, test: &BenchTest) -> Vec<Column> {
    let readings = sample.readings_of(test.id);
    let begun: Vec<_> = standing(&readings).iter().map(|reading| reading.key.container).collect();
    let mut columns: Vec<Column> = Vec::new();
    for slot in sample.slots(test) {
        let container = slot.key.container;
        let is_there = !slot.is_required || test.is_complete() || in_slot(&readings, &slot.key).is_some();
        match columns.iter_mut().find(|column| column.container == container) {
            Some(column) => column.is_filled &= is_there,
            None => {
                let is_begun = begun.contains(&container);
                columns.push(Column { container, is_begun, is_filled: is_there });
            }
        }
    }
    columns
}
