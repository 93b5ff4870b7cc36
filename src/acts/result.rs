//! Completing a test: judged once, with its flags, its trend signal and the investigation it opens.

use super::reading::{concerns, test_of};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::judgement::{Judged, ResultQualifier, Verdict, judge};
use crate::domain::protocol::LimitsDo;
use crate::domain::qualification;
use crate::domain::reading::{Reading, in_slot, may_record, standing};
use crate::domain::reason::Reason;
use crate::domain::result::{
    CompleteFacts, bench_flags, clock_due_on, clock_runs, for_judgement, may_complete, reader_key,
};
use crate::domain::specification::LimitSet;
use crate::domain::stage::{StageLoss, loss_of};
use crate::domain::subject::Kind;
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::{Change, Db};

/// Completes a test: results, flags and investigation are one act.
///
/// Refuses in this order: pull, signature, already complete, qualification, then as [`may_complete`].
pub fn complete(db: &Db, actor: &Actor, sample_test: i64) -> Result<i64, Failure> {
    db.change(actor, Act::CompleteTest, &Reason::none(), |change| {
        let sample = store::bench::of_test(change, sample_test)?;
        let test = test_of(&sample, sample_test)?;
        may_record(sample.state(test))?;
        let today = change.actor().at.date();
        let facts = store::qualification::facts(change, actor.account, test.method_version, today)?;
        qualification::may_test(&facts, today)?;
        may_complete(&facts_of(&sample, test))?;
        concerns(change, &sample)?;
        let told = put_results(change, &sample, test)?;
        change.tell(format!("{}, {}: {told}", sample.number, test.title));
        Ok(sample.id)
    })
}

/// Judges a completed test anew after a correction, within the correction's own act.
pub(in crate::acts) fn judge_again(change: &mut Change<'_>, sample_test: i64) -> Result<(), Failure> {
    let sample = store::bench::of_test(change, sample_test)?;
    let test = test_of(&sample, sample_test)?;
    put_results(change, &sample, test).map(|_| ())
}

/// What completing the test would ask of the readings as they stand.
pub fn facts_of(sample: &BenchSample, test: &BenchTest) -> CompleteFacts {
    let readings = sample.readings_of(test.id);
    let mut facts = CompleteFacts {
        recorded: standing(&readings).len(),
        lost: losses(sample, test).count(),
        ..CompleteFacts::default()
    };
    for slot in sample.slots(test) {
        let is_lost = loss_of(&sample.losses, slot.stage, slot.key.container).is_some();
        let there = in_slot(&readings, &slot.key);
        if slot.is_required && there.is_none() && !is_lost {
            facts.missing.push(slot.label());
        }
        let (Some(tolerance), Some(first)) = (test.content.second_reader_tolerance, there) else { continue };
        if !slot.is_required {
            continue;
        }
        match in_slot(&readings, &reader_key(&slot.key, "second")) {
            None => facts.second_missing.push(slot.label()),
            Some(second) if differ(first, second, tolerance) => {
                if in_slot(&readings, &reader_key(&slot.key, "third")).is_none() {
                    facts.readers_differ.push(slot.label());
                }
            }
            Some(_) => {}
        }
    }
    let open = standing(&readings).into_iter().filter(|reading| reading.has_open_question());
    facts.questions =
        open.flat_map(|reading| reading.questions.iter().map(|one| one.sentence.clone())).collect();
    facts
}

/// What was lost of the stages at which a test is read.
fn losses<'a>(sample: &'a BenchSample, test: &BenchTest) -> impl Iterator<Item = &'a StageLoss> {
    let stages = test.content.stages();
    sample.losses.iter().filter(move |loss| stages.contains(&loss.stage))
}

fn differ(first: &Reading, second: &Reading, tolerance: rust_decimal::Decimal) -> bool {
    match (first.value, second.value) {
        (Some(one), Some(other)) => (one - other).abs() > tolerance || first.qualifier != second.qualifier,
        _ => first.typed != second.typed,
    }
}

/// Stores the next version of the results with their flags; answers with a sentence for the history.
fn put_results(change: &mut Change<'_>, sample: &BenchSample, test: &BenchTest) -> Result<String, Failure> {
    let version = test.latest_version.unwrap_or_default() + 1;
    let readings = sample.readings_of(test.id);
    let mut judged = judged(sample, test, &readings);
    let now = change.actor().at;
    if let Some(first) = judged.first_mut() {
        first.flags.extend(bench_flags(&test.content, &readings, now));
    }
    let trend = super::trend::Judge::of(change, sample, test)?;
    let mut told = Vec::new();
    for one in &mut judged {
        let followed = trend.as_ref().map(|trend| trend.judged(sample, test, one));
        let flags = followed.iter().flat_map(|found| &found.verdicts).filter_map(|found| found.flag.clone());
        one.flags.extend(flags);
        let result = store::result::insert(change, test.id, version, one)?;
        if let Some(followed) = followed {
            followed.put(change, result)?;
        }
        for flag in &one.flags {
            store::flag::insert(change, result, flag)?;
        }
        let verdict = one.verdict.words();
        told.push(if one.shown == verdict {
            verdict.to_string()
        } else {
            format!("{} {verdict}", one.shown)
        });
        if opens_investigation(one) {
            told.extend(open_investigation(change, sample, test, result)?);
        }
    }
    Ok(format!("version {version}, {}", told.join("; ")))
}

fn judged(sample: &BenchSample, test: &BenchTest, readings: &[Reading]) -> Vec<Judged> {
    if readings.is_empty() {
        return vec![nothing_read(sample, test)];
    }
    let limits_do = sample.pull.as_ref().and_then(|pull| pull.limits_do);
    let set = match (sample.limit_set.as_str(), limits_do) {
        (_, Some(LimitsDo::InUse)) => LimitSet::InUse,
        ("release", _) => LimitSet::Release,
        _ => LimitSet::ShelfLife,
    };
    let limits = sample.limits(&test.test).filter(|_| sample.limit_set != "none");
    let values = for_judgement(&test.content, readings, &sample.container_word);
    judge(&test.content, limits, set, limits_do, &values)
}

/// A test whose every reading was lost with its stage: said so, and not judged.
fn nothing_read(sample: &BenchSample, test: &BenchTest) -> Judged {
    let why: Vec<&str> = losses(sample, test).map(|loss| loss.why.as_str()).collect();
    Judged {
        component: String::new(),
        value: None,
        qualifier: ResultQualifier::None,
        shown: format!("not read: {}", why.join("; ")),
        unit: test.content.unit.clone(),
        verdict: Verdict::NoReportableValue,
        detail: serde_json::json!({ "lost": why }),
        flags: Vec::new(),
    }
}

/// Out of specification opens an OOS record; outside an in-use limit opens an in-use failure record (decision A7).
fn opens_investigation(judged: &Judged) -> bool {
    matches!(judged.verdict, Verdict::OutOfSpecification | Verdict::OutsideInUseLimit)
}

/// Opens the investigation, unless an earlier version of the same test has one that is still open.
fn open_investigation(
    change: &Change<'_>,
    sample: &BenchSample,
    test: &BenchTest,
    result: i64,
) -> Result<Option<String>, Failure> {
    let known = store::investigation::of_test(change, test.id)?;
    if known.iter().any(|one| !one.is_concluded) {
        return Ok(None);
    }
    let is_labelled = sample.pull.as_ref().is_some_and(|pull| pull.is_labelled);
    let runs = clock_runs(is_labelled, sample.is_distributed, &sample.market);
    let due = runs.then(|| clock_due_on(change.actor().at.date()));
    let (id, number) = store::investigation::insert(change, result, due)?;
    change.concerns(Kind::Investigation, id)?;
    Ok(Some(format!("investigation {number} opened")))
}
