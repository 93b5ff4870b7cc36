//! What is an exception at review, what it asks, and whether it was answered.

use crate::domain::refusal::NamedReason;

/// A flag of the latest result version of a test, as stored.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct FoundFlag {
    pub id: i64,
    pub sample_test: i64,
    pub kind: String,
    /// `exception`, `mark` or `context`, as stored.
    pub level: String,
    pub sentence: String,
    /// Number of the investigation that stands over the flag's test, where one was opened.
    pub investigation: Option<i64>,
}

/// What the record itself shows, beside its flags.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct RecordFacts {
    /// Readings that supersede an earlier one.
    pub corrections: usize,
    /// The pull was taken outside its window: "taken 2 days after its window closed".
    pub outside_window: Option<String>,
    /// Readings taken after the days the method allows: "read 3 days after the last day to test".
    pub tested_late: Option<String>,
    /// Stages passed on without readings: "before disturbance lost: bottle 3 shaken".
    pub lost_stages: Vec<String>,
    /// Readings that could not be read.
    pub not_read: usize,
    /// Something changed after a signature under this sample: the act of that signature.
    pub changed_after_signature: Option<i64>,
}

/// How an exception is answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AnswerBy {
    /// Only "reading verified, investigation N open", or the test goes back (decision A7).
    Investigation,
    /// "Acceptable, because …".
    Acceptance,
}

/// One exception of a sample.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Exception {
    /// Names it among the answers: `flag 12`, `corrections 2`. Another correction is another exception.
    pub about: String,
    pub flag: Option<i64>,
    pub sample_test: Option<i64>,
    pub kind: String,
    pub sentence: String,
    pub by: AnswerBy,
    pub investigation: Option<i64>,
    pub is_action: bool,
    pub answer: Option<String>,
}

/// Flags at which only a verified reading and an open investigation, or sending back, answer.
const INVESTIGATED: [&str; 2] = ["out of specification", "in-use limit"];

impl FoundFlag {
    /// Everything but context is an exception: a person answers it.
    pub fn is_exception(&self) -> bool {
        self.level != "context"
    }
}

/// All exceptions of a sample: flags first, the gravest on top, then what the record shows. `answers` are
/// (about, answer), oldest first; the newest counts.
pub fn exceptions(flags: &[FoundFlag], record: &RecordFacts, answers: &[(String, String)]) -> Vec<Exception> {
    let mut found: Vec<Exception> = flags.iter().filter(|flag| flag.is_exception()).map(from_flag).collect();
    found.sort_by_key(|exception| (exception.by == AnswerBy::Acceptance, !exception.is_action));
    found.extend(from_record(record));
    for exception in &mut found {
        let answer = answers.iter().rev().find(|(about, _)| *about == exception.about);
        exception.answer = answer.map(|(_, answer)| answer.clone());
    }
    found
}

fn from_flag(flag: &FoundFlag) -> Exception {
    let is_investigated = INVESTIGATED.contains(&flag.kind.as_str());
    Exception {
        about: format!("flag {}", flag.id),
        flag: Some(flag.id),
        sample_test: Some(flag.sample_test),
        kind: flag.kind.clone(),
        sentence: flag.sentence.clone(),
        by: if is_investigated { AnswerBy::Investigation } else { AnswerBy::Acceptance },
        investigation: flag.investigation,
        is_action: flag.level == "exception",
        answer: None,
    }
}

fn from_record(record: &RecordFacts) -> Vec<Exception> {
    let mut found = Vec::new();
    let mut add = |about: String, kind: &str, sentence: String| {
        found.push(Exception {
            about,
            flag: None,
            sample_test: None,
            kind: kind.to_string(),
            sentence,
            by: AnswerBy::Acceptance,
            investigation: None,
            is_action: false,
            answer: None,
        });
    };
    if let Some(act) = record.changed_after_signature {
        let sentence = "Changed after signing.".to_string();
        add(format!("changed after signature {act}"), "changed after signing", sentence);
    }
    if let Some(words) = &record.outside_window {
        add("pull outside window".to_string(), "pull outside window", format!("The pull was {words}."));
    }
    if let Some(words) = &record.tested_late {
        add("tested late".to_string(), "tested late", format!("The pull was {words}."));
    }
    for (place, words) in record.lost_stages.iter().enumerate() {
        add(format!("lost stage {}", place + 1), "stage lost", format!("Stage {words}."));
    }
    if record.not_read > 0 {
        let words = counted(record.not_read, "value could not be read", "values could not be read");
        add(format!("not read {}", record.not_read), "not read", format!("{words}."));
    }
    if record.corrections > 0 {
        let words = counted(record.corrections, "correction", "corrections");
        add(format!("corrections {}", record.corrections), "corrections", format!("{words}."));
    }
    found
}

fn counted(count: usize, one: &str, many: &str) -> String {
    if count == 1 { format!("1 {one}") } else { format!("{count} {many}") }
}

/// What a reviewer says to an exception.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum NewAnswer {
    /// "Reading verified, investigation N open."
    ReadingVerified,
    /// "Acceptable, because …".
    Acceptable(String),
}

/// The shortest sentence that says why something is acceptable (screen_U75).
pub const SHORTEST_ANSWER: usize = 20;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum AnswerRefusal {
    #[error("This exception is not there any more. Look at the sample again.")]
    NoSuchException,
    #[error(
        "A result outside its limit is not found acceptable here: verify the reading, with its investigation \
         open, or send the test back."
    )]
    OnlyInvestigation,
    #[error("No investigation is open for this result. Send the test back, so that it is completed anew.")]
    NoInvestigationOpen,
    #[error(
        "Only a result outside its limit is answered by its investigation. Say why this one is acceptable."
    )]
    NotInvestigated,
    #[error("Say in at least {SHORTEST_ANSWER} characters why it is acceptable.")]
    AnswerTooShort,
}

impl NamedReason for AnswerRefusal {}

/// The answer as it is stored. Refuses in this order: no such exception, the wrong kind of answer, no
/// investigation, too short.
pub fn answered(found: Option<&Exception>, new: &NewAnswer) -> Result<String, AnswerRefusal> {
    let exception = found.ok_or(AnswerRefusal::NoSuchException)?;
    match (exception.by, new) {
        (AnswerBy::Investigation, NewAnswer::Acceptable(_)) => Err(AnswerRefusal::OnlyInvestigation),
        (AnswerBy::Acceptance, NewAnswer::ReadingVerified) => Err(AnswerRefusal::NotInvestigated),
        (AnswerBy::Investigation, NewAnswer::ReadingVerified) => {
            let number = exception.investigation.ok_or(AnswerRefusal::NoInvestigationOpen)?;
            Ok(format!("Reading verified, investigation {number} open."))
        }
        (AnswerBy::Acceptance, NewAnswer::Acceptable(why)) => {
            let why = why.trim();
            if why.chars().count() < SHORTEST_ANSWER {
                return Err(AnswerRefusal::AnswerTooShort);
            }
            Ok(format!("Acceptable, because {why}"))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn flag(kind: &str, level: &str, investigation: Option<i64>) -> FoundFlag {
        FoundFlag {
            id: 12,
            kind: kind.to_string(),
            level: level.to_string(),
            sentence: "7.62 pH units, above 7.50".to_string(),
            investigation,
            ..FoundFlag::default()
        }
    }

    #[test]
    fn flags_come_first_and_the_newest_answer_counts() {
        let flags = [
            flag("soft stop", "mark", None),
            flag("not evaluable", "context", None),
            flag("out of specification", "exception", Some(41)),
        ];
        let record = RecordFacts { corrections: 2, ..RecordFacts::default() };
        let answers = [
            ("corrections 1".to_string(), "old".to_string()),
            ("corrections 2".to_string(), "first".to_string()),
            ("corrections 2".to_string(), "second".to_string()),
        ];
        let found = exceptions(&flags, &record, &answers);
        let kinds: Vec<&str> = found.iter().map(|one| one.kind.as_str()).collect();
        assert_eq!(kinds, ["out of specification", "soft stop", "corrections"]);
        assert_eq!(found[2].answer.as_deref(), Some("second"));
        assert_eq!(found[0].answer, None);
    }

    #[test]
    fn an_answer_fits_its_exception_or_is_refused_by_name() {
        let outside = from_flag(&flag("out of specification", "exception", Some(41)));
        let without = from_flag(&flag("in-use limit", "exception", None));
        let soft = from_flag(&flag("soft stop", "mark", None));
        let because = || NewAnswer::Acceptable("the bottle was at room temperature".to_string());
        let short = NewAnswer::Acceptable("it is fine".to_string());
        let table = [
            (None, because(), Err(AnswerRefusal::NoSuchException)),
            (Some(&outside), because(), Err(AnswerRefusal::OnlyInvestigation)),
            (Some(&without), NewAnswer::ReadingVerified, Err(AnswerRefusal::NoInvestigationOpen)),
            (Some(&outside), NewAnswer::ReadingVerified, Ok("Reading verified, investigation 41 open.")),
            (Some(&soft), NewAnswer::ReadingVerified, Err(AnswerRefusal::NotInvestigated)),
            (Some(&soft), short, Err(AnswerRefusal::AnswerTooShort)),
            (Some(&soft), because(), Ok("Acceptable, because the bottle was at room temperature")),
        ];
        for (found, new, expected) in table {
            assert_eq!(answered(found, &new), expected.map(str::to_string), "{new:?}");
        }
    }

    #[test]
    fn everything_the_record_shows_is_named() {
        let record = RecordFacts {
            corrections: 1,
            outside_window: Some("taken 2 days after its window closed".to_string()),
            tested_late: Some("tested 3 days after the last day to test".to_string()),
            lost_stages: vec!["before disturbance lost: bottle shaken".to_string()],
            not_read: 1,
            changed_after_signature: Some(7),
        };
        assert_eq!(exceptions(&[], &record, &[]).len(), 6);
        assert!(exceptions(&[], &RecordFacts::default(), &[]).is_empty());
    }
}
