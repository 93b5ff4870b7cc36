//! Closing a stage that was passed without its readings.

use super::reading::concerns;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::method::Stage;
use crate::domain::reading::{Reading, in_slot, may_touch, standing};
use crate::domain::reason::Reason;
use crate::domain::stage::{Column, StageLoss, StageTest, may_close, part_words};
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

/// The tests of a sample as the stages see them; a test of two parts stands once for each.
pub fn tests_of(sample: &BenchSample) -> Vec<StageTest> {
    let part = |test: &BenchTest, stage: Stage| StageTest {
        title: part_title(test, stage),
        stage,
        columns: columns(sample, test, stage),
    };
    let parts = sample
        .tests
        .iter()
        .flat_map(|test| test.content.stages().into_iter().map(move |stage| (test, stage)));
    parts.map(|(test, stage)| part(test, stage)).collect()
}

/// `Appearance, after the label shake`; a test of one part is called by its title.
pub fn part_title(test: &BenchTest, stage: Stage) -> String {
    match test.content.stages().len() {
        1 => test.title.clone(),
        _ => format!("{}, {}", test.title, part_words(stage)),
    }
}

/// The columns of a test at a stage: which are begun, which are filled. A test that stands complete is filled.
pub fn columns(sample: &BenchSample, test: &BenchTest, stage: Stage) -> Vec<Column> {
    let readings = sample.readings_of(test.id);
    let slots = sample.slots(test);
    // What has no slot of its own, such as an unnamed peak, belongs to the method's stage.
    let stage_of = |reading: &Reading| {
        let field = reading.key.field.rsplit(':').next().unwrap_or_default();
        slots.iter().find(|slot| slot.key.field == field).map_or(test.content.stage, |slot| slot.stage)
    };
    let begun: Vec<_> = standing(&readings)
        .into_iter()
        .filter(|reading| stage_of(reading) == stage)
        .map(|reading| reading.key.container)
        .collect();
    let mut columns: Vec<Column> = Vec::new();
    for slot in slots.iter().filter(|slot| slot.stage == stage) {
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
