//! The authorised person's decision on a lot: released or rejected, by signature.

use super::signature::{Means, Rejection, Release, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::lot_decision::{Decision, DecisionFacts, may_reject, may_release};
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::review::not_own_work;
use crate::domain::shelf_life::expiry;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::door::{Change, Db};
use crate::store::lot::Lot;
use crate::store::lot_decision::{NewDecision, ReleaseResult};
use crate::store::shelf_life::ShelfLife;

/// Everything a decision on a lot rests on, and the shelf life its expiry comes from.
pub struct Grounds {
    pub lot: Lot,
    pub facts: DecisionFacts,
    pub results: Vec<ReleaseResult>,
    pub shelf_life: Option<ShelfLife>,
}

/// Loads what a decision rests on. The expiry is computed from the assigned shelf life in force for the day the
/// lot was made (decision A12).
pub fn grounds(reader: &Reader<'_>, id: i64) -> Result<Grounds, Failure> {
    let lot = store::lot::get(reader, id)?;
    let formulation = store::version::get(reader, Versioned::Formulation, lot.formulation_version)?;
    let results = store::lot_decision::release_results(reader, id)?;
    let shelf_life = match lot.made_on {
        Some(made_on) => store::shelf_life::for_lot_made_on(reader, lot.presentation, &lot.market, made_on)?,
        None => None,
    };
    let investigations = store::investigation::of_lot(reader, id)?;
    let decided = store::lot_decision::of_lot(reader, id)?;
    let facts = DecisionFacts {
        lot_number: lot.number.clone(),
        is_imported: lot.imported.is_some(),
        formulation_state: formulation.state,
        decided: decided.last().and_then(|last| Decision::from_words(&last.decision)),
        release: store::lot_decision::release_samples(reader, id)?.into_iter().map(|one| one.facts).collect(),
        tests_missing: store::lot_decision::tests_missing(reader, lot.presentation, &results)?,
        not_conforming: results.iter().filter(|one| does_not_conform(one)).map(words).collect(),
        open_investigations: investigations
            .iter()
            .filter(|one| !one.is_concluded)
            .map(|one| one.number)
            .collect(),
        expires_on: lot
            .made_on
            .zip(shelf_life.as_ref())
            .map(|(made_on, life)| expiry(made_on, life.assigned.months, life.assigned.expiry_format)),
    };
    Ok(Grounds { lot, facts, results, shelf_life })
}

fn does_not_conform(result: &ReleaseResult) -> bool {
    !["conforms", "no limit"].contains(&result.verdict.as_str())
}

fn words(result: &ReleaseResult) -> String {
    let part = if result.component.is_empty() { String::new() } else { format!(", {}", result.component) };
    format!("{}{part} {} {}, {}", result.title, result.shown, result.unit, result.verdict)
}

/// Releases a lot. Refuses own work in its release samples, then in the order of [`may_release`].
pub fn release(db: &Db, actor: &Actor, lot: i64, signed: &Signed<Release>) -> Result<(), Failure> {
    db.change(actor, Act::DecideLot, &Reason::none(), |change| {
        let grounds = grounds(change, lot)?;
        stayed_out(change, &grounds)?;
        may_release(&grounds.facts)?;
        let new = NewDecision {
            lot,
            decision: Decision::Released.words(),
            decided_on: actor.at.date(),
            shelf_life_assignment: grounds.shelf_life.as_ref().map(|life| life.id),
            expires_on: grounds.facts.expires_on,
            statement: signed.statement().map(str::to_string),
        };
        put(change, &new, signed)?;
        let until = new.expires_on.map(|day| format!(", use by {}", date_shown(day))).unwrap_or_default();
        change.tell(format!("{} released{until}", grounds.lot.number));
        Ok(())
    })
}

/// Rejects a lot; the reason is the signer's statement. Refuses own work, then in the order of [`may_reject`].
pub fn reject(db: &Db, actor: &Actor, lot: i64, signed: &Signed<Rejection>) -> Result<(), Failure> {
    let why = signed.statement().unwrap_or_default().to_string();
    db.change(actor, Act::DecideLot, &Reason::stated(&why), |change| {
        let grounds = grounds(change, lot)?;
        stayed_out(change, &grounds)?;
        may_reject(&grounds.facts, &why)?;
        let new = NewDecision {
            lot,
            decision: Decision::Rejected.words(),
            decided_on: actor.at.date(),
            shelf_life_assignment: None,
            expires_on: None,
            statement: Some(why.clone()),
        };
        put(change, &new, signed)?;
        change.tell(format!("{} rejected", grounds.lot.number));
        Ok(())
    })
}

/// Nobody decides on a lot whose release samples they read or checked.
fn stayed_out(change: &Change<'_>, grounds: &Grounds) -> Result<(), Failure> {
    change.concerns(Kind::Lot, grounds.lot.id)?;
    let account = change.actor().account;
    Ok(grounds.facts.release.iter().try_for_each(|sample| not_own_work(sample, account))?)
}

fn put<M: Means>(change: &mut Change<'_>, new: &NewDecision, signed: &Signed<M>) -> Result<(), Failure> {
    let canonical = store::lot_decision::canonical(change, new, change.act())?;
    let signature = signed.put_under(change, Subject::new(Kind::Lot, new.lot), &canonical)?;
    store::lot_decision::insert(change, new, signature)?;
    Ok(())
}
