//! The authorised person's decision on a lot: released or rejected, by signature.

use super::signature::{Means, Rejection, Release, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::completeness::{Item, judge, missing};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot_decision::{Decision, DecisionFacts, Looked, has_looked, may_reject, may_release};
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::review::not_own_work;
use crate::domain::setting::LIFE_FROM_RELEASE_DAYS;
use crate::domain::shelf_life::{LifeStart, expiry, life_start};
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::Versioned;
use crate::store;
use crate::store::Reader;
use crate::store::deviation::Deviation;
use crate::store::door::{Change, Db};
use crate::store::lot::Lot;
use crate::store::lot_decision::{NewDecision, ReleaseResult};
use crate::store::lot_review::{Correction, LotReview};
use crate::store::shelf_life::ShelfLife;
use chrono::NaiveDate;

/// Everything a decision on a lot rests on, and the shelf life its expiry comes from.
pub struct Grounds {
    pub lot: Lot,
    pub facts: DecisionFacts,
    pub results: Vec<ReleaseResult>,
    pub shelf_life: Option<ShelfLife>,
    /// From which day the expiry counts, and by which rule (req_L11).
    pub life_start: Option<LifeStart>,
    /// The day of the release that stands.
    released_on: Option<NaiveDate>,
    pub items: Vec<Item>,
    pub deviations: Vec<Deviation>,
    pub corrections: Vec<Correction>,
    /// The newest entry of the lot's history.
    pub newest_act: i64,
}

/// Loads what a decision on a day rests on. The expiry is computed from the assigned shelf life in force for the day
/// the lot was made (decision A12), counted from the release or from the production (req_L11).
pub fn grounds(reader: &Reader<'_>, id: i64, today: NaiveDate) -> Result<Grounds, Failure> {
    let newest_act = store::lot_review::newest_act(reader, id)?;
    let lot = store::lot::get(reader, id)?;
    let formulation = store::version::get(reader, Versioned::Formulation, lot.formulation_version)?;
    let results = store::lot_decision::release_results(reader, id)?;
    let shelf_life = match lot.made_on {
        Some(made_on) => store::shelf_life::for_lot_made_on(reader, lot.presentation, &lot.market, made_on)?,
        None => None,
    };
    let investigations = store::investigation::of_lot(reader, id)?;
    let decided = store::lot_decision::of_lot(reader, id)?;
    let released = decided.last().filter(|last| last.decision == Decision::Released.words());
    let released_on = released.map(|last| last.decided_on);
    let life_start = life_start_of(reader, &lot, released_on.unwrap_or(today))?;
    let items = judge(&store::completeness::evidence(reader, id)?);
    let deviations = store::deviation::of_lot(reader, id)?;
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
        open_deviations: deviations
            .iter()
            .filter(|one| !one.facts.is_closed)
            .map(|one| one.facts.number)
            .collect(),
        missing_items: missing(&items),
        expires_on: life_start
            .as_ref()
            .zip(shelf_life.as_ref())
            .map(|(start, life)| expiry(start.on, life.assigned.months, life.assigned.expiry_format)),
    };
    let corrections = store::lot_review::corrections(reader, id)?;
    Ok(Grounds {
        lot,
        facts,
        results,
        shelf_life,
        life_start,
        released_on,
        items,
        deviations,
        corrections,
        newest_act,
    })
}

fn life_start_of(
    reader: &Reader<'_>,
    lot: &Lot,
    released_on: NaiveDate,
) -> Result<Option<LifeStart>, Failure> {
    let stored = store::setting::get(reader, LIFE_FROM_RELEASE_DAYS.name)?;
    let most_days = LIFE_FROM_RELEASE_DAYS.value(stored.as_deref());
    Ok(lot.made_on.map(|made_on| life_start(made_on, released_on, most_days)))
}

impl Grounds {
    /// The day of the release that stands.
    pub fn released_on(&self) -> Option<NaiveDate> {
        self.released_on
    }

    /// What was shown of corrections, items and deviations, as one digest under the signature.
    fn review(&self) -> LotReview {
        let mut text = String::new();
        for one in &self.corrections {
            text.push_str(&format!(
                "{} was {} is {} {} {} {}\n",
                one.place, one.was, one.is, one.why, one.by, one.at
            ));
        }
        for item in &self.items {
            text.push_str(&format!("{} {:?}\n", item.number, item.state));
        }
        for one in &self.deviations {
            text.push_str(&format!("deviation {} closed {}\n", one.facts.number, one.facts.is_closed));
        }
        LotReview {
            up_to_act: self.newest_act,
            corrections: self.corrections.len() as i64,
            digest: sha256_hex(text.as_bytes()),
        }
    }
}

fn does_not_conform(result: &ReleaseResult) -> bool {
    !["conforms", "no limit"].contains(&result.verdict.as_str())
}

fn words(result: &ReleaseResult) -> String {
    let part = if result.component.is_empty() { String::new() } else { format!(", {}", result.component) };
    format!("{}{part} {} {}, {}", result.title, result.shown, result.unit, result.verdict)
}

/// Releases a lot. Refuses own work in its release samples, then in the order of [`may_release`], then what was not
/// looked through ([`has_looked`]).
pub fn release(
    db: &Db,
    actor: &Actor,
    lot: i64,
    looked: Looked,
    signed: &Signed<Release>,
) -> Result<(), Failure> {
    db.change(actor, Act::DecideLot, &Reason::none(), |change| {
        let grounds = grounds(change, lot, actor.at.date())?;
        stayed_out(change, &grounds)?;
        may_release(&grounds.facts)?;
        has_looked(looked, grounds.newest_act, &grounds.lot.number)?;
        let new = NewDecision {
            lot,
            decision: Decision::Released.words(),
            decided_on: actor.at.date(),
            shelf_life_assignment: grounds.shelf_life.as_ref().map(|life| life.id),
            expires_on: grounds.facts.expires_on,
            statement: signed.statement().map(str::to_string),
        };
        put(change, &new, Some(&grounds.review()), signed)?;
        let until = new.expires_on.map(|day| format!(", use by {}", date_shown(day))).unwrap_or_default();
        change.tell(format!("{} released{until}", grounds.lot.number));
        Ok(())
    })
}

/// Rejects a lot; the reason is the signer's statement. Refuses own work, then in the order of [`may_reject`].
pub fn reject(db: &Db, actor: &Actor, lot: i64, signed: &Signed<Rejection>) -> Result<(), Failure> {
    let why = signed.statement().unwrap_or_default().to_string();
    db.change(actor, Act::DecideLot, &Reason::stated(&why), |change| {
        let grounds = grounds(change, lot, actor.at.date())?;
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
        put(change, &new, None, signed)?;
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

fn put<M: Means>(
    change: &mut Change<'_>,
    new: &NewDecision,
    review: Option<&LotReview>,
    signed: &Signed<M>,
) -> Result<(), Failure> {
    let canonical = store::lot_decision::canonical(change, new, review, change.act())?;
    let signature = signed.put_under(change, Subject::new(Kind::Lot, new.lot), &canonical)?;
    if let Some(review) = review {
        store::lot_review::insert(change, new.lot, review, signature)?;
    }
    store::lot_decision::insert(change, new, signature)?;
    Ok(())
}
