//! A reading: an observation as soon as it is recorded. A later value supersedes it, with a reason.

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::method::Settings;
use super::moment::Moment;
use super::refusal::NamedReason;
use super::slot::{Slot, SlotKey};
use super::typed::Number;

/// What was said about a slot.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Said {
    Number(Number),
    /// The count hit the method's cap: more than this, not uniform.
    MoreThan(u32),
    /// A grade's code, a setting or free words.
    Words(String),
    /// Could not be read, because …
    NotRead(String),
}

impl Said {
    /// As stored in `reading.typed`.
    pub fn typed(&self) -> String {
        match self {
            Said::Number(number) => number.text.clone(),
            Said::MoreThan(cap) => cap.to_string(),
            Said::Words(words) | Said::NotRead(words) => words.clone(),
        }
    }

    /// The exact value, where there is one.
    pub fn value(&self) -> Option<Decimal> {
        match self {
            Said::Number(number) => Some(number.value),
            Said::MoreThan(cap) => Some(Decimal::from(*cap)),
            Said::Words(_) | Said::NotRead(_) => None,
        }
    }

    /// As stored in `reading.qualifier`.
    pub fn qualifier(&self) -> &'static str {
        match self {
            Said::Number(_) => "=",
            Said::MoreThan(_) => ">",
            Said::Words(_) => "words",
            Said::NotRead(_) => "not read",
        }
    }

    /// As a sentence says it.
    pub fn shown(&self) -> String {
        shown(self.qualifier(), &self.typed())
    }
}

/// A reading's text with its qualifier: `6.83`, `more than 100`, `could not be read: …`.
pub fn shown(qualifier: &str, typed: &str) -> String {
    match qualifier {
        ">" => format!("more than {typed}"),
        "<" => format!("less than {typed}"),
        "not read" => format!("could not be read: {typed}"),
        _ => typed.to_string(),
    }
}

/// `more than 10, at most 15`: what a count says that was looked at after each so many.
pub fn interval_words(typed: &str, every: u32) -> Option<String> {
    let most: u32 = typed.trim().parse().ok()?;
    // The last look before this count came after a whole number of intervals.
    match most.saturating_sub(1) / every.max(1) * every {
        0 => Some(format!("at most {most}")),
        least => Some(format!("more than {least}, at most {most}")),
    }
}

/// A check that a value drew while it could be re-read.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Question {
    pub rule: String,
    pub sentence: String,
}

/// A reading as it is recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reading {
    pub id: i64,
    /// The slot it stands in.
    pub key: SlotKey,
    /// The container it came from, also where the slot is not of one container.
    pub container: Option<i64>,
    pub container_label: String,
    pub typed: String,
    pub value: Option<Decimal>,
    pub qualifier: String,
    pub read_at: Option<String>,
    pub due_at: Option<String>,
    /// A count that was looked at only after each so many: it is known to this interval (decision A15).
    pub inspected_every: Option<u32>,
    pub instrument: Option<i64>,
    pub questions: Vec<Question>,
    /// `kept` or `changed after hint`.
    pub answer: Option<String>,
    pub supersedes: Option<i64>,
    pub act: i64,
    pub account: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
    pub reason: Option<String>,
}

impl Reading {
    pub fn shown(&self) -> String {
        let shown = shown(&self.qualifier, &self.typed);
        let interval = self.inspected_every.and_then(|every| interval_words(&self.typed, every));
        interval.map_or(shown.clone(), |interval| format!("{shown} ({interval})"))
    }

    /// The instant it was read: stated, or that of its act.
    pub fn read_instant(&self) -> &str {
        self.read_at.as_deref().unwrap_or(&self.at)
    }

    /// It drew a question that nobody has answered yet.
    pub fn has_open_question(&self) -> bool {
        !self.questions.is_empty() && self.answer.as_deref() != Some("kept")
    }

    /// The row only answers a question: the value is the same, so it is no correction.
    pub fn is_answer(&self) -> bool {
        self.supersedes.is_some() && self.answer.as_deref() == Some("kept")
    }
}

/// The readings that stand: those that no later row supersedes.
pub fn standing(readings: &[Reading]) -> Vec<&Reading> {
    let gone: Vec<i64> = readings.iter().filter_map(|reading| reading.supersedes).collect();
    readings.iter().filter(|reading| !gone.contains(&reading.id)).collect()
}

/// The reading that stands in a slot.
pub fn in_slot<'a>(readings: &'a [Reading], key: &SlotKey) -> Option<&'a Reading> {
    standing(readings).into_iter().find(|reading| reading.key == *key)
}

/// The first value ever recorded in the slot of a reading, if it was another one.
pub fn first_of<'a>(readings: &'a [Reading], reading: &'a Reading) -> Option<&'a Reading> {
    let mut first = reading;
    while let Some(before) = first.supersedes {
        first = readings.iter().find(|one| one.id == before)?;
    }
    let is_other = first.typed != reading.typed || first.qualifier != reading.qualifier;
    is_other.then_some(first)
}

/// One value to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    pub slot: Slot,
    pub said: Said,
}

/// What was recorded, for the history: by container or replicate, each value behind its name once.
/// `bottle A07-3NGQ: Colour matches, Caking none; bottle A08-6AWE: …`
pub fn told(test_title: &str, entries: &[&Entry]) -> String {
    let mut columns: Vec<&str> = Vec::new();
    for entry in entries {
        if !columns.contains(&entry.slot.column.as_str()) {
            columns.push(&entry.slot.column);
        }
    }
    let value = |entry: &&Entry| {
        let shown = entry.slot.shown(entry.said.qualifier(), &entry.said.typed());
        if entry.slot.title == test_title { shown } else { format!("{} {shown}", entry.slot.title) }
    };
    let told = columns.into_iter().map(|column| {
        let of_column = entries.iter().copied().filter(|entry| entry.slot.column == column);
        let values = of_column.map(|entry| value(&entry)).collect::<Vec<_>>().join(", ");
        if column.is_empty() { values } else { format!("{column}: {values}") }
    });
    told.collect::<Vec<_>>().join("; ")
}

/// Where the pull of a sample is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PullState {
    /// The sample came without a pull: received and at hand.
    NoPull,
    Planned,
    Pulled,
    Missed,
    Cancelled,
}

impl PullState {
    /// From the newest `pull_event` of a pull.
    pub fn from_event(kind: Option<&str>) -> PullState {
        match kind {
            Some("pulled") => PullState::Pulled,
            Some("missed") => PullState::Missed,
            Some("cancelled") => PullState::Cancelled,
            _ => PullState::Planned,
        }
    }
}

/// What the rules ask of sample and test before a reading.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct BenchState {
    pub pull: PullState,
    pub is_signed: bool,
    /// Its result stands and was not sent back.
    pub is_complete: bool,
}

/// Why a reading was not recorded.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ReadingRefusal {
    #[error("The pull has not been taken yet. Record the pull first; then its tests can be read.")]
    PullNotTaken,
    #[error("The pull was recorded as missed, so there is nothing to read.")]
    PullMissed,
    #[error("The pull was cancelled, so there is nothing to read.")]
    PullCancelled,
    #[error("The sample is signed. A new value can only be a correction of a recorded one, with its reason.")]
    SampleSigned,
    #[error("The test is complete. Correct a recorded value with its reason, or ask for it to be sent back.")]
    TestComplete,
    #[error(
        "The label “{0}” is not of this sample. Nothing was recorded; take the right container and scan again."
    )]
    WrongLabel(String),
    #[error("This test has no reading of that name. Open the page again.")]
    NoSuchReading { name: String },
    #[error("{was} is recorded already. Say why it becomes {becomes}: mistyped, re-read, or your own words.")]
    ChangeNeedsReason { name: String, was: String, becomes: String },
    #[error("Nothing is recorded there yet, so there is nothing to correct.")]
    NothingToCorrect { name: String },
    #[error("{label} is due {due}. Read it then; a reading before its time is not the planned one.")]
    NotDueYet { name: String, label: String, due: String },
    #[error("Fill and shake the cylinder first: time zero and the total volume come before its readings.")]
    CylinderNotStarted { name: String },
    #[error("The time {0} has not come yet. Type when it was read.")]
    ReadInFuture(String),
    #[error("The time {0} lies before the containers were taken. Type when it was read.")]
    ReadBeforePull(String),
    #[error("The top of the bed lies below the base, which cannot be. Read both again.")]
    BedBelowBase { name: String },
    #[error("The fill line does not lie above the base, which cannot be. Read both again.")]
    FillBelowBase { name: String },
    #[error("Choose the {0} it is read with; then the value can be recorded.")]
    InstrumentMissing(String),
    #[error("{code} is a {is}, and this method reads with a {wanted}. Choose another one.")]
    WrongInstrument { code: String, is: String, wanted: String },
    #[error(
        "{code}: the slope of the day’s check is {slope}, and this method needs {least} to {most} %. Check it anew."
    )]
    SlopeOutside { code: String, slope: String, least: Decimal, most: Decimal },
    #[error("The second reader is another person than the first.")]
    SecondReaderIsFirst { name: String },
    #[error("The first reader's value comes first.")]
    FirstReaderMissing { name: String },
}

impl NamedReason for ReadingRefusal {
    fn field(&self) -> Option<String> {
        use ReadingRefusal::*;
        match self {
            NoSuchReading { name }
            | ChangeNeedsReason { name, .. }
            | NothingToCorrect { name }
            | NotDueYet { name, .. }
            | CylinderNotStarted { name }
            | BedBelowBase { name }
            | FillBelowBase { name }
            | SecondReaderIsFirst { name }
            | FirstReaderMissing { name } => Some(name.clone()),
            _ => None,
        }
    }

    fn is_noted(&self) -> bool {
        matches!(self, ReadingRefusal::WrongLabel(_))
    }
}

/// Whether readings can be recorded at all. Refuses in this order: the pull, the signature, the completed test.
pub fn may_record(state: BenchState) -> Result<(), ReadingRefusal> {
    may_touch(state)?;
    if state.is_signed {
        return Err(ReadingRefusal::SampleSigned);
    }
    if state.is_complete {
        return Err(ReadingRefusal::TestComplete);
    }
    Ok(())
}

/// Whether a recorded value can be corrected: also after completion and signature, which it makes stale.
pub fn may_touch(state: BenchState) -> Result<(), ReadingRefusal> {
    match state.pull {
        PullState::Planned => Err(ReadingRefusal::PullNotTaken),
        PullState::Missed => Err(ReadingRefusal::PullMissed),
        PullState::Cancelled => Err(ReadingRefusal::PullCancelled),
        PullState::Pulled | PullState::NoPull => Ok(()),
    }
}

/// A stated time of reading lies between the pull (where there is one) and now.
pub fn may_state_time(read_at: Moment, pulled_on: Option<Moment>, now: Moment) -> Result<(), ReadingRefusal> {
    if read_at.utc > now.utc {
        return Err(ReadingRefusal::ReadInFuture(read_at.shown()));
    }
    if pulled_on.is_some_and(|pulled| read_at.date() < pulled.date()) {
        return Err(ReadingRefusal::ReadBeforePull(read_at.shown()));
    }
    Ok(())
}

/// The electrode slope of the day's check lies within what the method asks; without a slope it does not.
pub fn slope_fits(
    settings: &Settings,
    code: &str,
    slope_percent: Option<Decimal>,
) -> Result<(), ReadingRefusal> {
    let Settings::Ph { slope_least_percent, slope_most_percent, .. } = settings else { return Ok(()) };
    let (least, most) = (*slope_least_percent, *slope_most_percent);
    if slope_percent.is_some_and(|slope| (least..=most).contains(&slope)) {
        return Ok(());
    }
    let slope = slope_percent.map_or("not recorded".to_string(), |slope| format!("{slope} %"));
    Err(ReadingRefusal::SlopeOutside { code: code.to_string(), slope, least, most })
}

/// Heights that cannot be together. `value` finds what stands in a field of the same column.
pub fn heights_agree(name: &str, value: impl Fn(&str) -> Option<Decimal>) -> Result<(), ReadingRefusal> {
    let (base, bed, fill) = (value("base_mm"), value("bed_top_mm"), value("fill_line_mm"));
    let name = name.to_string();
    if matches!((base, bed), (Some(base), Some(bed)) if bed < base) {
        return Err(ReadingRefusal::BedBelowBase { name });
    }
    if matches!((base, fill), (Some(base), Some(fill)) if fill <= base) {
        return Err(ReadingRefusal::FillBelowBase { name });
    }
    Ok(())
}

/// A planned reading is not taken more than a tenth of its time early (common practice; at least one minute).
pub fn is_too_early(due_minute: u32, seconds_before: i64) -> bool {
    seconds_before > i64::from((due_minute * 6).max(60))
}

/// The whole minutes before its time from which a planned reading may be taken.
pub fn earliest_minutes(due_minute: u32) -> i64 {
    i64::from((due_minute / 10).max(1))
}

/// Late by more than a tenth of its time (common practice; at least two minutes): marked for the reviewer.
pub fn is_late(due_minute: u32, seconds_after: i64) -> bool {
    seconds_after > i64::from((due_minute * 6).max(120))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn refusals_come_in_their_order() {
        let open = BenchState { pull: PullState::Pulled, is_signed: false, is_complete: false };
        let table = [
            (open, None),
            (BenchState { pull: PullState::NoPull, ..open }, None),
            (BenchState { is_complete: true, ..open }, Some(ReadingRefusal::TestComplete)),
            (BenchState { is_signed: true, is_complete: true, ..open }, Some(ReadingRefusal::SampleSigned)),
            (
                BenchState { pull: PullState::Planned, is_signed: true, is_complete: true },
                Some(ReadingRefusal::PullNotTaken),
            ),
            (BenchState { pull: PullState::Missed, ..open }, Some(ReadingRefusal::PullMissed)),
            (BenchState { pull: PullState::Cancelled, ..open }, Some(ReadingRefusal::PullCancelled)),
        ];
        for (state, expected) in table {
            assert_eq!(may_record(state).err(), expected, "{state:?}");
        }
        assert!(may_touch(BenchState { is_signed: true, is_complete: true, ..open }).is_ok());
    }

    #[test]
    fn heights_that_cannot_be_are_refused() {
        let heights = |base: i64, bed: i64, fill: i64| {
            heights_agree("bed", move |field| {
                Some(Decimal::from(match field {
                    "base_mm" => base,
                    "bed_top_mm" => bed,
                    _ => fill,
                }))
            })
        };
        assert!(heights(2, 40, 80).is_ok());
        assert!(heights(2, 2, 80).is_ok());
        assert!(matches!(heights(5, 2, 80), Err(ReadingRefusal::BedBelowBase { .. })));
        assert!(matches!(heights(5, 5, 5), Err(ReadingRefusal::FillBelowBase { .. })));
    }

    #[test]
    fn the_slope_of_the_day_lies_within_the_methods_limits() {
        let ph = super::super::method::preset::of(super::super::method::TestKind::Ph).settings;
        let slope = |text: &str| slope_fits(&ph, "PH-03", Some(text.parse().unwrap()));
        assert!(slope("95").is_ok() && slope("98.6").is_ok() && slope("105").is_ok());
        assert!(slope("94.9").is_err() && slope("105.1").is_err());
        assert!(matches!(slope_fits(&ph, "PH-03", None), Err(ReadingRefusal::SlopeOutside { .. })));
        assert!(slope_fits(&Settings::AsStoredSediment, "C-1", None).is_ok());
    }

    #[test]
    fn early_and_late_are_a_tenth_of_the_planned_time() {
        let table = [(30, 181, true), (30, 180, false), (0, 60, false), (0, 61, true), (1440, 8641, true)];
        for (minute, seconds, early) in table {
            assert_eq!(is_too_early(minute, seconds), early, "{minute} {seconds}");
        }
        assert!(is_late(0, 121) && !is_late(0, 120) && is_late(60, 361) && !is_late(60, 360));
    }
}
