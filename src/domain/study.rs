//! A study: a lot on a protocol, with chambers, containers and pulls.

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::age::Age;
use super::container::{self, Purpose};
use super::lot::LotState;
use super::protocol::cost::{Cost, Need, cost};
use super::protocol::{Arm, PlannedAge, ProtocolContent};
use super::refusal::NamedReason;
use super::version::VersionState;
use super::window::{Defaults, Window, window};

/// The rules a study is evaluated by: kept with it, so that an old study is never judged by newer ones.
pub const RULE_SET: &str = "ICH Q1A(R2) and Q1E, WHO TRS 1010 annex 10; windows of 2026";

/// A study to be started.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewStudy {
    pub number: String,
    pub lot: i64,
    pub protocol_version: i64,
    /// Time zero.
    pub started_on: NaiveDate,
    /// The chamber of each arm, in the order of the protocol.
    pub chambers: Vec<Option<i64>>,
}

/// What is known when a study is about to start.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StudyFacts {
    pub is_number_taken: bool,
    pub lot_state: LotState,
    pub lot_made_on: Option<NaiveDate>,
    pub lot_presentation: i64,
    pub protocol_state: VersionState,
    pub protocol_presentation: i64,
    /// Condition of each arm and of the chamber chosen for it.
    pub arms: Vec<ArmFact>,
    pub today: NaiveDate,
}

#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ArmFact {
    pub words: String,
    pub condition: i64,
    pub chamber_condition: Option<i64>,
    pub is_in_use: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum StudyRefusal {
    #[error("There is a study {0} already. A study number is never used twice.")]
    StudyNumberTaken(String),
    #[error(
        "The lot was imported, not observed here. It can be read and charted, and no study starts on it."
    )]
    LotImported,
    #[error("The lot was rejected. No study starts on it.")]
    LotRejected,
    #[error("This protocol version is {0}. A study starts on an approved version.")]
    ProtocolNotApproved(&'static str),
    #[error("The protocol belongs to another presentation than the lot. Choose one of the lot's own.")]
    ProtocolOfOtherPresentation,
    #[error("Time zero lies ahead. Start the study on the day the containers are placed.")]
    StartsInFuture,
    #[error("Time zero lies before the lot was made. Look at the date.")]
    StartsBeforeMade,
    #[error("{arm} has no chamber. Choose one at its condition.")]
    ChamberMissing { place: usize, arm: String },
    #[error("{arm}: this chamber keeps another condition. Choose one at the arm's condition.")]
    ChamberOfOtherCondition { place: usize, arm: String },
}

impl NamedReason for StudyRefusal {
    fn field(&self) -> Option<String> {
        match self {
            StudyRefusal::StudyNumberTaken(_) => Some("number".to_string()),
            StudyRefusal::StartsInFuture | StudyRefusal::StartsBeforeMade => Some("started_on".to_string()),
            StudyRefusal::ChamberMissing { place, .. }
            | StudyRefusal::ChamberOfOtherCondition { place, .. } => Some(format!("chamber.{place}")),
            _ => None,
        }
    }
}

/// Refuses in this order: number, lot, protocol, time zero, then each arm's chamber.
pub fn may_start(new: &NewStudy, facts: &StudyFacts) -> Result<(), StudyRefusal> {
    if facts.is_number_taken {
        return Err(StudyRefusal::StudyNumberTaken(new.number.clone()));
    }
    may_be_studied(facts)?;
    if new.started_on > facts.today {
        return Err(StudyRefusal::StartsInFuture);
    }
    if facts.lot_made_on.is_some_and(|made_on| new.started_on < made_on) {
        return Err(StudyRefusal::StartsBeforeMade);
    }
    for (place, arm) in facts.arms.iter().enumerate() {
        match arm.chamber_condition {
            None if arm.is_in_use => {}
            None => return Err(StudyRefusal::ChamberMissing { place: place + 1, arm: arm.words.clone() }),
            Some(condition) if condition != arm.condition => {
                let arm = arm.words.clone();
                return Err(StudyRefusal::ChamberOfOtherCondition { place: place + 1, arm });
            }
            Some(_) => {}
        }
    }
    Ok(())
}

fn may_be_studied(facts: &StudyFacts) -> Result<(), StudyRefusal> {
    match facts.lot_state {
        LotState::Imported => return Err(StudyRefusal::LotImported),
        LotState::Rejected => return Err(StudyRefusal::LotRejected),
        // A bulk hold is a study of a lot that is still being made.
        LotState::InMaking | LotState::Made | LotState::OnStudy | LotState::Released => {}
    }
    if facts.protocol_state != VersionState::Approved {
        return Err(StudyRefusal::ProtocolNotApproved(facts.protocol_state.words()));
    }
    if facts.protocol_presentation != facts.lot_presentation {
        return Err(StudyRefusal::ProtocolOfOtherPresentation);
    }
    Ok(())
}

/// One arm as it is going to be: its containers and its pulls.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PlannedArm {
    pub arm: Arm,
    pub containers: Vec<(Purpose, u32)>,
    pub pulls: Vec<PlannedPull>,
}

impl PlannedArm {
    /// Containers that are placed, of all purposes.
    pub fn container_count(&self) -> u32 {
        self.containers.iter().map(|(_, count)| count).sum()
    }
}

/// One pull as it is going to be.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PlannedPull {
    pub age: Age,
    pub due_on: NaiveDate,
    pub window: Window,
    pub cost: Cost,
    pub test_within_days: u32,
    /// Test codes, in bench order.
    pub tests: Vec<String>,
    pub is_last: bool,
}

/// What each test of a protocol needs, by its code.
pub type Needs = Vec<(String, Need)>;

/// The whole plan: containers for all pulls of each arm (a contingent one too: it is placed at time zero), spare
/// and retained ones, and the pulls with due dates by calendar months and their windows.
pub fn plan(
    content: &ProtocolContent,
    needs: &Needs,
    fill_ml: Option<Decimal>,
    started_on: NaiveDate,
    defaults: &Defaults,
) -> Vec<PlannedArm> {
    let ground = Ground { content, needs, fill_ml, started_on, defaults };
    content.arms.iter().map(|arm| plan_arm(&ground, arm)).collect()
}

/// What all arms of a plan share.
struct Ground<'a> {
    content: &'a ProtocolContent,
    needs: &'a Needs,
    fill_ml: Option<Decimal>,
    started_on: NaiveDate,
    defaults: &'a Defaults,
}

fn plan_arm(ground: &Ground<'_>, arm: &Arm) -> PlannedArm {
    let content = ground.content;
    let last = arm.ages.len().saturating_sub(1);
    let pulls: Vec<PlannedPull> = arm
        .ages
        .iter()
        .enumerate()
        .map(|(place, planned)| plan_pull(ground, planned, place == last))
        .collect();
    let needed = pulls.iter().map(|pull| pull.cost.containers).sum();
    let containers = [
        (Purpose::Pull, needed),
        (Purpose::Spare, content.spare_containers),
        (Purpose::Retain, content.retain_containers),
        (Purpose::FollowThrough, content.follow_through_containers),
    ];
    let containers = containers.into_iter().filter(|(_, count)| *count > 0).collect();
    PlannedArm { arm: arm.clone(), containers, pulls }
}

fn plan_pull(ground: &Ground<'_>, planned: &PlannedAge, is_last: bool) -> PlannedPull {
    let in_order = ground.content.tests.iter().filter(|test| planned.tests.contains(&test.test));
    let tests: Vec<String> = in_order.map(|test| test.test.clone()).collect();
    let needed: Vec<Need> =
        ground.needs.iter().filter(|(code, _)| tests.contains(code)).map(|(_, need)| *need).collect();
    let due_on = planned.age.due_on(ground.started_on);
    PlannedPull {
        age: planned.age,
        due_on,
        window: window(planned.age, due_on, planned.window, is_last, ground.defaults),
        cost: cost(&needed, ground.fill_ml),
        test_within_days: needed.iter().map(|need| need.test_within_days).max().unwrap_or(0),
        tests,
        is_last,
    }
}

/// The number of a study's pull and of its sample: `ST-031-P07`.
pub fn pull_number(study: &str, place: usize) -> String {
    format!("{study}-P{place:02}")
}

/// The labels of all containers of a plan, arm by arm, in the order of their numbers.
pub fn labels(study: &str, plan: &[PlannedArm]) -> Vec<Vec<(u32, Purpose, String)>> {
    let mut taken = Vec::new();
    let mut arms = Vec::new();
    for (place, arm) in plan.iter().enumerate() {
        let purposes = arm.containers.iter().flat_map(|(purpose, count)| vec![*purpose; *count as usize]);
        let mut containers = Vec::new();
        for (number, purpose) in (1..).zip(purposes) {
            let label = container::label(study, place, number, &taken);
            taken.push(label.clone());
            containers.push((number, purpose, label));
        }
        arms.push(containers);
    }
    arms
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum TriggerRefusal {
    #[error("This arm is not contingent. Its pulls are planned already.")]
    ArmNotContingent,
    #[error("This arm was triggered before. Its pulls are planned already.")]
    ArmTriggered,
    #[error("The study was imported, not observed here. Nothing is planned in it.")]
    StudyImported,
}

impl NamedReason for TriggerRefusal {}

/// Refuses in this order: imported, not contingent, triggered before.
pub fn may_trigger(is_imported: bool, is_contingent: bool, is_triggered: bool) -> Result<(), TriggerRefusal> {
    match (is_imported, is_contingent, is_triggered) {
        (true, _, _) => Err(TriggerRefusal::StudyImported),
        (_, false, _) => Err(TriggerRefusal::ArmNotContingent),
        (_, _, true) => Err(TriggerRefusal::ArmTriggered),
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::protocol::{LimitsDo, Orientation, PlannedTest, Programme, generator, preset};

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn facts() -> StudyFacts {
        StudyFacts {
            is_number_taken: false,
            lot_state: LotState::Made,
            lot_made_on: Some(day("2026-11-01")),
            lot_presentation: 1,
            protocol_state: VersionState::Approved,
            protocol_presentation: 1,
            arms: vec![ArmFact {
                words: "25/60, upright".to_string(),
                condition: 1,
                chamber_condition: Some(1),
                is_in_use: false,
            }],
            today: day("2026-12-01"),
        }
    }

    fn new_study(started_on: &str) -> NewStudy {
        NewStudy {
            number: "ST-031".to_string(),
            lot: 1,
            protocol_version: 1,
            started_on: day(started_on),
            chambers: vec![Some(1)],
        }
    }

    #[test]
    fn a_study_is_refused_for_its_first_fault() {
        let arm = |chamber_condition| {
            vec![ArmFact { chamber_condition, words: "the arm".to_string(), condition: 1, is_in_use: false }]
        };
        use StudyRefusal::*;
        let table = [
            ("2026-12-01", facts(), Ok(())),
            (
                "2026-12-01",
                StudyFacts { is_number_taken: true, lot_state: LotState::Imported, ..facts() },
                Err(StudyNumberTaken("ST-031".to_string())),
            ),
            ("2026-12-01", StudyFacts { lot_state: LotState::Imported, ..facts() }, Err(LotImported)),
            ("2026-12-01", StudyFacts { lot_state: LotState::Rejected, ..facts() }, Err(LotRejected)),
            (
                "2026-12-01",
                StudyFacts { protocol_state: VersionState::Draft, ..facts() },
                Err(ProtocolNotApproved("draft")),
            ),
            (
                "2026-12-01",
                StudyFacts { protocol_state: VersionState::Imported, ..facts() },
                Err(ProtocolNotApproved("imported, not approved here")),
            ),
            (
                "2026-12-01",
                StudyFacts { protocol_presentation: 2, ..facts() },
                Err(ProtocolOfOtherPresentation),
            ),
            ("2026-12-02", facts(), Err(StartsInFuture)),
            ("2026-10-31", facts(), Err(StartsBeforeMade)),
            (
                "2026-12-01",
                StudyFacts { arms: arm(None), ..facts() },
                Err(ChamberMissing { place: 1, arm: "the arm".to_string() }),
            ),
            (
                "2026-12-01",
                StudyFacts { arms: arm(Some(2)), ..facts() },
                Err(ChamberOfOtherCondition { place: 1, arm: "the arm".to_string() }),
            ),
        ];
        for (started_on, facts, expected) in table {
            assert_eq!(may_start(&new_study(started_on), &facts), expected, "{facts:?}");
        }
    }

    fn content() -> ProtocolContent {
        let test = |code: &str| PlannedTest {
            test: code.to_string(),
            title: code.to_string(),
            method_version: 1,
            is_information: false,
        };
        let tests = vec![test("redispersibility"), test("ph")];
        let codes: Vec<String> = tests.iter().map(|test| test.test.clone()).collect();
        let arm = |condition| Arm {
            condition,
            orientation: Orientation::Upright,
            limits_do: LimitsDo::OutOfSpecification,
            is_labelled_condition: true,
            is_contingent: condition == 2,
            ages: generator::long_term(36).into_iter().map(|age| preset::planned(age, &codes)).collect(),
        };
        ProtocolContent {
            programme: Programme::Development,
            specification_version: 1,
            arms: vec![arm(1), arm(2), arm(3)],
            tests,
            spare_containers: 2,
            retain_containers: 1,
            follow_through_containers: 0,
            why_no_intermediate: None,
            worst_orientation: None,
            trend_promise_percent: None,
        }
    }

    /// Hand-counted: 3 conditions × 8 ages = 24 pulls; 3 bottles each, so 24 + 2 spare + 1 retain an arm.
    #[test]
    fn three_conditions_with_eight_ages_need_the_hand_counted_containers() {
        let need = |containers| Need {
            containers,
            ml: None,
            may_share_after: true,
            minutes: 15,
            test_within_days: 7,
        };
        let needs = vec![("redispersibility".to_string(), need(3)), ("ph".to_string(), need(1))];
        let plan = plan(&content(), &needs, None, day("2026-08-31"), &Defaults::default());
        assert_eq!(plan.iter().map(|arm| arm.pulls.len()).sum::<usize>(), 24);
        assert_eq!(plan.iter().map(PlannedArm::container_count).collect::<Vec<_>>(), [27, 27, 27]);
        let due: Vec<String> = plan[0].pulls.iter().map(|pull| pull.due_on.to_string()).collect();
        assert_eq!(
            due,
            [
                "2026-08-31",
                "2026-11-30",
                "2027-02-28",
                "2027-05-31",
                "2027-08-31",
                "2028-02-29",
                "2028-08-31",
                "2029-08-31"
            ]
        );
        assert_eq!(plan[0].pulls[1].window.words(), "30 Nov–7 Dec 2026");
        assert_eq!(plan[0].pulls[0].cost, Cost { containers: 3, minutes: 30 });
        assert!(plan[0].pulls[7].is_last && !plan[0].pulls[6].is_last);
        let labels = labels("ST-031", &plan);
        assert_eq!(labels.iter().flatten().count(), 81);
        let purposes: Vec<Purpose> = labels[0].iter().map(|(_, purpose, _)| *purpose).collect();
        assert_eq!(purposes[23..], [Purpose::Pull, Purpose::Spare, Purpose::Spare, Purpose::Retain]);
    }

    #[test]
    fn an_arm_is_triggered_once() {
        assert_eq!(may_trigger(false, true, false), Ok(()));
        assert_eq!(may_trigger(true, true, false), Err(TriggerRefusal::StudyImported));
        assert_eq!(may_trigger(false, false, false), Err(TriggerRefusal::ArmNotContingent));
        assert_eq!(may_trigger(false, true, true), Err(TriggerRefusal::ArmTriggered));
        assert_eq!(pull_number("ST-031", 7), "ST-031-P07");
    }
}
