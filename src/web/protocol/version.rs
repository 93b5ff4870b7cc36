//! A protocol version: its arms and tests with what they cost, its faults, and its signatures.

use askama::Template;

use super::super::form::Form;
use super::super::page::Shell;
use super::super::part::{Signatures, Trail};
use super::super::reply::{Outcome, page_with};
use super::super::version as versions;
use super::super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::protocol::cost::{Cost, Need, cost, minutes_words};
use crate::domain::protocol::rules::{self, ProtocolFacts, arm_words};
use crate::domain::protocol::{Arm, ProtocolContent};
use crate::domain::study::Needs;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::domain::window::Defaults;
use crate::store;
use crate::store::Reader;
use crate::store::protocol::Protocol;
use crate::store::version::Version;

/// A version with all that its pages show.
pub(super) struct Loaded {
    pub protocol: Protocol,
    pub version: Version,
    pub content: ProtocolContent,
    pub facts: ProtocolFacts,
    pub needs: Needs,
    /// The site's default windows that hold now.
    pub windows: Defaults,
}

pub(super) fn load(reader: &Reader<'_>, id: i64) -> Result<Loaded, Failure> {
    let version = store::version::get(reader, Versioned::Protocol, id)?;
    let protocol = store::protocol::get(reader, version.parent)?;
    let content: ProtocolContent = version.read()?;
    let facts = store::protocol::facts(reader, protocol.presentation, &content)?;
    let needs = store::protocol::needs(reader, &content)?;
    let windows = store::setting::windows(reader)?;
    Ok(Loaded { protocol, version, content, facts, needs, windows })
}

/// One arm as a matrix of ages and tests with what each age costs.
pub(super) struct ArmView {
    pub words: String,
    pub side: String,
    pub rows: Vec<AgeView>,
    pub containers: u32,
    pub minutes: String,
}

pub(super) struct AgeView {
    pub age: String,
    pub window: String,
    /// Per test: field name, spoken label, whether it is ticked, what it costs.
    pub cells: Vec<Cell>,
    pub containers: u32,
    pub minutes: String,
}

pub(super) struct Cell {
    pub name: String,
    pub label: String,
    pub is_ticked: bool,
    pub cost: String,
}

impl Loaded {
    fn fill_ml(&self) -> Option<rust_decimal::Decimal> {
        self.protocol.fill_ml.as_deref().and_then(|text| text.parse().ok())
    }

    fn need(&self, test: &str) -> Option<Need> {
        self.needs.iter().find(|(code, _)| code == test).map(|(_, need)| *need)
    }

    pub fn arms(&self) -> Vec<ArmView> {
        self.content.arms.iter().enumerate().map(|(place, arm)| self.arm(place, arm)).collect()
    }

    fn arm(&self, place: usize, arm: &Arm) -> ArmView {
        let words = arm_words(arm, &self.facts);
        let mut total = Cost::default();
        let mut rows = Vec::new();
        for (at, planned) in arm.ages.iter().enumerate() {
            let needs: Vec<Need> = planned.tests.iter().filter_map(|test| self.need(test)).collect();
            let one = cost(&needs, self.fill_ml());
            total.containers += one.containers;
            total.minutes += one.minutes;
            let cell = |(column, test): (usize, &crate::domain::protocol::PlannedTest)| Cell {
                name: format!("tick.{}.{}.{}", place + 1, at + 1, column + 1),
                label: format!("{}, {}, {words}", test.title, planned.age.words()),
                is_ticked: planned.tests.contains(&test.test),
                cost: self.need(&test.test).map_or("no approved method".to_string(), |need| {
                    format!("{} × {} min", need.containers, need.minutes)
                }),
            };
            rows.push(AgeView {
                age: planned.age.words(),
                window: window_words(arm, at, &self.windows),
                cells: self.content.tests.iter().enumerate().map(cell).collect(),
                containers: one.containers,
                minutes: minutes_words(one.minutes),
            });
        }
        let kept = self.content.spare_containers
            + self.content.retain_containers
            + self.content.follow_through_containers;
        let containers = total.containers + kept;
        ArmView { words, side: side_words(arm), rows, containers, minutes: minutes_words(total.minutes) }
    }
}

fn window_words(arm: &Arm, at: usize, windows: &Defaults) -> String {
    let planned = &arm.ages[at];
    let (before, after) = planned.window.unwrap_or_else(|| windows.days(planned.age));
    let before = if at + 1 == arm.ages.len() { 0 } else { before };
    format!("−{before}/+{after} d")
}

fn side_words(arm: &Arm) -> String {
    let mut words = vec![format!("a value beyond a limit: {}", arm.limits_do.words())];
    if arm.is_labelled_condition {
        words.push("labelled condition".to_string());
    }
    if arm.is_contingent {
        words.push("contingent: placed at time zero, tested only when triggered".to_string());
    }
    words.join("; ")
}

#[derive(Template)]
#[template(path = "protocol/version.html")]
struct VersionPage {
    shell: Shell,
    id: i64,
    protocol: Protocol,
    number: i64,
    reason: String,
    state: &'static str,
    programme: &'static str,
    specification_version: i64,
    spare: u32,
    retain: u32,
    followed: u32,
    why_no_intermediate: Option<String>,
    worst_orientation: Option<String>,
    promise: String,
    tests: Vec<(String, bool)>,
    arms: Vec<ArmView>,
    faults: Vec<String>,
    is_draft: bool,
    signatures: Signatures,
    form: Option<Form>,
    trail: Trail,
}

pub(super) fn one(visit: &Visit) -> Outcome {
    version_page(200, visit, visit.id("id")?, None)
}

fn version_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (loaded, lines) = visit.read(|reader| {
        Ok((load(reader, id)?, store::trail::of_subject(reader, Subject::new(Kind::ProtocolVersion, id))?))
    })?;
    let form = match failed {
        Some(failed) => Some(failed),
        None => versions::next_form(visit, Versioned::Protocol, &loaded.version, &path(id))?,
    };
    let arms = loaded.arms();
    let found = rules::faults(&loaded.content, &loaded.facts);
    let Loaded { protocol, version, content, .. } = loaded;
    let title = format!("Protocol {} version {}", protocol.code, version.number);
    let mut shell = Shell::of(visit, &title)
        .crumb("/protocols", "Protocols")
        .crumb(format!("/protocols/{}", protocol.id), protocol.code.clone())
        .print(version.state.words(), &version.digest());
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let page = VersionPage {
        shell,
        id,
        number: version.number,
        reason: version.reason.clone(),
        state: version.state.words(),
        programme: content.programme.words(),
        specification_version: content.specification_version,
        spare: content.spare_containers,
        retain: content.retain_containers,
        followed: content.follow_through_containers,
        why_no_intermediate: content.why_no_intermediate.clone(),
        worst_orientation: content.worst_orientation.clone(),
        promise: match content.trend_promise_percent {
            Some(percent) => format!(
                "at most {percent} % of good lots see a false action over the planned pulls of an arm"
            ),
            None => "each pull is judged at 1 %".to_string(),
        },
        tests: content.tests.iter().map(|test| (test.title.clone(), test.is_information)).collect(),
        arms,
        faults: found.iter().map(ToString::to_string).collect(),
        is_draft: version.state == VersionState::Draft && visit.may(Act::DraftProtocolVersion),
        signatures: versions::signatures(visit, Versioned::Protocol, &version)?,
        form,
        trail: Trail::of(&lines, visit.at.zone),
        protocol,
    };
    page_with(status, &page)
}

pub(super) fn path(id: i64) -> String {
    format!("/protocol-versions/{id}")
}

pub(super) fn sign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    versions::sign(
        visit,
        Versioned::Protocol,
        id,
        &path(id),
        &acts::protocol::content_is_sound,
        |status, form| version_page(status, visit, id, Some(form)),
    )
}
