//! Pulls: where one stands, and who may take, miss, cancel or assign it, when.

use chrono::NaiveDate;

use super::moment::date_shown;
use super::refusal::NamedReason;
use super::status::Status;
use super::window::Window;

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

impl PullFacts {
    /// None of an imported pull.
    pub fn window(&self) -> Option<Window> {
        Some(Window { earliest_on: self.earliest_on?, latest_on: self.latest_on? })
    }
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
    /// It is followed unopened.
    NeverOpened,
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
    #[error(
        "“{typed}” is followed unopened through all ages. Nothing was recorded. Put it back and take another one."
    )]
    ContainerNeverOpened { place: usize, typed: String },
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
    #[error("No pull is chosen. Tick at least one.")]
    NoPullChosen,
}

impl NamedReason for PullRefusal {
    fn field(&self) -> Option<String> {
        use PullRefusal::*;
        match self {
            WrongLabel { place, .. }
            | LabelOfOther { place, .. }
            | ContainerHasLeft { place, .. }
            | ContainerNeverOpened { place, .. }
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

    fn is_noted(&self) -> bool {
        matches!(self, PullRefusal::WrongLabel { .. } | PullRefusal::LabelOfOther { .. })
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
            Found::NeverOpened => return Err(PullRefusal::ContainerNeverOpened { place, typed }),
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

/// Giving pulls to a person begins with choosing one.
pub fn may_assign_several(chosen: usize) -> Result<(), PullRefusal> {
    if chosen == 0 { Err(PullRefusal::NoPullChosen) } else { Ok(()) }
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
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    /// Due 1 Dec 2026, window 1 to 8 Dec.
    fn facts() -> PullFacts {
        PullFacts {
            started_on: Some(day("2026-06-01")),
            due_on: Some(day("2026-12-01")),
            earliest_on: Some(day("2026-12-01")),
            latest_on: Some(day("2026-12-08")),
            containers_needed: 2,
            ..PullFacts::default()
        }
    }

    fn taken(progress: Progress) -> PullFacts {
        PullFacts { event: Some(Event::Pulled), happened_on: Some(day("2026-12-02")), progress, ..facts() }
    }

    /// screen_U27, decision A17: one function says where a pull stands.
    #[test]
    fn the_status_of_a_pull_follows_its_facts() {
        let at = |started, complete, checked| Progress {
            tests: 3,
            started,
            complete,
            checked,
            ..Progress::default()
        };
        let signed = |progress| PullFacts { is_signed: true, ..taken(progress) };
        let out = Progress { out_of_specification: 1, ..at(3, 3, 2) };
        let back = Progress { sent_back: 1, ..out };
        let table = [
            (facts(), "2026-11-30", PullState::Planned, Status::NotStarted),
            (facts(), "2026-12-01", PullState::Due, Status::NotStarted),
            (facts(), "2026-12-20", PullState::Due, Status::NotStarted),
            (taken(at(0, 0, 0)), "2026-12-02", PullState::Pulled, Status::InProgress),
            (taken(at(1, 0, 0)), "2026-12-02", PullState::InTesting, Status::InProgress),
            (taken(at(3, 2, 2)), "2026-12-02", PullState::InTesting, Status::InProgress),
            (taken(at(3, 3, 2)), "2026-12-02", PullState::Complete, Status::WaitingForCheck),
            (taken(at(3, 3, 3)), "2026-12-02", PullState::Checked, Status::WaitingForReview),
            (taken(out), "2026-12-02", PullState::OutOfSpecification, Status::OutOfSpecification),
            (taken(back), "2026-12-02", PullState::SentBack, Status::SentBack),
            (signed(back), "2026-12-02", PullState::Signed, Status::Signed),
            (
                PullFacts { event: Some(Event::Missed), ..facts() },
                "2026-12-20",
                PullState::Missed,
                Status::Missed,
            ),
            (
                PullFacts { event: Some(Event::Cancelled), ..facts() },
                "2026-12-20",
                PullState::Cancelled,
                Status::Missed,
            ),
        ];
        for (facts, today, expected_state, expected_status) in table {
            assert_eq!(state(&facts, day(today)), expected_state, "{facts:?}");
            assert_eq!(status(&facts, day(today)), expected_status, "{facts:?}");
        }
    }

    #[test]
    fn side_facts_count_site_days() {
        let on = |date: &str| PullFacts { happened_on: Some(day(date)), ..taken(Progress::default()) };
        let table = [
            (facts(), "2026-12-08", ""),
            (facts(), "2026-12-09", "1 day late"),
            (facts(), "2026-12-10", "2 days late"),
            (on("2026-11-28"), "2026-12-30", "3 days early"),
            (on("2026-12-08"), "2026-12-30", ""),
            (on("2026-12-09"), "2026-12-30", "1 day late"),
        ];
        for (facts, today, words) in table {
            assert_eq!(side_fact(&facts, day(today)), words, "{facts:?}");
        }
    }

    fn scanned(found: &[Found]) -> Vec<Scanned> {
        found.iter().map(|found| Scanned { typed: "K7QD".to_string(), found: found.clone() }).collect()
    }

    fn take(found: &[Found], on: &str, why: &str) -> Take {
        Take { scanned: scanned(found), taken_on: day(on), why: why.to_string() }
    }

    /// screen_U68: a mismatch is a hard stop; req_C13: early, late and partial need a reason.
    #[test]
    fn a_pull_is_refused_for_its_first_fault() {
        let here = |container| Found::Here { container };
        let both = [here(1), here(2)];
        let why = "the chamber door failed";
        let typed = "K7QD".to_string();
        let last = PullFacts { is_last: true, ..facts() };
        use PullRefusal::*;
        let table = [
            (take(&both, "2026-12-01", ""), facts(), "2026-12-01", Ok(())),
            (take(&both, "2026-12-01", ""), taken(Progress::default()), "2026-12-01", Err(PullTaken)),
            (
                take(&[], "2026-12-01", ""),
                PullFacts { is_imported: true, event: Some(Event::Missed), ..facts() },
                "2026-12-01",
                Err(PullImported),
            ),
            (take(&[], "2026-12-02", ""), facts(), "2026-12-01", Err(TakenInFuture)),
            (take(&[], "2026-05-02", ""), facts(), "2026-12-01", Err(TakenBeforeTimeZero)),
            (take(&[], "2026-12-01", ""), facts(), "2026-12-01", Err(NoContainer)),
            (
                take(&[here(1), Found::Nowhere], "2026-12-01", why),
                facts(),
                "2026-12-01",
                Err(WrongLabel { place: 2, typed: typed.clone() }),
            ),
            (
                take(&[Found::Elsewhere("ST-032".to_string())], "2026-12-01", why),
                facts(),
                "2026-12-01",
                Err(LabelOfOther { place: 1, typed: typed.clone(), what: "ST-032".to_string() }),
            ),
            (
                take(&[Found::Left], "2026-12-01", why),
                facts(),
                "2026-12-01",
                Err(ContainerHasLeft { place: 1, typed: typed.clone() }),
            ),
            (
                take(&[here(1), here(1)], "2026-12-01", why),
                facts(),
                "2026-12-01",
                Err(ContainerScannedTwice { place: 2, typed }),
            ),
            (
                take(&both, "2026-11-30", ""),
                facts(),
                "2026-11-30",
                Err(EarlyWithoutReason("1 Dec 2026".to_string())),
            ),
            (take(&both, "2026-11-30", why), facts(), "2026-11-30", Ok(())),
            (
                take(&both, "2026-11-30", why),
                last,
                "2026-11-30",
                Err(LastPointEarly("1 Dec 2026".to_string())),
            ),
            (
                take(&both, "2026-12-09", ""),
                facts(),
                "2026-12-09",
                Err(LateWithoutReason("8 Dec 2026".to_string())),
            ),
            (take(&both, "2026-12-09", why), facts(), "2026-12-09", Ok(())),
            (
                take(&[here(1)], "2026-12-01", ""),
                facts(),
                "2026-12-01",
                Err(PartialWithoutReason { taken: 1, needed: 2 }),
            ),
            (take(&[here(1)], "2026-12-01", why), facts(), "2026-12-01", Ok(())),
            (take(&both, "2026-12-01", ""), facts(), "2026-12-02", Err(LateEntryWithoutReason)),
        ];
        for (take, facts, today, expected) in table {
            assert_eq!(may_take(&take, &facts, day(today)), expected, "{take:?}");
        }
    }

    #[test]
    fn missing_assigning_and_taking_more_have_their_rules() {
        use PullRefusal::*;
        assert_eq!(may_miss(&facts(), day("2026-11-30")), Err(NotYetDue("1 Dec 2026".to_string())));
        assert_eq!(may_miss(&facts(), day("2026-12-01")), Ok(()));
        assert_eq!(may_miss(&taken(Progress::default()), day("2026-12-20")), Err(PullTaken));
        assert_eq!(may_assign(&facts(), true), Ok(()));
        assert_eq!(may_assign(&taken(Progress::default()), true), Ok(()));
        assert_eq!(may_assign(&facts(), false), Err(NotAtBench));
        let cancelled = PullFacts { event: Some(Event::Cancelled), ..facts() };
        assert_eq!(may_assign(&cancelled, true), Err(PullCancelled));
        let more = take(&[Found::Here { container: 1 }], "2026-12-03", "");
        assert_eq!(may_take_more(&more, &facts()), Err(PullNotTaken));
        assert_eq!(may_take_more(&more, &taken(Progress::default())), Err(RePullWithoutReason));
        let signed = PullFacts { is_signed: true, ..taken(Progress::default()) };
        assert_eq!(may_take_more(&more, &signed), Err(PullSigned));
    }
}
