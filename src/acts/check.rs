//! The laboratory check: "checked", or "send back, because …".

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::check::{TestFacts, may_check, may_send_back};
use crate::domain::failure::Failure;
use crate::domain::qualification;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::review::facts::ReviewSample;

/// Records that a second qualified person has checked a version of a test.
///
/// Refuses in the order of [`may_check`], then as [`qualification::may_test`].
pub fn check(db: &Db, actor: &Actor, sample_test: i64, seen_version: i64) -> Result<(), Failure> {
    db.change(actor, Act::CheckResult, &Reason::none(), |change| {
        let (sample, test) = facts(change, sample_test)?;
        may_check(&test, change.actor().account, seen_version)?;
        is_qualified(change, sample_test)?;
        store::check::insert(change, sample_test, seen_version, true, None)?;
        told(change, &sample, &format!("{}, version {seen_version}", test.title))
    })
}

/// Sends a test back to the analyst, who reads it again or corrects it.
pub fn send_back(
    db: &Db,
    actor: &Actor,
    sample_test: i64,
    seen_version: i64,
    why: &str,
) -> Result<(), Failure> {
    db.change(actor, Act::SendBackResult, &Reason::stated(why.trim()), |change| {
        let (sample, test) = facts(change, sample_test)?;
        may_send_back(&test, change.actor().account, seen_version, why)?;
        is_qualified(change, sample_test)?;
        store::check::insert(change, sample_test, seen_version, false, Some(why.trim()))?;
        told(change, &sample, &format!("{}, version {seen_version}", test.title))
    })
}

fn facts(change: &Change<'_>, sample_test: i64) -> Result<(ReviewSample, TestFacts), Failure> {
    let id = store::review::sample_of_test(change, sample_test)?;
    let sample = store::review::sample(change, id)?;
    concerned(change, &sample)?;
    let test = sample.facts.tests.iter().find(|test| test.sample_test == sample_test).cloned();
    let test = test.ok_or_else(|| Failure::missing("test with this number"))?;
    Ok((sample, test))
}

fn is_qualified(change: &Change<'_>, sample_test: i64) -> Result<(), Failure> {
    let method_version = store::check::method_version(change, sample_test)?;
    let (account, today) = (change.actor().account, change.actor().at.date());
    let facts = store::qualification::facts(change, account, method_version, today)?;
    Ok(qualification::may_test(&facts, today)?)
}

/// Tells what was done with a sample, in its history and those of its lot and study.
pub(in crate::acts) fn told(
    change: &mut Change<'_>,
    sample: &ReviewSample,
    what: &str,
) -> Result<(), Failure> {
    concerned(change, sample)?;
    change.tell(format!("{}: {what}", sample.head.number));
    Ok(())
}

/// Lists the act in the histories of the sample, its lot and its study. Before a rule of own work is asked, so
/// that a refused attempt stands there too.
pub(in crate::acts) fn concerned(change: &Change<'_>, sample: &ReviewSample) -> Result<(), Failure> {
    change.concerns(Kind::Sample, sample.head.sample)?;
    change.concerns(Kind::Lot, sample.head.lot)?;
    if let Some(study) = sample.head.study {
        change.concerns(Kind::Study, study)?;
    }
    if let Some(pull) = sample.head.pull {
        change.concerns(Kind::Pull, pull)?;
    }
    Ok(())
}
