//! A completed test: what must be there before it is judged, and what the bench itself marks for the reviewer.

use chrono::{Datelike, NaiveDate, Weekday};
use rust_decimal::Decimal;
use serde_json::json;

use super::hint::OUTSIDE_WINDOW;
use super::judgement::spread::median;
use super::judgement::{FlagLevel, NewFlag, Qualifier, ReadingValue};
use super::method::{Level, MethodContent, Settings};
use super::moment::{Moment, plus_days};
use super::reading::{Reading, first_of, in_slot, is_late, standing};
use super::refusal::NamedReason;
use super::slot::{SlotKey, minutes_words};

/// Why a test cannot be completed.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ResultRefusal {
    #[error("Nothing is recorded and nothing was lost, so there is nothing to complete.")]
    NothingRecorded,
    #[error("Still open: {0}. Record it, say that it could not be read, or close its stage as lost.")]
    ReadingsMissing(String),
    #[error("A value drew a question: {0} Say that it is right, or change it.")]
    QuestionOpen(String),
    #[error("This method asks for a second reader. Still open for another person: {0}.")]
    SecondReaderMissing(String),
    #[error("The readers differ by more than the method allows at {0}. A third reading decides.")]
    ThirdReadingNeeded(String),
}

impl NamedReason for ResultRefusal {}

/// What completing a test asks.
#[derive(Clone, Debug, Default)]
pub struct CompleteFacts {
    pub recorded: usize,
    pub lost: usize,
    /// Labels of required slots that are empty and not lost.
    pub missing: Vec<String>,
    /// Sentences of questions nobody has answered.
    pub questions: Vec<String>,
    pub second_missing: Vec<String>,
    pub readers_differ: Vec<String>,
}

/// Refuses in this order: nothing recorded, readings missing, questions open, second reader, third reading.
pub fn may_complete(facts: &CompleteFacts) -> Result<(), ResultRefusal> {
    if facts.recorded == 0 && facts.lost == 0 {
        return Err(ResultRefusal::NothingRecorded);
    }
    if !facts.missing.is_empty() {
        return Err(ResultRefusal::ReadingsMissing(listed(&facts.missing)));
    }
    if let Some(question) = facts.questions.first() {
        return Err(ResultRefusal::QuestionOpen(question.clone()));
    }
    if !facts.second_missing.is_empty() {
        return Err(ResultRefusal::SecondReaderMissing(listed(&facts.second_missing)));
    }
    if !facts.readers_differ.is_empty() {
        return Err(ResultRefusal::ThirdReadingNeeded(listed(&facts.readers_differ)));
    }
    Ok(())
}

fn listed(labels: &[String]) -> String {
    const SHOWN: usize = 4;
    let shown = labels.iter().take(SHOWN).cloned().collect::<Vec<_>>().join("; ");
    match labels.len() {
        0..=SHOWN => shown,
        more => format!("{shown}; and {} more", more - SHOWN),
    }
}

/// The readings as the judgement takes them: what stands, with the first value where it was corrected.
///
/// A sample without numbered containers counts them by its replicates.
pub fn for_judgement(content: &MethodContent, readings: &[Reading], word: &str) -> Vec<ReadingValue> {
    let by_second = |reading: &&Reading| !reading.key.field.contains(':');
    standing(readings)
        .into_iter()
        .filter(by_second)
        .map(|reading| {
            let replicate = reading.key.replicate;
            let counts_itself = content.level == Level::Container && reading.container.is_none();
            let container = if counts_itself { Some(-i64::from(replicate)) } else { reading.container };
            let label = match (counts_itself, reading.container_label.is_empty()) {
                (true, _) => format!("{word} {replicate}"),
                (false, true) => String::new(),
                (false, false) => format!("{word} {}", reading.container_label),
            };
            let decided = decided_by_third(readings, reading);
            ReadingValue {
                container,
                container_label: label,
                replicate: if counts_itself { 1 } else { replicate },
                field: reading.key.field.clone(),
                typed: decided.map_or_else(|| reading.typed.clone(), |value| value.to_string()),
                value: decided.or(reading.value),
                qualifier: Qualifier::from_code(&reading.qualifier).unwrap_or(Qualifier::Words),
                first_typed: first_of(readings, reading).map(|first| (first.typed.clone(), first.value)),
            }
        })
        .collect()
}

/// Where a third person read because two differed: the middle of the three values.
fn decided_by_third(readings: &[Reading], first: &Reading) -> Option<Decimal> {
    let value = |reader: &str| in_slot(readings, &reader_key(&first.key, reader)).and_then(|one| one.value);
    median(&[first.value?, value("second")?, value("third")?])
}

/// What the bench marks by itself: late readings, settings outside the method, questions answered "it is right".
pub fn bench_flags(content: &MethodContent, readings: &[Reading], now: Moment) -> Vec<NewFlag> {
    let mut flags = Vec::new();
    for reading in standing(readings) {
        flags.extend(late_flag(reading, now));
        flags.extend(setting_flag(&content.settings, reading));
        if reading.answer.as_deref() == Some("kept") {
            // A setting outside its window has its own exception.
            for question in reading.questions.iter().filter(|one| one.rule != OUTSIDE_WINDOW) {
                flags.push(flag(
                    "soft stop",
                    FlagLevel::Mark,
                    format!("{} Kept as it is by {}.", question.sentence, reading.by),
                    json!({ "rule": question.rule, "reading": reading.shown() }),
                ));
            }
        }
    }
    flags
}

fn flag(kind: &'static str, level: FlagLevel, sentence: String, numbers: serde_json::Value) -> NewFlag {
    NewFlag { kind, level, sentence, numbers }
}

/// Seconds between a planned reading's due instant and its reading; positive is late.
pub fn seconds_late(reading: &Reading, now: Moment) -> Option<i64> {
    let due = Moment::from_stored(reading.due_at.as_deref()?, now.zone)?;
    let read = Moment::from_stored(reading.read_instant(), now.zone)?;
    Some((read.utc - due.utc).num_seconds())
}

/// The minute after shaking that a field such as `sediment_ml@30` belongs to.
pub fn minute_of(field: &str) -> Option<u32> {
    field.split_once('@')?.1.parse().ok()
}

fn late_flag(reading: &Reading, now: Moment) -> Option<NewFlag> {
    let minute = minute_of(&reading.key.field).filter(|_| reading.key.field.starts_with("sediment"))?;
    let seconds = seconds_late(reading, now).filter(|seconds| is_late(minute, *seconds))?;
    let late = minutes_words(u32::try_from(seconds / 60).unwrap_or_default());
    let sentence = format!(
        "The reading planned {} after shaking was taken {late} late{}.",
        minutes_words(minute),
        if reading.container_label.is_empty() {
            String::new()
        } else {
            format!(" ({})", reading.container_label)
        }
    );
    let numbers = json!({ "minute": minute, "seconds_late": seconds });
    Some(flag("late reading", FlagLevel::Mark, sentence, numbers))
}

/// The window of the method that a value of this field keeps: what it is, least, most, unit.
pub fn setting_window(
    settings: &Settings,
    field: &str,
) -> Option<(&'static str, Decimal, Decimal, &'static str)> {
    Some(match (settings, field) {
        (Settings::Viscosity { torque_least_percent, torque_most_percent, .. }, "torque_percent") => {
            ("Torque", *torque_least_percent, *torque_most_percent, "%")
        }
        (Settings::Viscosity { temperature_c, temperature_tolerance_c, .. }, "temperature_c") => {
            let (centre, tolerance) = (*temperature_c, *temperature_tolerance_c);
            ("Temperature", centre - tolerance, centre + tolerance, "°C")
        }
        (Settings::Viscosity { rest_minutes, .. }, "rest_minutes") => {
            ("Rest time", Decimal::from(*rest_minutes), Decimal::from(*rest_minutes), "min")
        }
        (Settings::Ph { temperature_least_c, temperature_most_c, .. }, "temperature_c") => {
            ("Temperature", *temperature_least_c, *temperature_most_c, "°C")
        }
        _ => return None,
    })
}

/// `Torque 94.5 % in reading 1 lies above the method’s 90 %`; nothing for a value inside its window.
pub fn outside_window(settings: &Settings, key: &SlotKey, value: Decimal) -> Option<String> {
    let (what, least, most, unit) = setting_window(settings, &key.field)?;
    if (least..=most).contains(&value) {
        return None;
    }
    let (side, bound) = if value > most { ("above", most) } else { ("below", least) };
    let replicate = key.replicate;
    Some(format!("{what} {value} {unit} in reading {replicate} lies {side} the method’s {bound} {unit}"))
}

fn setting_flag(settings: &Settings, reading: &Reading) -> Option<NewFlag> {
    let value = reading.value?;
    let outside = outside_window(settings, &reading.key, value)?;
    let (_, least, most, _) = setting_window(settings, &reading.key.field)?;
    let sentence = format!("{outside}: not comparable as it stands.");
    let numbers = json!({ "value": value, "least": least, "most": most });
    Some(flag("setting outside method", FlagLevel::Exception, sentence, numbers))
}

/// Three working days after first knowledge, Saturdays and Sundays not counted (decision A7). Public holidays of
/// the market are the site's to add: the date is the earliest one.
pub fn clock_due_on(first_known: NaiveDate) -> NaiveDate {
    let mut day = first_known;
    let mut left = 3;
    while left > 0 {
        day = plus_days(day, 1);
        if !matches!(day.weekday(), Weekday::Sat | Weekday::Sun) {
            left -= 1;
        }
    }
    day
}

/// The clock runs for a labelled condition, a distributed lot, and a market whose rule asks it (the United
/// States: 21 CFR 314.81(b)(1), field alert within three working days).
pub fn clock_runs(is_labelled: bool, is_distributed: bool, market: &str) -> bool {
    let is_us = ["US", "USA", "UNITED STATES"].contains(&market.trim().to_uppercase().as_str());
    is_labelled && is_distributed && is_us
}

/// The field of the second or third reader of a slot.
pub fn reader_key(key: &SlotKey, reader: &str) -> SlotKey {
    SlotKey { field: format!("{reader}:{}", key.field), ..key.clone() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn refusals_come_in_their_order() {
        let full = CompleteFacts { recorded: 3, ..CompleteFacts::default() };
        let missing = vec!["pH, reading 3".to_string()];
        let table = [
            (full.clone(), ""),
            (CompleteFacts::default(), "NothingRecorded"),
            (CompleteFacts { lost: 1, ..CompleteFacts::default() }, ""),
            (
                CompleteFacts {
                    missing: missing.clone(),
                    questions: vec!["Is 68.3 right?".to_string()],
                    ..full.clone()
                },
                "ReadingsMissing",
            ),
            (
                CompleteFacts {
                    questions: vec!["Is 68.3 right?".to_string()],
                    second_missing: missing.clone(),
                    ..full.clone()
                },
                "QuestionOpen",
            ),
            (
                CompleteFacts {
                    second_missing: missing.clone(),
                    readers_differ: missing.clone(),
                    ..full.clone()
                },
                "SecondReaderMissing",
            ),
            (CompleteFacts { readers_differ: missing, ..full }, "ThirdReadingNeeded"),
        ];
        for (facts, expected) in table {
            let said = may_complete(&facts).err().map(|why| format!("{why:?}")).unwrap_or_default();
            assert!(
                said.starts_with(expected) && said.is_empty() == expected.is_empty(),
                "{said} {expected}"
            );
        }
    }

    #[test]
    fn three_working_days_skip_the_weekend() {
        let day = |text: &str| text.parse::<NaiveDate>().unwrap();
        let table = [
            ("2026-12-01", "2026-12-04"),
            ("2026-12-02", "2026-12-07"),
            ("2026-12-04", "2026-12-09"),
            ("2026-12-05", "2026-12-09"),
            ("2026-12-06", "2026-12-09"),
        ];
        for (known, due) in table {
            assert_eq!(clock_due_on(day(known)), day(due), "{known}");
        }
        assert!(clock_runs(true, true, "US") && !clock_runs(true, false, "US"));
        assert!(!clock_runs(true, true, "GB") && !clock_runs(false, true, "US"));
    }
}
