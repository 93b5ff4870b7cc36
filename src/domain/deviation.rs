//! Deviations: what went otherwise than planned, what it means, and who closed it.

use chrono::NaiveDate;

use super::refusal::NamedReason;

/// How much a deviation can touch the product (common practice: three classes).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum DeviationClass {
    Minor,
    Major,
    Critical,
}

impl DeviationClass {
    pub const ALL: [DeviationClass; 3] =
        [DeviationClass::Minor, DeviationClass::Major, DeviationClass::Critical];

    /// As stored in `deviation_entry.class`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            DeviationClass::Minor => "minor",
            DeviationClass::Major => "major",
            DeviationClass::Critical => "critical",
        }
    }

    pub fn from_words(words: &str) -> Option<DeviationClass> {
        DeviationClass::ALL.into_iter().find(|class| class.words() == words)
    }

    /// The sentence that anchors the class (common practice).
    pub fn anchor(self) -> &'static str {
        match self {
            DeviationClass::Minor => "Cannot touch the quality of the product.",
            DeviationClass::Major => "Could touch it; what is known must show that it did not.",
            DeviationClass::Critical => "Touches it, or puts a patient at risk.",
        }
    }
}

/// A deviation about to be opened.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewDeviation {
    /// A few words that name it in a list.
    pub title: String,
    pub described: String,
    pub occurred_on: NaiveDate,
    pub lot: Option<i64>,
    /// The step of the lot's batch record: its number where there is one, and its words.
    pub step: Option<(Option<i64>, String)>,
    pub material_lot: Option<i64>,
    pub equipment: Option<i64>,
    pub study: Option<i64>,
}

/// The lines of the working record of a deviation.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum DeviationEntryKind {
    Classified,
    Cause,
    Action,
    OtherLotConsidered,
    OtherLotsAssessed,
    AddedToStability,
    NotAddedToStability,
    Continued,
    Closed,
}

impl DeviationEntryKind {
    pub const ALL: [DeviationEntryKind; 9] = [
        DeviationEntryKind::Classified,
        DeviationEntryKind::Cause,
        DeviationEntryKind::Action,
        DeviationEntryKind::OtherLotConsidered,
        DeviationEntryKind::OtherLotsAssessed,
        DeviationEntryKind::AddedToStability,
        DeviationEntryKind::NotAddedToStability,
        DeviationEntryKind::Continued,
        DeviationEntryKind::Closed,
    ];

    /// As stored in `deviation_entry.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            DeviationEntryKind::Classified => "classified",
            DeviationEntryKind::Cause => "cause",
            DeviationEntryKind::Action => "action",
            DeviationEntryKind::OtherLotConsidered => "other lot considered",
            DeviationEntryKind::OtherLotsAssessed => "other lots assessed",
            DeviationEntryKind::AddedToStability => "added to stability",
            DeviationEntryKind::NotAddedToStability => "not added to stability",
            DeviationEntryKind::Continued => "continued",
            DeviationEntryKind::Closed => "closed",
        }
    }

    pub fn from_words(words: &str) -> Option<DeviationEntryKind> {
        DeviationEntryKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// A line about to be written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewDeviationEntry {
    pub kind: DeviationEntryKind,
    pub class: Option<DeviationClass>,
    pub text: String,
    pub other_lot: Option<i64>,
    pub study: Option<i64>,
}

/// Where a deviation stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DeviationFacts {
    pub number: i64,
    pub lot: Option<i64>,
    pub class: Option<DeviationClass>,
    pub has_cause: bool,
    pub are_other_lots_assessed: bool,
    /// Whether “add this lot to stability?” has an answer.
    pub is_stability_answered: bool,
    pub is_continued: bool,
    pub is_closed: bool,
    /// The account that opened it.
    pub opened_by: i64,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum DeviationRefusal {
    #[error("Describe what happened in at least {SHORTEST_DESCRIPTION} characters: what, where, when.")]
    DescriptionTooShort,
    #[error("The day it happened lies ahead. Look at the date.")]
    OccursInFuture,
    #[error("Say what it concerns: a lot, a material lot or a piece of equipment.")]
    ConcernsNothing,
    #[error("Deviation {0} is closed. What comes up later opens a new one.")]
    DeviationClosed(i64),
    #[error("Choose the class: minor, major or critical.")]
    ClassMissing,
    #[error("Write at least ten characters; this line is kept.")]
    EntryTooShort,
    #[error("Name the lot that was considered.")]
    ConsideredLotMissing,
    #[error("That is the lot of this deviation. Name another one.")]
    ConsideredLotIsOwn,
    #[error("Deviation {0} concerns no lot, so there is none to add to stability.")]
    NoLotForStability(i64),
    #[error("Name the study the lot was added to.")]
    StudyMissing,
    #[error("That study is of another lot. Name a study of this one.")]
    StudyOfOtherLot,
    #[error("Deviation {0} is not classified yet. Choose minor, major or critical; then go on.")]
    NotClassified(i64),
    #[error("No cause is written yet in deviation {0}. Write it, or that none was found; then close it.")]
    CauseMissing(i64),
    #[error("Other lots are not assessed yet in deviation {0}. Write which were considered and the outcome.")]
    OtherLotsNotAssessed(i64),
    #[error("“Add this lot to stability?” has no answer yet in deviation {0}. Answer it; then close it.")]
    StabilityNotAnswered(i64),
    #[error("You opened deviation {0} yourself. Another QA reviewer decides on it.")]
    OwnDeviation(i64, i64),
    #[error("Work goes on under deviation {0} already.")]
    ContinuedAlready(i64),
}

/// The shortest description of what happened.
pub const SHORTEST_DESCRIPTION: usize = 20;

impl NamedReason for DeviationRefusal {
    fn field(&self) -> Option<String> {
        use DeviationRefusal::*;
        let name = match self {
            DescriptionTooShort => "described",
            OccursInFuture => "occurred_on",
            ConcernsNothing => "lot",
            ClassMissing => "class",
            EntryTooShort => "text",
            ConsideredLotMissing | ConsideredLotIsOwn => "other_lot",
            StudyMissing | StudyOfOtherLot => "study",
            _ => return None,
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            DeviationRefusal::OwnDeviation(_, account) => Some(vec![*account]),
            _ => None,
        }
    }
}

/// Refuses in this order: the description, a day to come, nothing it concerns.
pub fn may_open(new: &NewDeviation, today: NaiveDate) -> Result<(), DeviationRefusal> {
    if new.described.trim().chars().count() < SHORTEST_DESCRIPTION {
        return Err(DeviationRefusal::DescriptionTooShort);
    }
    if new.occurred_on > today {
        return Err(DeviationRefusal::OccursInFuture);
    }
    if new.lot.is_none() && new.material_lot.is_none() && new.equipment.is_none() && new.study.is_none() {
        return Err(DeviationRefusal::ConcernsNothing);
    }
    Ok(())
}

/// Refuses in this order: closed, then by kind: the class, the other lot, the lot and the study of stability; last
/// the text. `study_lot` is the lot of the named study.
pub fn may_write(
    new: &NewDeviationEntry,
    facts: &DeviationFacts,
    study_lot: Option<i64>,
) -> Result<(), DeviationRefusal> {
    use DeviationEntryKind::*;
    if facts.is_closed {
        return Err(DeviationRefusal::DeviationClosed(facts.number));
    }
    let is_on_stability = matches!(new.kind, AddedToStability | NotAddedToStability);
    match new.kind {
        Classified if new.class.is_none() => return Err(DeviationRefusal::ClassMissing),
        OtherLotConsidered if new.other_lot.is_none() => return Err(DeviationRefusal::ConsideredLotMissing),
        OtherLotConsidered if new.other_lot == facts.lot => return Err(DeviationRefusal::ConsideredLotIsOwn),
        _ if is_on_stability && facts.lot.is_none() => {
            return Err(DeviationRefusal::NoLotForStability(facts.number));
        }
        AddedToStability if study_lot.is_none() => return Err(DeviationRefusal::StudyMissing),
        AddedToStability if study_lot != facts.lot => return Err(DeviationRefusal::StudyOfOtherLot),
        _ => {}
    }
    if new.text.trim().chars().count() < 10 {
        return Err(DeviationRefusal::EntryTooShort);
    }
    Ok(())
}

/// Whether QA may sign that work goes on under it. Refuses in this order: closed, continued already, not classified,
/// own deviation, the text.
pub fn may_continue(facts: &DeviationFacts, text: &str, account: i64) -> Result<(), DeviationRefusal> {
    if facts.is_closed {
        return Err(DeviationRefusal::DeviationClosed(facts.number));
    }
    if facts.is_continued {
        return Err(DeviationRefusal::ContinuedAlready(facts.number));
    }
    if facts.class.is_none() {
        return Err(DeviationRefusal::NotClassified(facts.number));
    }
    decided_by_another(facts, text, account)
}

/// Whether QA may close it. Refuses in this order: closed, not classified, no cause, other lots not assessed, stability
/// not answered (where it concerns a lot), own deviation, the text.
pub fn may_close(facts: &DeviationFacts, text: &str, account: i64) -> Result<(), DeviationRefusal> {
    let number = facts.number;
    if facts.is_closed {
        return Err(DeviationRefusal::DeviationClosed(number));
    }
    if facts.class.is_none() {
        return Err(DeviationRefusal::NotClassified(number));
    }
    if !facts.has_cause {
        return Err(DeviationRefusal::CauseMissing(number));
    }
    if !facts.are_other_lots_assessed {
        return Err(DeviationRefusal::OtherLotsNotAssessed(number));
    }
    if facts.lot.is_some() && !facts.is_stability_answered {
        return Err(DeviationRefusal::StabilityNotAnswered(number));
    }
    decided_by_another(facts, text, account)
}

fn decided_by_another(facts: &DeviationFacts, text: &str, account: i64) -> Result<(), DeviationRefusal> {
    if facts.opened_by == account {
        return Err(DeviationRefusal::OwnDeviation(facts.number, account));
    }
    if text.trim().chars().count() < 10 {
        return Err(DeviationRefusal::EntryTooShort);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use DeviationRefusal::*;

    fn complete() -> DeviationFacts {
        DeviationFacts {
            number: 3,
            lot: Some(640),
            class: Some(DeviationClass::Minor),
            has_cause: true,
            are_other_lots_assessed: true,
            is_stability_answered: true,
            is_continued: false,
            is_closed: false,
            opened_by: 4,
        }
    }

    #[test]
    fn closing_asks_for_everything_in_order_and_for_another_person() {
        let text = "the pump seal was changed";
        let table = [
            (complete(), 5, text, Ok(())),
            (DeviationFacts { is_closed: true, class: None, ..complete() }, 5, text, Err(DeviationClosed(3))),
            (DeviationFacts { class: None, has_cause: false, ..complete() }, 5, text, Err(NotClassified(3))),
            (DeviationFacts { has_cause: false, ..complete() }, 5, text, Err(CauseMissing(3))),
            (
                DeviationFacts { are_other_lots_assessed: false, is_stability_answered: false, ..complete() },
                5,
                text,
                Err(OtherLotsNotAssessed(3)),
            ),
            (
                DeviationFacts { is_stability_answered: false, ..complete() },
                4,
                text,
                Err(StabilityNotAnswered(3)),
            ),
            (DeviationFacts { is_stability_answered: false, lot: None, ..complete() }, 5, text, Ok(())),
            (complete(), 4, "fine", Err(OwnDeviation(3, 4))),
            (complete(), 5, "fine", Err(EntryTooShort)),
        ];
        for (facts, account, text, expected) in table {
            assert_eq!(may_close(&facts, text, account), expected, "{facts:?}");
        }
    }

    #[test]
    fn work_goes_on_once_by_another_person_when_the_class_is_known() {
        let text = "mixed again for ten minutes";
        let table = [
            (complete(), 5, Ok(())),
            (
                DeviationFacts { is_closed: true, is_continued: true, ..complete() },
                5,
                Err(DeviationClosed(3)),
            ),
            (DeviationFacts { is_continued: true, class: None, ..complete() }, 5, Err(ContinuedAlready(3))),
            (DeviationFacts { class: None, ..complete() }, 4, Err(NotClassified(3))),
            (complete(), 4, Err(OwnDeviation(3, 4))),
        ];
        for (facts, account, expected) in table {
            assert_eq!(may_continue(&facts, text, account), expected, "{facts:?}");
        }
    }

    #[test]
    fn a_line_is_refused_for_its_first_fault() {
        use DeviationEntryKind::*;
        let new = |kind| NewDeviationEntry {
            kind,
            class: None,
            text: "looked at the two lots before".to_string(),
            other_lot: None,
            study: None,
        };
        let lotless = || DeviationFacts { lot: None, ..complete() };
        let closed = || DeviationFacts { is_closed: true, ..complete() };
        let table = [
            (new(Cause), complete(), None, Ok(())),
            (new(Classified), closed(), None, Err(DeviationClosed(3))),
            (new(Classified), complete(), None, Err(ClassMissing)),
            (new(OtherLotConsidered), complete(), None, Err(ConsideredLotMissing)),
            (
                NewDeviationEntry { other_lot: Some(640), ..new(OtherLotConsidered) },
                complete(),
                None,
                Err(ConsideredLotIsOwn),
            ),
            (new(NotAddedToStability), lotless(), None, Err(NoLotForStability(3))),
            (new(AddedToStability), complete(), None, Err(StudyMissing)),
            (new(AddedToStability), complete(), Some(639), Err(StudyOfOtherLot)),
            (new(AddedToStability), complete(), Some(640), Ok(())),
            (NewDeviationEntry { text: "none".into(), ..new(Cause) }, complete(), None, Err(EntryTooShort)),
        ];
        for (new, facts, study_lot, expected) in table {
            assert_eq!(may_write(&new, &facts, study_lot), expected, "{new:?}");
        }
    }

    #[test]
    fn a_deviation_says_what_happened_when_and_to_what() {
        let today: NaiveDate = "2026-12-01".parse().unwrap();
        let new = NewDeviation {
            title: "Mixer stopped".to_string(),
            described: "The mixer stopped for ten minutes during hydration.".to_string(),
            occurred_on: today,
            lot: Some(640),
            step: None,
            material_lot: None,
            equipment: None,
            study: None,
        };
        let table = [
            (new.clone(), Ok(())),
            (NewDeviation { described: "stopped".to_string(), ..new.clone() }, Err(DescriptionTooShort)),
            (NewDeviation { occurred_on: "2026-12-02".parse().unwrap(), ..new.clone() }, Err(OccursInFuture)),
            (NewDeviation { lot: None, ..new }, Err(ConcernsNothing)),
        ];
        for (new, expected) in table {
            assert_eq!(may_open(&new, today), expected, "{new:?}");
        }
    }
}
