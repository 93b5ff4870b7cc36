//! Recording and correcting readings.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::{Failure, Stale};
use crate::domain::instrument;
use crate::domain::label::labelled;
use crate::domain::method::Settings;
use crate::domain::moment::{Moment, date_from_stored};
use crate::domain::qualification;
use crate::domain::reading::{self, Entry, Question, Reading, ReadingRefusal, Said, in_slot};
use crate::domain::reason::Reason;
use crate::domain::result::reader_key;
use crate::domain::slot::SlotKey;
use crate::domain::stage;
use crate::domain::stop::Stop;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::{Change, Db};
use crate::store::reading::Beside;

/// How the values of one submit were read.
#[derive(Clone, Debug, Default)]
pub struct How {
    pub sample_test: i64,
    /// The label that was scanned or typed before the numbers.
    pub label: String,
    pub instrument: Option<i64>,
    /// When it was read, if not now; the reason stands in the history.
    pub read_at: Option<Moment>,
    /// The newest reading of the test that the page showed.
    pub seen: i64,
}

/// Records new values: each is an observation from now on. All of them or none.
///
/// Refuses in this order: pull, signature, completed test, label, stated time, qualification, instrument; then
/// for each value: changed meanwhile, already recorded, stage, its planned time, heights that cannot be.
pub fn record(
    db: &Db,
    actor: &Actor,
    how: &How,
    entries: &[Entry],
    reason: &Reason,
) -> Result<Vec<i64>, Failure> {
    db.change(actor, Act::RecordReadings, reason, |change| {
        let sample = store::bench::of_test(change, how.sample_test)?;
        let test = test_of(&sample, how.sample_test)?;
        reading::may_record(sample.state(test))?;
        let container = may_read(change, &sample, test, how, entries)?;
        let mut readings = sample.readings_of(test.id);
        let mut ids = Vec::new();
        let mut told = Vec::new();
        for entry in entries {
            match not_yet_recorded(change, &readings, entry, how.seen)? {
                AlreadyThere::Same => continue,
                AlreadyThere::No => {}
            }
            may_record_entry(change, &sample, &readings, entry, how)?;
            let due_at = due_at(&readings, entry, change.actor().at);
            let questions = super::question::of(change, &sample, test, &readings, entry)?;
            let inspected_every = inspected_every(test, entry);
            let beside = Beside { due_at, questions, inspected_every, ..beside(how, container) };
            let id = store::reading::insert(change, test.id, &entry.slot.key, &entry.said, &beside)?;
            readings.push(as_recorded(id, entry, change.actor(), how));
            told.push(entry);
            ids.push(id);
        }
        concerns(change, &sample)?;
        // Where a second person reads blind, the history must not tell them the first value.
        let told = match test.content.second_reader_tolerance {
            Some(_) if ids.len() == 1 => "1 value".to_string(),
            Some(_) => format!("{} values", ids.len()),
            None => reading::told(&test.title, &told),
        };
        change.tell(format!("{}, {} · {told}", sample.number, test.title));
        Ok(ids)
    })
}

/// Corrects one recorded value: a new row supersedes it, with the reason. A completed test is judged anew and
/// gets its next result version.
///
/// Refuses in this order: pull, label, qualification, instrument, nothing recorded, changed meanwhile, heights.
pub fn correct(db: &Db, actor: &Actor, how: &How, entry: &Entry, reason: &Reason) -> Result<i64, Failure> {
    db.change(actor, Act::CorrectReading, reason, |change| {
        let sample = store::bench::of_test(change, how.sample_test)?;
        let test = test_of(&sample, how.sample_test)?;
        reading::may_touch(sample.state(test))?;
        let container = may_read(change, &sample, test, how, std::slice::from_ref(entry))?;
        let readings = sample.readings_of(test.id);
        let name = entry.slot.key.name();
        let Some(was) = in_slot(&readings, &entry.slot.key) else {
            return Err(ReadingRefusal::NothingToCorrect { name }.into());
        };
        if was.id > how.seen {
            return Err(Failure::Stale(stale(change.actor(), was, entry)));
        }
        heights(&readings, entry)?;
        let beside = Beside {
            supersedes: Some(was.id),
            container: was.container.or(container),
            due_at: was.due_at.clone(),
            inspected_every: inspected_every(test, entry),
            read_at: how.read_at.map(|at| at.stored()).or_else(|| reread(was, reason)),
            answer: was.has_open_question().then_some("changed after hint"),
            questions: super::question::of(change, &sample, test, &readings, entry)?,
            ..beside(how, container)
        };
        let id = store::reading::insert(change, test.id, &entry.slot.key, &entry.said, &beside)?;
        concerns(change, &sample)?;
        let shown = |qualifier: &str, typed: &str| entry.slot.shown(qualifier, typed);
        let was = shown(&was.qualifier, &was.typed);
        let is = shown(entry.said.qualifier(), &entry.said.typed());
        change.tell(format!("{} · {}: was {was}, is {is}", sample.number, entry.slot.short()));
        if test.is_complete() {
            super::result::judge_again(change, how.sample_test)?;
        }
        Ok(id)
    })
}

/// The check of identity before any number: the label in the hand is of this sample. A right one leaves no entry, for
/// every record names it again; a wrong one is refused and noted in the history of the sample (screen_U68).
pub fn check_label(db: &Db, actor: &Actor, sample: i64, label: &str) -> Result<(), Failure> {
    let found = db.read(|reader| store::bench::sample(reader, sample))?;
    if label.is_empty() || labelled(label, &found.number, &found.containers).is_some() {
        return Ok(());
    }
    db.change(actor, Act::RecordReadings, &Reason::none(), |change| {
        concerns(change, &found)?;
        Err(ReadingRefusal::WrongLabel(label.to_string()).into())
    })
}

/// A count that the method looks at only after each so many is known to that interval (decision A15).
fn inspected_every(test: &BenchTest, entry: &Entry) -> Option<u32> {
    let Settings::Redispersibility { inspect_every, .. } = test.content.settings else { return None };
    let is_count = entry.slot.key.field.ends_with("inversions") && matches!(entry.said, Said::Number(_));
    (is_count && inspect_every > 1).then_some(inspect_every)
}

/// A mistyped value keeps the instant at which it was read; one that was read again is of now.
fn reread(was: &Reading, reason: &Reason) -> Option<String> {
    (reason.text() == Some("mistyped")).then(|| was.read_instant().to_string())
}

/// Answers the question a value drew: "it is right". The value stands as it is.
pub fn keep(db: &Db, actor: &Actor, sample_test: i64, reading: i64) -> Result<(), Failure> {
    db.change(actor, Act::RecordReadings, &Reason::stated("kept after the question"), |change| {
        let sample = store::bench::of_test(change, sample_test)?;
        let test = test_of(&sample, sample_test)?;
        reading::may_record(sample.state(test))?;
        let readings = sample.readings_of(sample_test);
        let standing = reading::standing(&readings);
        let found = standing.iter().find(|one| one.id == reading && one.has_open_question());
        let Some(asked) = found else { return Err(Failure::missing("open question with this number")) };
        let said = said_of(asked);
        let beside = Beside {
            container: asked.container,
            read_at: Some(asked.read_instant().to_string()),
            due_at: asked.due_at.clone(),
            inspected_every: asked.inspected_every,
            instrument: asked.instrument,
            questions: asked.questions.clone(),
            answer: Some("kept"),
            supersedes: Some(asked.id),
        };
        store::reading::insert(change, sample_test, &asked.key, &said, &beside)?;
        concerns(change, &sample)?;
        change.tell(format!("{}, {}: {} is right", sample.number, test.title, asked.shown()));
        Ok(())
    })
}

fn said_of(reading: &Reading) -> Said {
    use crate::domain::typed::Number;
    match (reading.qualifier.as_str(), reading.value) {
        ("=", Some(value)) => {
            Said::Number(Number { text: reading.typed.clone(), value, decimals: value.scale() })
        }
        (">", Some(value)) => Said::MoreThan(u32::try_from(value.trunc().mantissa()).unwrap_or_default()),
        ("not read", _) => Said::NotRead(reading.typed.clone()),
        _ => Said::Words(reading.typed.clone()),
    }
}

pub(in crate::acts) fn test_of(sample: &BenchSample, sample_test: i64) -> Result<&BenchTest, Failure> {
    sample.test(sample_test).ok_or_else(|| Failure::missing("test with this number"))
}

/// The act stands in the history of sample, lot, pull and study.
pub(in crate::acts) fn concerns(change: &Change<'_>, sample: &BenchSample) -> Result<(), Failure> {
    change.concerns(Kind::Sample, sample.id)?;
    change.concerns(Kind::Lot, sample.lot)?;
    if let Some(pull) = &sample.pull {
        change.concerns(Kind::Pull, pull.id)?;
        change.concerns(Kind::Study, pull.study)?;
    }
    Ok(())
}

/// Label, stated time, qualification, instrument. Answers with the container whose label was shown.
fn may_read(
    change: &Change<'_>,
    sample: &BenchSample,
    test: &BenchTest,
    how: &How,
    entries: &[Entry],
) -> Result<Option<i64>, Failure> {
    let actor = change.actor();
    let Some(container) = labelled(&how.label, &sample.number, &sample.containers) else {
        concerns(change, sample)?;
        return Err(ReadingRefusal::WrongLabel(how.label.clone()).into());
    };
    if let Some(read_at) = how.read_at {
        let pulled = sample.pull.as_ref().and_then(|pull| pull.pulled_on.as_deref());
        let pulled =
            pulled.and_then(date_from_stored).and_then(|day| Moment::of_site(day, 0, 0, actor.at.zone));
        reading::may_state_time(read_at, pulled, actor.at)?;
    }
    let today = actor.at.date();
    let facts = store::qualification::facts(change, actor.account, test.method_version, today)?;
    qualification::may_test(&facts, today)?;
    let has_numbers = entries.iter().any(|entry| matches!(entry.said, Said::Number(_)));
    match test.content.instruments.first() {
        Some(kind) if has_numbers => may_use(change, kind, &test.content.settings, how.instrument)?,
        _ => {}
    }
    Ok(container)
}

fn may_use(change: &Change<'_>, kind: &str, settings: &Settings, chosen: Option<i64>) -> Result<(), Failure> {
    let Some(chosen) = chosen else {
        return Err(ReadingRefusal::InstrumentMissing(kind.to_string()).into());
    };
    let today = change.actor().at.date();
    let facts = store::instrument::facts(change, chosen, today)?;
    if facts.kind != kind {
        let wanted = kind.to_string();
        return Err(ReadingRefusal::WrongInstrument { code: facts.code, is: facts.kind, wanted }.into());
    }
    instrument::may_use(&facts, today)?;
    let is_lifted = facts.lifted.contains(&Stop::DailyCheck);
    if facts.needs_daily_check && !is_lifted {
        let slope = facts.check_of(today).and_then(|check| check.slope_percent);
        reading::slope_fits(settings, &facts.code, slope)?;
    }
    Ok(())
}

enum AlreadyThere {
    No,
    /// Another browser recorded the very same value: nothing is left to do.
    Same,
}

fn not_yet_recorded(
    change: &Change<'_>,
    readings: &[Reading],
    entry: &Entry,
    seen: i64,
) -> Result<AlreadyThere, Failure> {
    let Some(there) = in_slot(readings, &entry.slot.key) else { return Ok(AlreadyThere::No) };
    if there.typed == entry.said.typed() && there.qualifier == entry.said.qualifier() {
        return Ok(AlreadyThere::Same);
    }
    if there.id > seen {
        return Err(Failure::Stale(stale(change.actor(), there, entry)));
    }
    let name = entry.slot.key.name();
    Err(ReadingRefusal::ChangeNeedsReason { name, was: there.shown(), becomes: entry.said.shown() }.into())
}

fn stale(actor: &Actor, there: &Reading, entry: &Entry) -> Stale {
    let at = Moment::from_stored(&there.at, actor.at.zone);
    Stale {
        what: entry.slot.label(),
        changed_by: there.by.clone(),
        changed_at: at.map(|at| at.shown()).unwrap_or_else(|| there.at.clone()),
        theirs: there.shown(),
        yours: entry.said.shown(),
    }
}

/// Stage, planned time, heights of one value.
fn may_record_entry(
    change: &Change<'_>,
    sample: &BenchSample,
    readings: &[Reading],
    entry: &Entry,
    how: &How,
) -> Result<(), Failure> {
    readers_differ(change.actor(), readings, &entry.slot.key)?;
    let tests = super::stage::tests_of(sample);
    stage::may_read(&tests, &sample.losses, entry.slot.stage, entry.slot.key.container)?;
    if let Some(minute) = entry.slot.due_minute {
        let at = how.read_at.unwrap_or(change.actor().at);
        may_read_cylinder(readings, entry, minute, at)?;
    }
    heights(readings, entry)
}

/// A second or third reading comes after the ones before it, from another person than theirs.
fn readers_differ(actor: &Actor, readings: &[Reading], key: &SlotKey) -> Result<(), ReadingRefusal> {
    let Some((reader, field)) = key.field.split_once(':') else { return Ok(()) };
    let first = SlotKey { field: field.to_string(), ..key.clone() };
    let before = match reader {
        "second" => vec![first],
        _ => vec![first.clone(), reader_key(&first, "second")],
    };
    for one in before {
        let name = key.name();
        match in_slot(readings, &one) {
            None => return Err(ReadingRefusal::FirstReaderMissing { name }),
            Some(there) if there.account == actor.account => {
                return Err(ReadingRefusal::SecondReaderIsFirst { name });
            }
            Some(_) => {}
        }
    }
    Ok(())
}

fn heights(readings: &[Reading], entry: &Entry) -> Result<(), Failure> {
    let value = |field: &str| match field == entry.slot.key.field {
        true => entry.said.value(),
        false => in_slot(readings, &SlotKey { field: field.to_string(), ..entry.slot.key.clone() })?.value,
    };
    Ok(reading::heights_agree(&entry.slot.key.name(), value)?)
}

/// Time zero of a cylinder: the instant its total volume was read, when it was filled and shaken.
pub fn time_zero(readings: &[Reading], key: &SlotKey, now: Moment) -> Option<Moment> {
    let total = SlotKey { field: "total_ml".to_string(), ..key.clone() };
    let rows = readings.iter().filter(|reading| reading.key == total && reading.qualifier == "=");
    // A corrected volume does not move the shaking: the first row is the one that stamped it.
    Moment::from_stored(rows.min_by_key(|reading| reading.id)?.read_instant(), now.zone)
}

fn may_read_cylinder(readings: &[Reading], entry: &Entry, minute: u32, at: Moment) -> Result<(), Failure> {
    let name = entry.slot.key.name();
    let Some(zero) = time_zero(readings, &entry.slot.key, at) else {
        return Err(ReadingRefusal::CylinderNotStarted { name }.into());
    };
    let due = zero.plus_minutes(i64::from(minute));
    let before = (due.utc - at.utc).num_seconds();
    let could_not = matches!(entry.said, Said::NotRead(_));
    if !could_not && reading::is_too_early(minute, before) {
        let label = entry.slot.label();
        return Err(ReadingRefusal::NotDueYet { name, label, due: due.shown() }.into());
    }
    Ok(())
}

fn due_at(readings: &[Reading], entry: &Entry, now: Moment) -> Option<String> {
    let minute = entry.slot.due_minute?;
    let zero = time_zero(readings, &entry.slot.key, now)?;
    Some(zero.plus_minutes(i64::from(minute)).stored())
}

fn beside(how: &How, container: Option<i64>) -> Beside {
    Beside {
        container,
        read_at: how.read_at.map(|at| at.stored()),
        instrument: how.instrument,
        ..Beside::default()
    }
}

/// A reading of the act being written, for the rules of the values after it.
fn as_recorded(id: i64, entry: &Entry, actor: &Actor, how: &How) -> Reading {
    let questions: Vec<Question> = Vec::new();
    Reading {
        id,
        key: entry.slot.key.clone(),
        container: entry.slot.key.container,
        container_label: String::new(),
        typed: entry.said.typed(),
        value: entry.said.value(),
        qualifier: entry.said.qualifier().to_string(),
        read_at: how.read_at.map(|at| at.stored()),
        due_at: None,
        inspected_every: None,
        instrument: how.instrument,
        questions,
        answer: None,
        supersedes: None,
        act: 0,
        account: actor.account,
        by: actor.full_name.clone(),
        at: actor.at.stored(),
        reason: None,
    }
}
