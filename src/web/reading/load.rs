//! All that a test page shows and a submit asks, loaded once.

use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::instrument::{self, InstrumentFacts};
use crate::domain::label::labelled;
use crate::domain::method::Settings;
use crate::domain::moment::Moment;
use crate::domain::protocol::LimitsDo;
use crate::domain::qualification;
use crate::domain::reading::{Reading, in_slot, may_record, may_touch};
use crate::domain::result::reader_key;
use crate::domain::slot::{Slot, SlotKey};
use crate::domain::specification::{Limit, LimitSet};
use crate::domain::stage::may_read;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed;
use crate::store;
use crate::store::Reader;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::flag::Flag;
use crate::store::investigation::Investigation;
use crate::store::result::StoredResult;
use crate::store::trend::verdict::Verdict;
use crate::web::visit::Visit;

/// What a test page is made from.
pub struct Loaded {
    pub sample: BenchSample,
    pub test: BenchTest,
    pub readings: Vec<Reading>,
    /// The slots that the visitor fills: a second reader has their own.
    pub slots: Vec<Slot>,
    pub results: Vec<StoredResult>,
    pub flags: Vec<Flag>,
    pub verdicts: Vec<Verdict>,
    pub investigations: Vec<Investigation>,
    pub instruments: Vec<InstrumentFacts>,
    /// Reference photographs of the method's grades: digest and file.
    pub photos: Vec<(String, i64)>,
    /// The label from the address or the form, and whether it is of this sample.
    pub label: String,
    pub is_label_right: bool,
    pub instrument: Option<i64>,
    pub late: Late,
    pub account: i64,
    pub may_read: bool,
    pub not_qualified: Option<String>,
    pub now: Moment,
}

/// A stated time of reading, as typed.
#[derive(Clone, Debug, Default)]
pub struct Late {
    pub on: String,
    pub at: String,
    pub why: String,
}

impl Late {
    pub fn is_empty(&self) -> bool {
        self.on.is_empty() && self.at.is_empty()
    }

    /// The instant, or what is wrong with what was typed.
    pub fn moment(&self, now: Moment) -> Result<Option<Moment>, String> {
        if self.is_empty() {
            return Ok(None);
        }
        let date = typed::date(&self.on, "Read on").map_err(|fault| fault.to_string())?;
        let fault = || format!("“{}” is not a time. Type it such as 14:05.", self.at);
        let (hour, minute) = self.at.trim().split_once(':').ok_or_else(fault)?;
        let (hour, minute) = (hour.parse().map_err(|_| fault())?, minute.parse().map_err(|_| fault())?);
        Moment::of_site(date, hour, minute, now.zone).map(Some).ok_or_else(fault)
    }
}

pub fn load(visit: &Visit, id: i64) -> Result<Loaded, Failure> {
    let today = visit.at.date();
    let account = visit.actor()?.account;
    visit.read(|reader| {
        let sample = store::bench::of_test(reader, id)?;
        let test = sample.test(id).cloned().ok_or_else(|| Failure::missing("test with this number"))?;
        let instruments = match test.content.instruments.first() {
            Some(kind) => store::instrument::usable_kinds(reader, kind, today)?,
            None => Vec::new(),
        };
        let facts = store::qualification::facts(reader, account, test.method_version, today)?;
        let readings = sample.readings_of(id);
        let asked = |name: &str| {
            visit.form.get(name).or_else(|| visit.query.get(name)).unwrap_or_default().trim().to_string()
        };
        let label = asked("label");
        let slots = sample.slots(&test).into_iter().map(|slot| own_slot(&test, slot, &readings, account));
        Ok(Loaded {
            photos: photos(reader, &test)?,
            slots: slots.collect(),
            results: store::result::of_test(reader, id)?,
            flags: store::flag::of_test(reader, id)?,
            verdicts: store::trend::verdict::of_test(reader, id)?,
            investigations: store::investigation::of_test(reader, id)?,
            is_label_right: labelled(&label, &sample.number, &sample.containers).is_some(),
            instrument: chosen(&asked("instrument"), &instruments, &readings, today),
            late: Late { on: asked("late_on"), at: asked("late_at"), why: asked("late_why") },
            may_read: visit.may(Act::RecordReadings),
            not_qualified: qualification::may_test(&facts, today).err().map(|why| why.to_string()),
            now: visit.at,
            sample,
            test,
            readings,
            instruments,
            label,
            account,
        })
    })
}

fn photos(reader: &Reader<'_>, test: &BenchTest) -> Result<Vec<(String, i64)>, Failure> {
    let Settings::Appearance { .. } = &test.content.settings else { return Ok(Vec::new()) };
    let found = store::attachment::of_subject(reader, Subject::new(Kind::Method, test.method))?;
    Ok(found.into_iter().map(|file| (file.sha256, file.id)).collect())
}

/// The instrument from the address, else the one of the last reading, else the only one that may be used.
fn chosen(
    asked: &str,
    instruments: &[InstrumentFacts],
    readings: &[Reading],
    today: chrono::NaiveDate,
) -> Option<i64> {
    if let Ok(id) = asked.parse() {
        return Some(id);
    }
    let usable: Vec<i64> = instruments
        .iter()
        .filter(|facts| instrument::may_use(facts, today).is_ok())
        .map(|facts| facts.id)
        .collect();
    let last = readings.iter().rev().find_map(|reading| reading.instrument).filter(|id| usable.contains(id));
    last.or(if usable.len() == 1 { usable.first().copied() } else { None })
}

/// Where the method asks for a second reader: another person's slot beside a first value that is not theirs.
fn own_slot(test: &BenchTest, slot: Slot, readings: &[Reading], account: i64) -> Slot {
    let is_first = |key: &SlotKey| in_slot(readings, key).is_none_or(|reading| reading.account == account);
    if test.content.second_reader_tolerance.is_none() || !slot.is_required || is_first(&slot.key) {
        return slot;
    }
    let second = reader_key(&slot.key, "second");
    let reader = match is_first(&second) {
        true => "second",
        false => "third",
    };
    Slot { key: reader_key(&slot.key, reader), title: format!("{}, {reader} reader", slot.title), ..slot }
}

impl Loaded {
    pub fn limit(&self) -> Option<&Limit> {
        let limits_do = self.sample.pull.as_ref().and_then(|pull| pull.limits_do);
        let set = match (self.sample.limit_set.as_str(), limits_do) {
            ("none", _) => return None,
            (_, Some(LimitsDo::InUse)) => LimitSet::InUse,
            ("release", _) => LimitSet::Release,
            _ => LimitSet::ShelfLife,
        };
        Some(self.sample.limits(&self.test.test)?.limit(set))
    }

    /// Why nothing can be recorded or corrected by this person now.
    pub fn refusals(&self) -> Vec<String> {
        let state = self.sample.state(&self.test);
        let touch = may_touch(state).err().map(|why| why.to_string());
        let stage = crate::web::bench::refusal(&self.sample, &self.test).map(|why| why.to_string());
        let stage = stage.filter(|_| self.readings.is_empty());
        [touch, stage, self.not_qualified.clone()].into_iter().flatten().collect()
    }

    /// New values can be recorded: the test is neither complete nor signed.
    pub fn is_open(&self) -> bool {
        may_record(self.sample.state(&self.test)).is_ok()
    }

    /// Why a slot has no box now.
    pub fn closed(&self, slot: &Slot) -> Option<String> {
        if in_slot(&self.readings, &slot.key).is_some() {
            return None;
        }
        if !self.is_open() {
            return Some("not recorded".to_string());
        }
        let tests = crate::acts::stage::tests_of(&self.sample);
        may_read(&tests, &self.sample.losses, slot.stage, slot.key.container).err().map(|why| why.to_string())
    }

    /// The newest row the page shows.
    pub fn seen(&self) -> i64 {
        self.readings.iter().map(|reading| reading.id).max().unwrap_or_default()
    }
}
