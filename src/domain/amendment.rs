//! Amending a running study: a newer approved protocol version for the pulls that are still to be taken.

use chrono::NaiveDate;

use super::moment::date_shown;
use super::protocol::{Arm, ProtocolContent};
use super::refusal::NamedReason;
use super::study::{PlannedArm, PlannedPull};
use super::version::VersionState;
use super::window::Window;

/// A pull of the study as it stands; superseded ones are left out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StandingPull {
    pub id: i64,
    pub number: String,
    pub arm_position: i64,
    pub age_text: String,
    /// Neither taken nor missed nor cancelled.
    pub is_open: bool,
    pub window: Option<Window>,
    pub containers_needed: u32,
    pub test_within_days: u32,
    /// Test code and method version, in bench order.
    pub tests: Vec<(String, i64)>,
    pub specification_version: Option<i64>,
}

/// What is known when a study is about to be amended.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct AmendmentFacts {
    pub is_imported: bool,
    pub version_state: VersionState,
    /// The version belongs to the protocol that the study follows.
    pub is_same_protocol: bool,
    /// Number of the version that the study follows, and of the new one.
    pub was: i64,
    pub is: i64,
    /// The arms of both versions agree in all but their ages.
    pub are_arms_same: bool,
    /// Arms whose open pulls need more containers than are left: words, needed, left.
    pub short: Vec<(String, u32, u32)>,
    /// The rows are the ones that the person saw.
    pub is_as_seen: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum AmendmentRefusal {
    #[error("The study was imported, not observed here. Nothing is planned in it.")]
    StudyImported,
    #[error("This protocol version is {0}. A study is amended to an approved version.")]
    ProtocolNotApproved(&'static str),
    #[error("This version belongs to another protocol than the study follows.")]
    ProtocolOther,
    #[error("The study follows version {was}. It is amended to a newer one, and version {is} is not newer.")]
    ProtocolNotNewer { was: i64, is: i64 },
    #[error(
        "The new version has other arms than the study. An amendment changes ages, tests and windows; another \
         condition or orientation needs a study of its own."
    )]
    ArmsDiffer,
    #[error(
        "{arm}: the pulls to come need {needed} containers and {left} are left. Plan fewer ages or tests."
    )]
    ContainersShort { arm: String, needed: u32, left: u32 },
    #[error("The rows changed since this page was opened. Look at them again.")]
    RowsChanged,
}

impl NamedReason for AmendmentRefusal {}

/// Refuses in this order: imported, not approved, another protocol, not newer, other arms, containers, changed rows.
pub fn may_amend(facts: &AmendmentFacts) -> Result<(), AmendmentRefusal> {
    if facts.is_imported {
        return Err(AmendmentRefusal::StudyImported);
    }
    if facts.version_state != VersionState::Approved {
        return Err(AmendmentRefusal::ProtocolNotApproved(facts.version_state.words()));
    }
    if !facts.is_same_protocol {
        return Err(AmendmentRefusal::ProtocolOther);
    }
    if facts.is <= facts.was {
        return Err(AmendmentRefusal::ProtocolNotNewer { was: facts.was, is: facts.is });
    }
    if !facts.are_arms_same {
        return Err(AmendmentRefusal::ArmsDiffer);
    }
    if let Some((arm, needed, left)) = facts.short.first().cloned() {
        return Err(AmendmentRefusal::ContainersShort { arm, needed, left });
    }
    if facts.is_as_seen { Ok(()) } else { Err(AmendmentRefusal::RowsChanged) }
}

/// The arms of two versions agree in all but their ages.
pub fn are_arms_same(was: &[Arm], is: &[Arm]) -> bool {
    let without_ages = |arm: &Arm| Arm { ages: Vec::new(), ..arm.clone() };
    was.len() == is.len() && was.iter().zip(is).all(|(one, other)| without_ages(one) == without_ages(other))
}

/// What an amendment does to one row.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Doing {
    /// A pull still to be taken is superseded by one of the new version.
    Superseded { pull: i64, by: PlannedPull },
    /// An age that the study did not have.
    Added(PlannedPull),
    /// An age that the new version no longer has.
    LeftOut { pull: i64 },
    /// An added age whose window has closed already: it is listed and not planned.
    TooLate,
}

/// One row of an amendment: which pull, and what changes in words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Row {
    pub arm_position: i64,
    pub age_text: String,
    /// The number of the pull that stands, if there is one.
    pub number: Option<String>,
    pub was: String,
    pub is: String,
    pub doing: Doing,
}

/// How people call the versions that pulls rest on, by the number of the record.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Names {
    pub methods: Vec<(i64, String)>,
    pub specifications: Vec<(i64, String)>,
}

fn named(names: &[(i64, String)], id: i64) -> String {
    names
        .iter()
        .find(|(of, _)| *of == id)
        .map_or("a version not approved now".to_string(), |(_, name)| name.clone())
}

/// What the rows of an amendment are worked out from.
pub struct Ground<'a> {
    pub content: &'a ProtocolContent,
    pub plan: &'a [PlannedArm],
    /// Places of contingent arms that were not triggered: they have no pulls yet.
    pub waiting: &'a [i64],
    pub standing: &'a [StandingPull],
    pub names: &'a Names,
    pub today: NaiveDate,
}

impl Ground<'_> {
    /// Tests by their titles, as the pages call them.
    fn titles(&self, codes: &[String]) -> String {
        let title = |code: &String| {
            let found = self.content.tests.iter().find(|test| test.test == *code);
            found.map_or(code.clone(), |test| test.title.clone())
        };
        codes.iter().map(title).collect::<Vec<_>>().join(", ")
    }
}

/// The rows that change, arm by arm. Pulls that were taken, missed or cancelled are never among them, nor arms
/// that wait for their trigger.
pub fn rows(ground: &Ground<'_>) -> Vec<Row> {
    let mut rows = Vec::new();
    for (position, arm) in (1_i64..).zip(ground.plan) {
        if ground.waiting.contains(&position) {
            continue;
        }
        let own: Vec<&StandingPull> =
            ground.standing.iter().filter(|pull| pull.arm_position == position).collect();
        for planned in &arm.pulls {
            let words = planned.age.words();
            let found = own.iter().find(|pull| pull.age_text == words);
            rows.extend(row_of(ground, position, planned, found.copied()));
        }
        let ages: Vec<String> = arm.pulls.iter().map(|pull| pull.age.words()).collect();
        let left_out = own.iter().filter(|pull| pull.is_open && !ages.contains(&pull.age_text));
        rows.extend(left_out.map(|pull| Row {
            arm_position: position,
            age_text: pull.age_text.clone(),
            number: Some(pull.number.clone()),
            was: "planned".to_string(),
            is: "left out".to_string(),
            doing: Doing::LeftOut { pull: pull.id },
        }));
    }
    rows
}

fn row_of(
    ground: &Ground<'_>,
    arm_position: i64,
    planned: &PlannedPull,
    found: Option<&StandingPull>,
) -> Option<Row> {
    let row = |number: Option<String>, was: String, is: String, doing| Row {
        arm_position,
        age_text: planned.age.words(),
        number,
        was,
        is,
        doing,
    };
    let Some(pull) = found else {
        let not_there = "not in the plan".to_string();
        if planned.window.latest_on < ground.today {
            let closed =
                format!("not planned: its window closed on {}", date_shown(planned.window.latest_on));
            return Some(row(None, not_there, closed, Doing::TooLate));
        }
        let is = format!("{}; tests {}", planned.window.words(), ground.titles(&planned.tests));
        return Some(row(None, not_there, is, Doing::Added(planned.clone())));
    };
    let (was, is) = differences(ground, planned, pull);
    if !pull.is_open || was.is_empty() {
        return None;
    }
    let doing = Doing::Superseded { pull: pull.id, by: planned.clone() };
    Some(row(Some(pull.number.clone()), was.join("; "), is.join("; "), doing))
}

/// Where a standing pull and the new plan differ, in words: was and is.
fn differences(
    ground: &Ground<'_>,
    planned: &PlannedPull,
    pull: &StandingPull,
) -> (Vec<String>, Vec<String>) {
    let mut lines = Vec::new();
    let mut differ = |what: &str, was: String, is: String| {
        if was != is {
            lines.push((format!("{what} {was}"), format!("{what} {is}")));
        }
    };
    let codes: Vec<String> = pull.tests.iter().map(|(code, _)| code.clone()).collect();
    differ("tests", ground.titles(&codes), ground.titles(&planned.tests));
    for (code, method) in &pull.tests {
        let new = ground.content.tests.iter().find(|test| test.test == *code && planned.tests.contains(code));
        if let Some(new) = new {
            let name = |id: i64| named(&ground.names.methods, id);
            differ(&new.title, format!("by {}", name(*method)), format!("by {}", name(new.method_version)));
        }
    }
    let window = pull.window.map_or("none".to_string(), |window| window.words());
    differ("window", window, planned.window.words());
    differ("containers", pull.containers_needed.to_string(), planned.cost.containers.to_string());
    differ("tested within days", pull.test_within_days.to_string(), planned.test_within_days.to_string());
    let bound =
        pull.specification_version.map_or("none".to_string(), |id| named(&ground.names.specifications, id));
    differ("specification", bound, named(&ground.names.specifications, ground.content.specification_version));
    lines.into_iter().unzip()
}

/// Containers that the open pulls of an arm need after the rows are done.
pub fn containers_needed(position: i64, standing: &[StandingPull], rows: &[Row]) -> u32 {
    let gone: Vec<i64> = rows
        .iter()
        .filter_map(|row| match row.doing {
            Doing::Superseded { pull, .. } | Doing::LeftOut { pull } => Some(pull),
            _ => None,
        })
        .collect();
    let stays = standing
        .iter()
        .filter(|pull| pull.arm_position == position && pull.is_open && !gone.contains(&pull.id))
        .map(|pull| pull.containers_needed);
    let comes = rows.iter().filter(|row| row.arm_position == position).map(|row| match &row.doing {
        Doing::Superseded { by, .. } | Doing::Added(by) => by.cost.containers,
        _ => 0,
    });
    stays.chain(comes).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn facts() -> AmendmentFacts {
        AmendmentFacts {
            is_imported: false,
            version_state: VersionState::Approved,
            is_same_protocol: true,
            was: 1,
            is: 2,
            are_arms_same: true,
            short: Vec::new(),
            is_as_seen: true,
        }
    }

    #[test]
    fn an_amendment_is_refused_for_its_first_fault() {
        use AmendmentRefusal::*;
        let arm = || "25 °C/60 % RH, upright".to_string();
        let table = [
            (facts(), Ok(())),
            (AmendmentFacts { is_imported: true, is: 1, ..facts() }, Err(StudyImported)),
            (
                AmendmentFacts { version_state: VersionState::Draft, ..facts() },
                Err(ProtocolNotApproved("draft")),
            ),
            (AmendmentFacts { is_same_protocol: false, is: 1, ..facts() }, Err(ProtocolOther)),
            (AmendmentFacts { is: 1, ..facts() }, Err(ProtocolNotNewer { was: 1, is: 1 })),
            (AmendmentFacts { are_arms_same: false, is_as_seen: false, ..facts() }, Err(ArmsDiffer)),
            (
                AmendmentFacts { short: vec![(arm(), 9, 6)], is_as_seen: false, ..facts() },
                Err(ContainersShort { arm: arm(), needed: 9, left: 6 }),
            ),
            (AmendmentFacts { is_as_seen: false, ..facts() }, Err(RowsChanged)),
        ];
        for (facts, expected) in table {
            assert_eq!(may_amend(&facts), expected, "{facts:?}");
        }
    }
}
