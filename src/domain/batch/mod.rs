//! The record of a lot: a copy of the master record at one batch size, and what was done step by step. Where a step
//! stands is read from its entries, never stored.

pub mod filling;
pub mod late;
pub mod refusal;
pub mod rule;
pub mod start;
pub mod state;
pub mod weighing;
pub mod yields;

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::master::scale::Scaled;
use super::master::{MasterRecord, Phase, Step};

/// The copy a lot is made by, as it is stored and printed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct RecordContent {
    pub product: String,
    pub presentation: String,
    /// `F-104 version 2`.
    pub formulation: String,
    /// Of the version's content.
    pub formulation_digest: String,
    pub size: Decimal,
    pub size_unit: String,
    pub scaled: Scaled,
    pub master: MasterRecord,
}

/// A step with its place in the record.
#[derive(Clone, Copy, Debug)]
pub struct Planned<'a> {
    /// Counted from 1 over the whole record.
    pub number: usize,
    /// Counted from 0.
    pub phase: usize,
    /// Counted from 0 in its phase.
    pub place: usize,
    pub step: &'a Step,
}

impl Planned<'_> {
    /// `2.1 Hydrate the gum`.
    pub fn words(&self) -> String {
        format!("{}.{} {}", self.phase + 1, self.place + 1, self.step.title)
    }
}

impl RecordContent {
    /// All steps in the order of the work.
    pub fn steps(&self) -> Vec<Planned<'_>> {
        let numbered = self.master.steps().enumerate();
        numbered.map(|(at, (phase, place, step))| Planned { number: at + 1, phase, place, step }).collect()
    }

    /// The step with this number, counted from 1.
    pub fn step(&self, number: usize) -> Option<Planned<'_>> {
        self.steps().into_iter().find(|one| one.number == number)
    }

    pub fn phase(&self, at: usize) -> Option<&Phase> {
        self.master.phases.get(at)
    }
}

/// What an entry of a step is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum EntryKind {
    Started,
    Weighing,
    SecondWeighing,
    Value,
    Stopped,
    Resumed,
    Note,
    Ended,
    Checked,
    Skipped,
    Repeated,
    /// A deviation answers an entry that lies outside its limits.
    Answered,
}

impl EntryKind {
    pub const ALL: [EntryKind; 12] = [
        EntryKind::Started,
        EntryKind::Weighing,
        EntryKind::SecondWeighing,
        EntryKind::Value,
        EntryKind::Stopped,
        EntryKind::Resumed,
        EntryKind::Note,
        EntryKind::Ended,
        EntryKind::Checked,
        EntryKind::Skipped,
        EntryKind::Repeated,
        EntryKind::Answered,
    ];

    /// As stored in `step_entry.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            EntryKind::Started => "started",
            EntryKind::Weighing => "weighing",
            EntryKind::SecondWeighing => "second weighing",
            EntryKind::Value => "value",
            EntryKind::Stopped => "stopped",
            EntryKind::Resumed => "resumed",
            EntryKind::Note => "note",
            EntryKind::Ended => "ended",
            EntryKind::Checked => "checked",
            EntryKind::Skipped => "skipped",
            EntryKind::Repeated => "repeated",
            EntryKind::Answered => "answered",
        }
    }

    pub fn from_words(words: &str) -> Option<EntryKind> {
        EntryKind::ALL.into_iter().find(|kind| kind.words() == words)
    }

    /// Part of doing the step: who made such an entry does not check it.
    pub fn is_doing(self) -> bool {
        matches!(
            self,
            EntryKind::Started
                | EntryKind::Weighing
                | EntryKind::Value
                | EntryKind::Stopped
                | EntryKind::Resumed
                | EntryKind::Ended
        )
    }

    /// Carries a number or words that a person read, so it can be corrected.
    pub fn is_observation(self) -> bool {
        matches!(self, EntryKind::Weighing | EntryKind::SecondWeighing | EntryKind::Value | EntryKind::Note)
    }
}

/// How an entry stands to its limits.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Verdict {
    Within,
    Outside,
    #[default]
    NoLimit,
}

impl Verdict {
    /// As stored, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Verdict::Within => "within limits",
            Verdict::Outside => "outside limits",
            Verdict::NoLimit => "no limit",
        }
    }

    pub fn from_words(words: &str) -> Verdict {
        match words {
            "within limits" => Verdict::Within,
            "outside limits" => Verdict::Outside,
            _ => Verdict::NoLimit,
        }
    }

    /// A value against bounds that may be open.
    pub fn of(value: Decimal, least: Option<Decimal>, most: Option<Decimal>) -> Verdict {
        match (least, most) {
            (None, None) => Verdict::NoLimit,
            _ if least.is_some_and(|least| value < least) || most.is_some_and(|most| value > most) => {
                Verdict::Outside
            }
            _ => Verdict::Within,
        }
    }
}

/// What a weighing was made of, beside its net; kept as JSON.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(default)]
pub struct Weighed {
    /// As typed; empty where the balance was tared.
    pub gross: String,
    pub tare: String,
    pub material_lot: String,
    pub balance: String,
    /// The balance's check of the day, in words.
    pub balance_check: String,
    /// What all of this step's amount would be from this material lot, corrected and rounded.
    pub full_target: Option<Decimal>,
    /// How that came about, where it is corrected.
    pub formula: String,
}

/// One entry of a step as it was recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    pub id: i64,
    pub step: usize,
    pub run: u32,
    pub kind: EntryKind,
    pub name: String,
    pub point: String,
    pub typed: String,
    pub value: Option<Decimal>,
    pub unit: String,
    pub verdict: Verdict,
    pub limits: String,
    pub weighed: Weighed,
    pub material_lot: Option<i64>,
    pub stock_entry: Option<i64>,
    pub equipment: Option<i64>,
    /// Code of the equipment.
    pub equipment_code: Option<String>,
    pub instrument: Option<i64>,
    pub instrument_code: Option<String>,
    pub deviation: Option<i64>,
    pub deviation_number: Option<i64>,
    pub answers: Option<i64>,
    /// As stored: UTC.
    pub happened_at: Option<String>,
    pub supersedes: Option<i64>,
    pub account: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
    pub reason: Option<String>,
}

impl Entry {
    /// When it was done: the stated time of a late entry, else the time of the act.
    pub fn instant(&self) -> &str {
        self.happened_at.as_deref().unwrap_or(&self.at)
    }

    /// The value as typed with its unit, or the words.
    pub fn shown(&self) -> String {
        let unit = if self.unit.is_empty() { String::new() } else { format!("\u{202f}{}", self.unit) };
        format!("{}{unit}", self.typed)
    }

    /// What it is about: `Speed`, `Fill volume, after stop 1`, `ML-0042`.
    pub fn label(&self) -> String {
        let name = match self.kind {
            EntryKind::Weighing | EntryKind::SecondWeighing => &self.weighed.material_lot,
            _ => &self.name,
        };
        if self.kind == EntryKind::SecondWeighing {
            return format!("{name}, second weighing");
        }
        match (name.is_empty(), self.point.is_empty()) {
            (true, _) => self.kind.words().to_string(),
            (false, true) => name.clone(),
            (false, false) => format!("{name}, {}", self.point),
        }
    }
}

/// An entry about to be recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewEntry {
    pub step: usize,
    pub run: u32,
    pub kind: EntryKind,
    pub name: String,
    pub point: String,
    pub typed: String,
    pub value: Option<Decimal>,
    pub unit: String,
    pub verdict: Verdict,
    pub limits: String,
    pub weighed: Weighed,
    pub material_lot: Option<i64>,
    pub stock_entry: Option<i64>,
    pub equipment: Option<i64>,
    pub instrument: Option<i64>,
    pub deviation: Option<i64>,
    pub answers: Option<i64>,
    /// As stored: UTC.
    pub happened_at: Option<String>,
    pub supersedes: Option<i64>,
}

impl NewEntry {
    /// A bare entry of a kind; narrow it with the struct fields.
    pub fn of(step: usize, run: u32, kind: EntryKind) -> NewEntry {
        NewEntry {
            step,
            run,
            kind,
            name: String::new(),
            point: String::new(),
            typed: String::new(),
            value: None,
            unit: String::new(),
            verdict: Verdict::NoLimit,
            limits: String::new(),
            weighed: Weighed::default(),
            material_lot: None,
            stock_entry: None,
            equipment: None,
            instrument: None,
            deviation: None,
            answers: None,
            happened_at: None,
            supersedes: None,
        }
    }
}

/// What a phase gave, as recorded.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PhaseYield {
    pub id: i64,
    /// Counted from 0.
    pub phase: usize,
    pub actual: Decimal,
    pub samples: Decimal,
    pub rejects: Decimal,
    pub waste: Decimal,
    pub unit: String,
    pub theoretical: Decimal,
    pub percent: Decimal,
    pub accountable_percent: Decimal,
    pub verdict: Verdict,
    pub limits: String,
    pub deviation: Option<i64>,
    pub deviation_number: Option<i64>,
    pub account: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
    /// Who checked it, and when.
    pub checked: Option<(String, String)>,
}

/// The entries that stand: those no later one supersedes.
pub fn standing(entries: &[Entry]) -> Vec<&Entry> {
    entries.iter().filter(|one| !entries.iter().any(|later| later.supersedes == Some(one.id))).collect()
}

/// The newest yield of a phase.
pub fn yield_of(yields: &[PhaseYield], phase: usize) -> Option<&PhaseYield> {
    yields.iter().rev().find(|one| one.phase == phase)
}

#[cfg(test)]
pub mod example;
