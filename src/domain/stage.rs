//! Stages of a container: before disturbance, redispersion, after redispersion. Passing on closes a stage.

use super::method::Stage;
use super::refusal::NamedReason;

/// A column of a test: one container, or the whole sample.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Column {
    pub container: Option<i64>,
    /// Something is recorded in it.
    pub is_begun: bool,
    /// All that the test requires of it is recorded.
    pub is_filled: bool,
}

/// One test of a sample as the stages see it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StageTest {
    pub title: String,
    pub stage: Stage,
    pub columns: Vec<Column>,
}

/// A stage that was passed without all its readings: "lost, because …".
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StageLoss {
    pub container: Option<i64>,
    pub stage: Stage,
    pub why: String,
}

/// Why a stage cannot be read, or closed.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum StageRefusal {
    #[error("The stage “{0}” was closed as lost for this container. What was lost cannot be read later.")]
    StageLost(String),
    #[error("The container was disturbed already: {title} is recorded, so “{stage}” is past.")]
    StagePassed { stage: String, title: String },
    #[error(
        "“{stage}” comes after {title}, which is still open. Finish it, or close its stage as lost, with the reason."
    )]
    StageNotOpen { stage: String, title: String },
    #[error("Nothing is open in the stage “{0}”, so there is nothing to close.")]
    NothingOpen(String),
}

impl NamedReason for StageRefusal {}

fn same_container(one: Option<i64>, other: Option<i64>) -> bool {
    one.is_none() || other.is_none() || one == other
}

/// The loss that covers a stage of a container.
pub fn loss_of(losses: &[StageLoss], stage: Stage, container: Option<i64>) -> Option<&StageLoss> {
    losses
        .iter()
        .find(|loss| loss.stage == stage && (loss.container.is_none() || loss.container == container))
}

/// Whether a stage of a container can be read now.
///
/// Refuses in this order: the stage was lost, a later stage has begun, an earlier stage is open.
pub fn may_read(
    tests: &[StageTest],
    losses: &[StageLoss],
    stage: Stage,
    container: Option<i64>,
) -> Result<(), StageRefusal> {
    if loss_of(losses, stage, container).is_some() {
        return Err(StageRefusal::StageLost(stage.words().to_string()));
    }
    let begun = |test: &&StageTest| {
        let of_container = |column: &Column| same_container(column.container, container);
        test.stage > stage && test.columns.iter().any(|column| column.is_begun && of_container(column))
    };
    if let Some(later) = tests.iter().find(begun) {
        let (stage, title) = (stage.words().to_string(), later.title.clone());
        return Err(StageRefusal::StagePassed { stage, title });
    }
    let open = |test: &&StageTest| test.stage < stage && is_open(test, losses, container);
    match tests.iter().find(open) {
        Some(earlier) => {
            Err(StageRefusal::StageNotOpen { stage: stage.words().to_string(), title: earlier.title.clone() })
        }
        None => Ok(()),
    }
}

/// A test still waits for readings of a container that were not lost.
fn is_open(test: &StageTest, losses: &[StageLoss], container: Option<i64>) -> bool {
    test.columns.iter().any(|column| {
        !column.is_filled
            && same_container(column.container, container)
            && loss_of(losses, test.stage, column.container).is_none()
    })
}

/// Whether a stage can be closed as lost: something in it must be open.
pub fn may_close(
    tests: &[StageTest],
    losses: &[StageLoss],
    stage: Stage,
    container: Option<i64>,
) -> Result<(), StageRefusal> {
    let is_any = tests.iter().any(|test| test.stage == stage && is_open(test, losses, container));
    if is_any { Ok(()) } else { Err(StageRefusal::NothingOpen(stage.words().to_string())) }
}

/// The part of an appearance that a stage stands for (decision A4).
pub fn part_words(stage: Stage) -> &'static str {
    if stage == Stage::AfterRedispersion { "after the label shake" } else { "as stored" }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn test(title: &str, stage: Stage, columns: &[(Option<i64>, bool, bool)]) -> StageTest {
        let columns = columns
            .iter()
            .map(|(container, is_begun, is_filled)| Column {
                container: *container,
                is_begun: *is_begun,
                is_filled: *is_filled,
            })
            .collect();
        StageTest { title: title.to_string(), stage, columns }
    }

    fn bench(first: bool, second: bool, shaken_first: bool) -> Vec<StageTest> {
        vec![
            test(
                "Appearance",
                Stage::BeforeDisturbance,
                &[(Some(1), first, first), (Some(2), second, second)],
            ),
            test(
                "Redispersibility",
                Stage::Redispersion,
                &[(Some(1), shaken_first, shaken_first), (Some(2), false, false)],
            ),
            test("pH", Stage::AfterRedispersion, &[(None, false, false)]),
        ]
    }

    #[test]
    fn stages_open_in_order_per_container() {
        use Stage::*;
        let lost = |container: Option<i64>, stage| {
            vec![StageLoss { container, stage, why: "the bottle fell over".to_string() }]
        };
        let table = [
            (bench(false, false, false), Vec::new(), BeforeDisturbance, Some(1), ""),
            (bench(false, false, false), Vec::new(), Redispersion, Some(1), "StageNotOpen"),
            (bench(true, false, false), Vec::new(), Redispersion, Some(1), ""),
            (bench(true, false, false), Vec::new(), Redispersion, Some(2), "StageNotOpen"),
            (bench(true, false, true), Vec::new(), BeforeDisturbance, Some(1), "StagePassed"),
            (bench(true, false, true), Vec::new(), BeforeDisturbance, Some(2), ""),
            (bench(true, true, true), Vec::new(), AfterRedispersion, None, "StageNotOpen"),
            (bench(true, false, false), lost(Some(2), BeforeDisturbance), Redispersion, Some(2), ""),
            (bench(true, true, true), lost(Some(2), Redispersion), AfterRedispersion, None, ""),
            (bench(true, true, true), lost(Some(2), Redispersion), Redispersion, Some(2), "StageLost"),
            (bench(false, false, false), lost(None, BeforeDisturbance), Redispersion, Some(2), ""),
        ];
        for (tests, losses, stage, container, expected) in table {
            let said = may_read(&tests, &losses, stage, container);
            let name = said.err().map(|refusal| format!("{refusal:?}")).unwrap_or_default();
            assert!(
                name.starts_with(expected) && name.is_empty() == expected.is_empty(),
                "{name} {expected}"
            );
        }
    }

    #[test]
    fn only_an_open_stage_can_be_closed() {
        let tests = bench(true, false, false);
        assert!(may_close(&tests, &[], Stage::BeforeDisturbance, Some(2)).is_ok());
        assert!(may_close(&tests, &[], Stage::BeforeDisturbance, Some(1)).is_err());
        assert!(may_close(&tests, &[], Stage::BeforeDisturbance, None).is_ok());
    }
}
