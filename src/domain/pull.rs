//! Pulls: where one stands, and who may take, miss, cancel or assign it, when.

use chrono::NaiveDate;

use super::moment::date_shown;
use super::refusal::NamedReason;
use super::status::Status;

/// What happened to a pull; none: it is planned.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Event {
    Pulled,
    Missed,
    Cancelled,
}

impl Event {
    /// As stored in `pull_event.kind`.
    pub fn words(self) -> &'static str {
        match self {
            Event::Pulled => "pulled",
            Event::Missed => "missed",
            Event::Cancelled => "cancelled",
        }
    }

    pub fn from_words(words: &str) -> Option<Event> {
        [Event::Pulled, Event::Missed, Event::Cancelled].into_iter().find(|event| event.words() == words)
    }
}

/// How far the tests of a pull's sample are.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Progress {
    pub tests: usize,
    /// With at least one reading.
    pub started: usize,
    /// With a result.
    pub complete: usize,
    /// With a result whose newest version is checked, or whose method asks for no check.
    pub checked: usize,
    /// Sent back by the checker or the reviewer, without a newer result.
    pub sent_back: usize,
    pub out_of_specification: usize,
}

/// What is known of a pull.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct PullFacts {
    pub is_imported: bool,
    pub event: Option<Event>,
    /// The site's date of the event.
    pub happened_on: Option<NaiveDate>,
    pub started_on: Option<NaiveDate>,
    pub due_on: Option<NaiveDate>,
    pub earliest_on: Option<NaiveDate>,
    pub latest_on: Option<NaiveDate>,
    pub is_last: bool,
    pub containers_needed: usize,
    pub progress: Progress,
    /// Signed by a reviewer, and nothing recorded since.
    pub is_signed: bool,
}

/// The states behind the status words (decision A17).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PullState {
    Planned,
    Due,
    Pulled,
    InTesting,
    Complete,
    Checked,
    SentBack,
    Signed,
    OutOfSpecification,
    Missed,
    Cancelled,
}

impl PullState {
    pub fn words(self) -> &'static str {
        match self {
            PullState::Planned => "planned",
            PullState::Due => "due",
            PullState::Pulled => "pulled",
            PullState::InTesting => "in testing",
            PullState::Complete => "complete",
            PullState::Checked => "checked",
            PullState::SentBack => "sent back",
            PullState::Signed => "signed",
            PullState::OutOfSpecification => "out of specification",
            PullState::Missed => "missed",
            PullState::Cancelled => "cancelled",
        }
    }
}

/// The state of a pull on a date. The first that holds counts: cancelled, missed, planned or due, signed, sent
/// back, out of specification, checked, complete, in testing, pulled.
pub fn state(facts: &PullFacts, today: NaiveDate) -> PullState {
    let progress = facts.progress;
    match facts.event {
        Some(Event::Cancelled) => return PullState::Cancelled,
        Some(Event::Missed) => return PullState::Missed,
        None if !facts.is_imported => {
            let is_open = facts.earliest_on.is_none_or(|earliest| earliest <= today);
            return if is_open { PullState::Due } else { PullState::Planned };
        }
        _ => {}
    }
    match progress {
        _ if facts.is_signed => PullState::Signed,
        Progress { sent_back: 1.., .. } => PullState::SentBack,
        Progress { out_of_specification: 1.., .. } => PullState::OutOfSpecification,
        Progress { tests, checked, .. } if tests > 0 && checked == tests => PullState::Checked,
        Progress { tests, complete, .. } if tests > 0 && complete == tests => PullState::Complete,
        Progress { started, complete, .. } if started + complete > 0 => PullState::InTesting,
        _ => PullState::Pulled,
    }
}

/// The status word of a pull, the same on every page. A cancelled pull shows as missed, beside the word
/// "cancelled"; the side facts tell the two apart.
pub fn status(facts: &PullFacts, today: NaiveDate) -> Status {
    match state(facts, today) {
        PullState::Planned | PullState::Due => Status::NotStarted,
        PullState::Pulled | PullState::InTesting => Status::InProgress,
        PullState::Complete => Status::WaitingForCheck,
        PullState::Checked => Status::WaitingForReview,
        PullState::SentBack => Status::SentBack,
        PullState::Signed => Status::Signed,
        PullState::OutOfSpecification => Status::OutOfSpecification,
        PullState::Missed | PullState::Cancelled => Status::Missed,
    }
}

/// Side facts in words: "3 days early", "2 days late", "cancelled"; empty when there is nothing to say.
pub fn side_fact(facts: &PullFacts, today: NaiveDate) -> String {
    let days = |count: i64, word: &str| match count {
        1 => format!("1 day {word}"),
        count => format!("{count} days {word}"),
    };
    match (facts.event, facts.earliest_on, facts.latest_on) {
        (Some(Event::Cancelled), ..) => "cancelled".to_string(),
        (Some(Event::Missed), ..) => String::new(),
        (Some(Event::Pulled), Some(earliest), Some(latest)) => match facts.happened_on {
            Some(on) if on < earliest => days((earliest - on).num_days(), "early"),
            Some(on) if on > latest => days((on - latest).num_days(), "late"),
            _ => String::new(),
        },
        (None, _, Some(latest)) if latest < today => days((today - latest).num_days(), "late"),
        _ => String::new(),
    }
}

/// One container that was scanned or typed, and the label it was found to be, if any.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Scanned {
    pub typed: String,
    pub found: Found,
}

/// What a scanned or typed label turned out to be.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Found {
    /// A container of this arm that is still in its chamber.
    Here {
        container: i64,
    },
    /// A container of this arm that left already.
    Left,
    /// A container of another arm or study.
    Elsewhere(String),
    Nowhere,
}

/// A pull about to be taken.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Take {
    pub scanned: Vec<Scanned>,
    /// When the containers left the chamber, as a date of the site.
    pub taken_on: NaiveDate,
    /// Why it is early, late, partial or entered late; empty where it is none of these.
    pub why: String,
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum PullRefusal {
    #[error("This pull was imported, not observed here. Nothing is recorded in it.")]
    PullImported,
    #[error("This pull was taken already.")]
    PullTaken,
    #[error("This pull was not taken yet.")]
    PullNotTaken,
    #[error("This pull was recorded as missed.")]
    PullMissed,
    #[error("This pull was cancelled.")]
    PullCancelled,
    #[error("This pull is signed.")]
    PullSigned,
    #[error("The date lies ahead. A pull is recorded when the containers leave the chamber.")]
    TakenInFuture,
    #[error("The date lies before time zero of the study.")]
    TakenBeforeTimeZero,
    #[error("No container was scanned. Scan the label of each container that leaves.")]
    NoContainer,
    #[error(
        "“{typed}” is not the label of a container of this pull. Nothing was recorded. Look at the label again."
    )]
    WrongLabel { place: usize, typed: String },
    #[error("“{typed}” is the label of {what}, not of this pull. Nothing was recorded. Put it back.")]
    LabelOfOther { place: usize, typed: String, what: String },
    #[error("“{typed}” left its chamber before. Nothing was recorded. Look at the label again.")]
    ContainerHasLeft { place: usize, typed: String },
    #[error("“{typed}” stands twice. Scan each container once.")]
    ContainerScannedTwice { place: usize, typed: String },
    #[error("The last point of an arm is never taken early. Its window opens on {0}.")]
    LastPointEarly(String),
    #[error("The window opens on {0}. Say why it is taken early, in at least ten characters.")]
    EarlyWithoutReason(String),
    #[error("The window closed on {0}. Say why it is taken late, in at least ten characters.")]
    LateWithoutReason(String),
    #[error("{taken} of {needed} containers: say why it is a partial pull, in at least ten characters.")]
    PartialWithoutReason { taken: usize, needed: usize },
    #[error(
        "The containers left on another day than today. Say why it is entered later, in at least ten characters."
    )]
    LateEntryWithoutReason,
    #[error("Say why more containers are taken, in at least ten characters.")]
    RePullWithoutReason,
    #[error("The pull is due on {0}. It cannot be missed before.")]
    NotYetDue(String),
    #[error("Choose a person who works at the bench.")]
    NotAtBench,
}

impl NamedReason for PullRefusal {
    fn field(&self) -> Option<String> {
        use PullRefusal::*;
        match self {
            WrongLabel { place, .. }
            | LabelOfOther { place, .. }
            | ContainerHasLeft { place, .. }
            | ContainerScannedTwice { place, .. } => Some(format!("container.{place}")),
            NoContainer => Some("container.1".to_string()),
            TakenInFuture | TakenBeforeTimeZero => Some("taken_on".to_string()),
            LateWithoutReason(_)
            | EarlyWithoutReason(_)
            | PartialWithoutReason { .. }
            | LateEntryWithoutReason
            | RePullWithoutReason => Some("why".to_string()),
            NotAtBench => Some("account".to_string()),
            _ => None,
        }
    }
}

/// A pull that is neither imported, taken, missed nor cancelled. Refuses in this order.
pub fn is_open(facts: &PullFacts) -> Result<(), PullRefusal> {
    if facts.is_imported {
        return Err(PullRefusal::PullImported);
    }
    match facts.event {
        None => Ok(()),
        Some(Event::Pulled) => Err(PullRefusal::PullTaken),
        Some(Event::Missed) => Err(PullRefusal::PullMissed),
        Some(Event::Cancelled) => Err(PullRefusal::PullCancelled),
    }
}

/// Refuses in this order: not open, date ahead, before time zero, each label (a mismatch is a hard stop), last
/// point early, then the reasons: early, late, partial, entered on another day.
pub fn may_take(take: &Take, facts: &PullFacts, today: NaiveDate) -> Result<(), PullRefusal> {
    is_open(facts)?;
    if take.taken_on > today {
        return Err(PullRefusal::TakenInFuture);
    }
    if facts.started_on.is_some_and(|started_on| take.taken_on < started_on) {
        return Err(PullRefusal::TakenBeforeTimeZero);
    }
    labels_match(&take.scanned)?;
    let has_reason = is_reason(&take.why);
    if let Some(earliest) = facts.earliest_on.filter(|earliest| take.taken_on < *earliest) {
        if facts.is_last {
            return Err(PullRefusal::LastPointEarly(date_shown(earliest)));
        }
        if !has_reason {
            return Err(PullRefusal::EarlyWithoutReason(date_shown(earliest)));
        }
    }
    if let Some(latest) = facts.latest_on.filter(|latest| take.taken_on > *latest && !has_reason) {
        return Err(PullRefusal::LateWithoutReason(date_shown(latest)));
    }
    let (taken, needed) = (take.scanned.len(), facts.containers_needed);
    if taken < needed && !has_reason {
        return Err(PullRefusal::PartialWithoutReason { taken, needed });
    }
    if take.taken_on != today && !has_reason {
        return Err(PullRefusal::LateEntryWithoutReason);
    }
    Ok(())
}

/// More containers for a pull that was taken. Refuses in this order: not taken, signed, labels, reason.
pub fn may_take_more(take: &Take, facts: &PullFacts) -> Result<(), PullRefusal> {
    match is_open(facts) {
        Err(PullRefusal::PullTaken) => {}
        Err(other) => return Err(other),
        Ok(()) => return Err(PullRefusal::PullNotTaken),
    }
    if facts.is_signed {
        return Err(PullRefusal::PullSigned);
    }
    labels_match(&take.scanned)?;
    if is_reason(&take.why) { Ok(()) } else { Err(PullRefusal::RePullWithoutReason) }
}

fn is_reason(text: &str) -> bool {
    text.trim().chars().count() >= super::reason::SHORTEST_REASON
}

fn labels_match(scanned: &[Scanned]) -> Result<(), PullRefusal> {
    if scanned.is_empty() {
        return Err(PullRefusal::NoContainer);
    }
    let mut seen = Vec::new();
    for (place, one) in (1..).zip(scanned) {
        let typed = one.typed.clone();
        match &one.found {
            Found::Nowhere => return Err(PullRefusal::WrongLabel { place, typed }),
            Found::Elsewhere(what) => {
                return Err(PullRefusal::LabelOfOther { place, typed, what: what.clone() });
            }
            Found::Left => return Err(PullRefusal::ContainerHasLeft { place, typed }),
            Found::Here { container } if seen.contains(container) => {
                return Err(PullRefusal::ContainerScannedTwice { place, typed });
            }
            Found::Here { container } => seen.push(*container),
        }
    }
    Ok(())
}

/// Refuses in this order: not open, not yet due.
pub fn may_miss(facts: &PullFacts, today: NaiveDate) -> Result<(), PullRefusal> {
    is_open(facts)?;
    match facts.due_on {
        Some(due_on) if today < due_on => Err(PullRefusal::NotYetDue(date_shown(due_on))),
        _ => Ok(()),
    }
}

/// Refuses in this order: imported, missed, cancelled, signed, a person who is not at the bench.
pub fn may_assign(facts: &PullFacts, is_at_bench: bool) -> Result<(), PullRefusal> {
    match is_open(facts) {
        Ok(()) | Err(PullRefusal::PullTaken) => {}
        Err(other) => return Err(other),
    }
    if facts.is_signed {
        return Err(PullRefusal::PullSigned);
    }
    if is_at_bench { Ok(()) } else { Err(PullRefusal::NotAtBench) }
}

#[cfg(test)]
#[path = "pull_test.rs"]
mod tests;
