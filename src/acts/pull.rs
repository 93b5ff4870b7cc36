//! Taking, missing, cancelling and assigning a pull.

use chrono::NaiveDate;

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::container::{self, Purpose, names_label};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::pull::{self, Event, Found, Scanned, Take};
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::pull::Pull;

/// What a person typed when taking a pull: the labels, the day, and why, where a reason is needed.
#[derive(Clone, Debug)]
pub struct Taking {
    pub labels: Vec<String>,
    pub taken_on: NaiveDate,
    pub why: String,
}

/// Finds out what each scanned label or typed code is.
fn scan(reader: &Reader<'_>, arm: i64, labels: &[String]) -> Result<Vec<Scanned>, Failure> {
    let here = store::container::of_arm(reader, arm)?;
    let mut scanned = Vec::new();
    for typed in labels {
        let own = here.iter().find(|container| names_label(typed, &container.label));
        let found = match own {
            Some(container) if container.purpose == Purpose::FollowThrough.words() => Found::NeverOpened,
            Some(container) if container.event.is_none() => Found::Here { container: container.id },
            Some(_) => Found::Left,
            None => match store::container::by_label(reader, typed.trim())? {
                Some(other) => Found::Elsewhere(format!(
                    "{}, {} {}",
                    other.study_number, other.condition_name, other.orientation
                )),
                None => Found::Nowhere,
            },
        };
        scanned.push(Scanned { typed: typed.trim().to_string(), found });
    }
    Ok(scanned)
}

/// How the containers were identified: by scan, when every text was a whole label.
fn identity_by(labels: &[String]) -> &'static str {
    let is_short = |label: &String| label.trim().chars().filter(|c| c.is_alphanumeric()).count() <= 4;
    if labels.iter().any(is_short) { "typed characters" } else { "scan" }
}

/// Takes a pull: its containers leave the chamber. Refuses in the order of [`pull::may_take`].
pub fn take(db: &Db, actor: &Actor, id: i64, taking: &Taking) -> Result<(), Failure> {
    let reason = Reason::stated(taking.why.trim());
    let reason = if taking.why.trim().is_empty() { Reason::none() } else { reason };
    db.change(actor, Act::RecordPull, &reason, |change| {
        let found = store::pull::get(change, id)?;
        change.concerns(Kind::Pull, id)?;
        let take = as_take(change, &found, taking)?;
        pull::may_take(&take, &found.facts, actor.at.date())?;
        let is_partial = take.scanned.len() < found.facts.containers_needed;
        let kind = if is_partial { container::Event::PartialPull } else { container::Event::Pulled };
        let note = Some(take.why.as_str()).filter(|why| !why.is_empty());
        insert_containers(change, &take, id, kind, note)?;
        let identity = identity_by(&taking.labels);
        store::pull::insert_event(change, id, Event::Pulled, take.taken_on, Some(identity), note)?;
        tell(
            change,
            &found,
            &format!(
                "{} of {} containers on {}",
                take.scanned.len(),
                found.facts.containers_needed,
                date_shown(take.taken_on)
            ),
        )
    })
}

/// Takes more containers for a pull that was taken. Refuses in the order of [`pull::may_take_more`].
pub fn take_more(db: &Db, actor: &Actor, id: i64, taking: &Taking) -> Result<(), Failure> {
    db.change(actor, Act::RecordPull, &Reason::stated(taking.why.trim()), |change| {
        let found = store::pull::get(change, id)?;
        change.concerns(Kind::Pull, id)?;
        let take = as_take(change, &found, taking)?;
        pull::may_take_more(&take, &found.facts)?;
        insert_containers(change, &take, id, container::Event::RePull, Some(&take.why))?;
        tell(change, &found, &format!("{} more containers", take.scanned.len()))
    })
}

fn as_take(reader: &Reader<'_>, found: &Pull, taking: &Taking) -> Result<Take, Failure> {
    let labels: Vec<String> =
        taking.labels.iter().filter(|label| !label.trim().is_empty()).cloned().collect();
    let scanned = scan(reader, found.study_arm, &labels)?;
    Ok(Take { scanned, taken_on: taking.taken_on, why: taking.why.trim().to_string() })
}

fn insert_containers(
    change: &Change<'_>,
    take: &Take,
    pull: i64,
    kind: container::Event,
    note: Option<&str>,
) -> Result<(), Failure> {
    for one in &take.scanned {
        if let Found::Here { container } = one.found {
            store::container::insert_event(change, container, kind, Some(pull), None, note)?;
        }
    }
    Ok(())
}

fn tell(change: &mut Change<'_>, found: &Pull, what: &str) -> Result<(), Failure> {
    change.concerns(Kind::Pull, found.id)?;
    change.concerns(Kind::Sample, found.sample)?;
    change.concerns(Kind::Study, found.study)?;
    change.concerns(Kind::Lot, found.lot)?;
    change.tell(format!("{}, {}: {what}", found.number, found.age_text));
    Ok(())
}

/// Records a pull as missed. Refuses in the order of [`pull::may_miss`].
pub fn miss(db: &Db, actor: &Actor, id: i64, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::MissPull, reason, |change| {
        let found = store::pull::get(change, id)?;
        pull::may_miss(&found.facts, actor.at.date())?;
        close(change, &found, Event::Missed, reason)
    })
}

/// Cancels a pull, by QA. Refuses a pull that is not open.
pub fn cancel(db: &Db, actor: &Actor, id: i64, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::CancelPull, reason, |change| {
        let found = store::pull::get(change, id)?;
        pull::is_open(&found.facts)?;
        close(change, &found, Event::Cancelled, reason)
    })
}

fn close(change: &mut Change<'_>, found: &Pull, event: Event, reason: &Reason) -> Result<(), Failure> {
    let today = change.actor().at.date();
    store::pull::insert_event(change, found.id, event, today, None, reason.text())?;
    tell(change, found, event.words())
}

/// Gives a pull to a person who works at the bench. Refuses in the order of [`pull::may_assign`].
pub fn assign(db: &Db, actor: &Actor, id: i64, account: i64) -> Result<(), Failure> {
    assign_several(db, actor, &[id], account)
}

/// Gives pulls to a person who works at the bench, all of them or none. Refuses when none is chosen, then in the
/// order of [`pull::may_assign`] for each.
pub fn assign_several(db: &Db, actor: &Actor, ids: &[i64], account: i64) -> Result<(), Failure> {
    db.change(actor, Act::AssignPull, &Reason::none(), |change| {
        pull::may_assign_several(ids.len())?;
        let person = store::account::get(change, account)?;
        let is_at_bench = person.is_enabled
            && (person.roles.contains(&Role::Analyst) || person.roles.contains(&Role::LabManager));
        let mut told = Vec::new();
        for id in ids {
            let found = store::pull::get(change, *id)?;
            pull::may_assign(&found.facts, is_at_bench)?;
            store::pull::insert_assignment(change, *id, account)?;
            tell(change, &found, "")?;
            told.push(format!("{}, {}", found.number, found.age_text));
        }
        change.tell(format!("{} to {}", told.join("; "), person.full_name));
        Ok(())
    })
}
