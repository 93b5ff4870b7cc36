//! Amending a running study to a newer version of its protocol.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::amendment::{
    self, AmendmentFacts, AmendmentRefusal, Doing, Ground, Names, Row, StandingPull,
};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::protocol::ProtocolContent;
use crate::domain::pull::Event;
use crate::domain::reason::Reason;
use crate::domain::study::{NewStudy, PlannedPull};
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::study::{ArmLine, Study};
use crate::store::version::Version;

/// What an amendment is going to do: shown before it is done, and done when it is.
pub struct Amending {
    pub study: Study,
    pub arms: Vec<ArmLine>,
    pub version: Version,
    pub content: ProtocolContent,
    pub facts: AmendmentFacts,
    pub rows: Vec<Row>,
}

impl Amending {
    /// Stands for the version and the rows, so that nothing is done that was not seen.
    pub fn digest(&self) -> String {
        sha256_hex(format!("{} {:?}", self.version.id, self.rows).as_bytes())
    }
}

/// The newest approved version of the protocol that a study follows, if it is newer than the one it follows.
pub fn newer_version(reader: &Reader<'_>, study: &Study) -> Result<Option<i64>, Failure> {
    let Some(current) = study.protocol_version else { return Ok(None) };
    let current = store::version::get(reader, Versioned::Protocol, current)?;
    let newest = store::version::approved(reader, Versioned::Protocol, current.parent)?;
    Ok(newest.filter(|newest| newest.number > current.number).map(|newest| newest.id))
}

/// Loads everything an amendment to this version needs, and works out the rows that change.
pub fn prepare(
    reader: &Reader<'_>,
    id: i64,
    protocol_version: i64,
    today: chrono::NaiveDate,
) -> Result<Amending, Failure> {
    let study = store::study::get(reader, id)?;
    let (Some(current), Some(started_on)) = (study.protocol_version, study.started_on) else {
        return Err(AmendmentRefusal::StudyImported.into());
    };
    let current = store::version::get(reader, Versioned::Protocol, current)?;
    let new = NewStudy {
        number: study.number.clone(),
        lot: study.lot,
        protocol_version,
        started_on,
        chambers: Vec::new(),
    };
    let prepared = super::study::prepare(reader, &new, today)?;
    let arms = store::study::arms(reader, id)?;
    let standing = store::amendment::standing(reader, id)?;
    let waits = |arm: &&ArmLine| arm.is_contingent && !arm.is_triggered;
    let waiting: Vec<i64> = arms.iter().filter(waits).map(|arm| arm.position).collect();
    let names = names(reader, &standing, &prepared.content)?;
    let ground = Ground {
        content: &prepared.content,
        plan: &prepared.plan,
        waiting: &waiting,
        standing: &standing,
        names: &names,
        today,
    };
    let rows = amendment::rows(&ground);
    let short = arms.iter().filter_map(|arm| {
        let needed = amendment::containers_needed(arm.position, &standing, &rows);
        let left = u32::try_from(arm.containers_left).unwrap_or_default();
        (needed > left).then(|| (format!("{}, {}", arm.condition_name, arm.orientation), needed, left))
    });
    let was: ProtocolContent = current.read()?;
    let facts = AmendmentFacts {
        is_imported: study.is_imported,
        version_state: prepared.version.state,
        is_same_protocol: prepared.version.parent == current.parent,
        was: current.number,
        is: prepared.version.number,
        are_arms_same: amendment::are_arms_same(&was.arms, &prepared.content.arms),
        short: short.collect(),
        is_as_seen: true,
    };
    Ok(Amending { study, arms, version: prepared.version, content: prepared.content, facts, rows })
}

/// The names of all versions that the pulls rest on, before and after.
fn names(
    reader: &Reader<'_>,
    standing: &[StandingPull],
    content: &ProtocolContent,
) -> Result<Names, Failure> {
    let methods = store::method::approved_versions(reader)?;
    let methods = methods.into_iter().map(|one| (one.id, format!("{} version {}", one.code, one.number)));
    let mut ids: Vec<i64> = standing.iter().filter_map(|pull| pull.specification_version).collect();
    ids.push(content.specification_version);
    ids.sort_unstable();
    ids.dedup();
    let mut specifications = Vec::new();
    for id in ids {
        let version = store::version::get(reader, Versioned::Specification, id)?;
        let owner = store::specification::get(reader, version.parent)?;
        specifications.push((id, format!("{} version {}", owner.code, version.number)));
    }
    Ok(Names { methods: methods.collect(), specifications })
}

/// Amends a study: the rows that were seen are done, pulls that were taken stay as they are.
///
/// Refuses in the order of [`amendment::may_amend`].
pub fn amend(
    db: &Db,
    actor: &Actor,
    id: i64,
    protocol_version: i64,
    seen: &str,
    reason: &Reason,
) -> Result<i64, Failure> {
    db.change(actor, Act::AmendStudy, reason, |change| {
        let mut amending = prepare(change, id, protocol_version, actor.at.date())?;
        amending.facts.is_as_seen = amending.digest() == seen;
        amendment::may_amend(&amending.facts)?;
        let why = reason.text().unwrap_or_default();
        let specification = amending.content.specification_version;
        store::amendment::insert(change, id, protocol_version, specification, why)?;
        let mut place = store::study::pull_count(change, id)?;
        for row in &amending.rows {
            apply(change, &amending, row, &mut place)?;
        }
        tell(change, &amending)?;
        Ok(id)
    })
}

fn apply(change: &mut Change<'_>, amending: &Amending, row: &Row, place: &mut usize) -> Result<(), Failure> {
    match &row.doing {
        Doing::TooLate => Ok(()),
        Doing::Added(planned) => plan(change, amending, row, planned, None, place),
        Doing::LeftOut { pull } => close(change, *pull, "left out of the plan by an amendment"),
        Doing::Superseded { pull, by } => {
            close(change, *pull, "superseded by an amendment")?;
            plan(change, amending, row, by, Some(*pull), place)
        }
    }
}

fn close(change: &mut Change<'_>, pull: i64, note: &str) -> Result<(), Failure> {
    let today = change.actor().at.date();
    store::pull::insert_event(change, pull, Event::Cancelled, today, None, Some(note))?;
    change.concerns(Kind::Pull, pull)?;
    Ok(())
}

/// Plans the next pull of the study; whoever had the one before has this one.
fn plan(
    change: &mut Change<'_>,
    amending: &Amending,
    row: &Row,
    planned: &PlannedPull,
    supersedes: Option<i64>,
    place: &mut usize,
) -> Result<(), Failure> {
    let Some(arm) = amending.arms.iter().find(|arm| arm.position == row.arm_position) else {
        return Err(Failure::missing("arm of this study"));
    };
    *place += 1;
    let made = super::study::Made {
        study: &amending.study.number,
        lot: amending.study.lot,
        content: &amending.content,
    };
    let pull = super::study::insert_pull(change, &made, *place, arm.id, planned, supersedes)?;
    if let Some(before) = supersedes
        && let Some(account) = store::pull::get(change, before)?.assigned
    {
        store::pull::insert_assignment(change, pull, account)?;
    }
    change.concerns(Kind::Pull, pull)?;
    Ok(())
}

fn tell(change: &mut Change<'_>, amending: &Amending) -> Result<(), Failure> {
    change.concerns(Kind::Study, amending.study.id)?;
    change.concerns(Kind::Lot, amending.study.lot)?;
    change.concerns(Kind::ProtocolVersion, amending.version.id)?;
    let done = amending.rows.iter().filter(|row| row.doing != Doing::TooLate).count();
    change.tell(format!(
        "{} from version {} of its protocol to version {}: {done} pulls to come changed",
        amending.study.number, amending.facts.was, amending.facts.is
    ));
    Ok(())
}
