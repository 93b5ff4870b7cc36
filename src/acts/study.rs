//! Starting a study, and triggering a contingent arm.

use rust_decimal::Decimal;

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::chamber::qualification_warning;
use crate::domain::failure::Failure;
use crate::domain::protocol::{LimitsDo, PlannedTest, ProtocolContent};
use crate::domain::reason::Reason;
use crate::domain::study::{self, ArmFact, NewStudy, PlannedArm, PlannedPull, StudyFacts};
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::lot::Lot;
use crate::store::study::NewPullSample;
use crate::store::version::Version;

/// What a study is going to be: shown before it starts, and made when it does.
pub struct Prepared {
    pub lot: Lot,
    pub version: Version,
    pub content: ProtocolContent,
    pub facts: StudyFacts,
    pub plan: Vec<PlannedArm>,
    /// Sentences about chambers whose qualification is overdue.
    pub warnings: Vec<String>,
}

/// Loads everything a study on this lot and protocol needs, and plans it.
pub fn prepare(reader: &Reader<'_>, new: &NewStudy, today: chrono::NaiveDate) -> Result<Prepared, Failure> {
    let lot = store::lot::get(reader, new.lot)?;
    let version = store::version::get(reader, Versioned::Protocol, new.protocol_version)?;
    let content: ProtocolContent = version.read()?;
    let protocol = store::protocol::get(reader, version.parent)?;
    let chambers = store::chamber::all(reader)?;
    let conditions = store::condition::all(reader)?;
    let needs = store::protocol::needs(reader, &content)?;
    let mut warnings = Vec::new();
    let mut arms = Vec::new();
    for (place, arm) in content.arms.iter().enumerate() {
        let chosen = new.chambers.get(place).copied().flatten();
        let chamber = chambers.iter().find(|chamber| Some(chamber.id) == chosen);
        let name = conditions.iter().find(|found| found.id == arm.condition).map(|found| found.name.as_str());
        warnings.extend(
            chamber.and_then(|chamber| {
                qualification_warning(&chamber.code, chamber.qualification_due_on, today)
            }),
        );
        arms.push(ArmFact {
            words: format!("{}, {}", name.unwrap_or("a condition"), arm.orientation.words()),
            condition: arm.condition,
            chamber_condition: chamber.map(|chamber| chamber.condition),
            is_in_use: arm.limits_do == LimitsDo::InUse,
        });
    }
    warnings.dedup();
    let facts = StudyFacts {
        is_number_taken: store::study::by_number(reader, &new.number)?.is_some(),
        lot_state: lot.state(),
        lot_made_on: lot.made_on,
        lot_presentation: lot.presentation,
        protocol_state: version.state,
        protocol_presentation: protocol.presentation,
        arms,
        today,
    };
    let windows = store::setting::windows(reader)?;
    let plan = study::plan(&content, &needs, fill_ml(&lot), new.started_on, &windows);
    Ok(Prepared { lot, version, content, facts, plan, warnings })
}

fn fill_ml(lot: &Lot) -> Option<Decimal> {
    lot.fill_ml.as_deref().and_then(|text| Decimal::from_str_exact(text).ok())
}

/// Starts a study: arms with chambers, containers with labels, pulls with samples and tests.
///
/// A contingent arm is placed and gets its pulls when it is triggered. Refuses in the order of
/// [`study::may_start`].
pub fn start(db: &Db, actor: &Actor, new: &NewStudy) -> Result<i64, Failure> {
    db.change(actor, Act::StartStudy, &Reason::none(), |change| {
        let prepared = prepare(change, new, actor.at.date())?;
        study::may_start(new, &prepared.facts)?;
        let specification = prepared.content.specification_version;
        let id = store::study::insert(change, new, prepared.content.programme, specification)?;
        let labels = study::labels(&new.number, &prepared.plan);
        let mut pulls = Vec::new();
        for (place, planned) in prepared.plan.iter().enumerate() {
            let chamber = new.chambers.get(place).copied().flatten();
            let position = i64::try_from(place + 1).unwrap_or_default();
            let arm = store::study::insert_arm(change, id, position, &planned.arm, chamber)?;
            for (number, purpose, label) in &labels[place] {
                store::study::insert_container(change, arm, *number, *purpose, label)?;
            }
            if !planned.arm.is_contingent {
                pulls.extend(planned.pulls.iter().map(|pull| (arm, pull)));
            }
        }
        let made = Made { study: &new.number, lot: new.lot, content: &prepared.content };
        insert_pulls(change, &made, 0, pulls)?;
        tell_start(change, new, id, &prepared)
    })
}

/// What the pulls of a study share.
pub(super) struct Made<'a> {
    pub study: &'a str,
    pub lot: i64,
    pub content: &'a ProtocolContent,
}

/// Inserts one pull with its number, its sample and its tests.
pub(super) fn insert_pull(
    change: &Change<'_>,
    made: &Made<'_>,
    place: usize,
    arm: i64,
    pull: &PlannedPull,
    supersedes: Option<i64>,
) -> Result<i64, Failure> {
    let tests: Vec<&PlannedTest> =
        made.content.tests.iter().filter(|test| pull.tests.contains(&test.test)).collect();
    let sample = NewPullSample {
        number: &study::pull_number(made.study, place),
        lot: made.lot,
        specification_version: made.content.specification_version,
        tests: &tests,
        supersedes,
    };
    store::study::insert_pull(change, arm, pull, &sample)
}

/// Inserts pulls numbered by their due dates, after the `first` that are there already.
fn insert_pulls(
    change: &Change<'_>,
    made: &Made<'_>,
    first: usize,
    mut pulls: Vec<(i64, &PlannedPull)>,
) -> Result<(), Failure> {
    pulls.sort_by_key(|(arm, pull)| (pull.due_on, *arm));
    for (place, (arm, pull)) in (first + 1..).zip(pulls) {
        insert_pull(change, made, place, arm, pull, None)?;
    }
    Ok(())
}

fn tell_start(change: &mut Change<'_>, new: &NewStudy, id: i64, prepared: &Prepared) -> Result<i64, Failure> {
    change.concerns(Kind::Study, id)?;
    change.concerns(Kind::Lot, new.lot)?;
    change.concerns(Kind::ProtocolVersion, new.protocol_version)?;
    for chamber in new.chambers.iter().flatten() {
        change.concerns(Kind::Chamber, *chamber)?;
    }
    let containers: u32 = prepared.plan.iter().map(PlannedArm::container_count).sum();
    let warnings: String = prepared.warnings.iter().map(|warning| format!(" {warning}")).collect();
    let arms = prepared.plan.len();
    change.tell(format!(
        "{} of lot {}: {arms} arms, {containers} containers.{warnings}",
        new.number, prepared.lot.number
    ));
    Ok(id)
}

/// Triggers a contingent arm: its pulls are planned from time zero, and those past due show as late.
///
/// Refuses in the order of [`study::may_trigger`].
pub fn trigger(db: &Db, actor: &Actor, arm: i64, reason: &Reason) -> Result<i64, Failure> {
    db.change(actor, Act::TriggerArm, reason, |change| {
        let (study_id, line) = store::study::arm(change, arm)?;
        let found = store::study::get(change, study_id)?;
        study::may_trigger(found.is_imported, line.is_contingent, line.is_triggered)?;
        let (Some(version), Some(started_on)) = (found.protocol_version, found.started_on) else {
            return Err(study::TriggerRefusal::StudyImported.into());
        };
        let new = NewStudy {
            number: found.number.clone(),
            lot: found.lot,
            protocol_version: version,
            started_on,
            chambers: Vec::new(),
        };
        let prepared = prepare(change, &new, actor.at.date())?;
        store::study::insert_trigger(change, arm, reason.text().unwrap_or_default())?;
        let place = usize::try_from(line.position - 1).unwrap_or_default();
        let planned = prepared.plan.get(place).map(|arm| arm.pulls.as_slice()).unwrap_or_default();
        let made = Made { study: &found.number, lot: found.lot, content: &prepared.content };
        let first = store::study::pull_count(change, study_id)?;
        insert_pulls(change, &made, first, planned.iter().map(|pull| (arm, pull)).collect())?;
        change.concerns(Kind::Study, study_id)?;
        change.concerns(Kind::Lot, found.lot)?;
        change.tell(format!(
            "{}, {} {}: {} pulls",
            found.number,
            line.condition_name,
            line.orientation,
            planned.len()
        ));
        Ok(study_id)
    })
}
