//! Blank sheets for a network failure: numbered, given to a person, and accounted for one by one.

use super::refusal::NamedReason;

/// What happens to a sheet after it was issued.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SheetEventKind {
    Returned,
    Voided,
    Transcribed,
    Verified,
}

impl SheetEventKind {
    pub const ALL: [SheetEventKind; 4] = [
        SheetEventKind::Returned,
        SheetEventKind::Voided,
        SheetEventKind::Transcribed,
        SheetEventKind::Verified,
    ];

    /// As stored in `blank_sheet_event.kind`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            SheetEventKind::Returned => "returned",
            SheetEventKind::Voided => "voided",
            SheetEventKind::Transcribed => "transcribed",
            SheetEventKind::Verified => "verified",
        }
    }

    pub fn from_words(words: &str) -> Option<SheetEventKind> {
        SheetEventKind::ALL.into_iter().find(|kind| kind.words() == words)
    }
}

/// Where a sheet stands.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SheetFacts {
    pub number: i64,
    pub events: Vec<SheetEventKind>,
    /// Who transcribed it.
    pub transcriber: Option<i64>,
}

impl SheetFacts {
    fn has(&self, kind: SheetEventKind) -> bool {
        self.events.contains(&kind)
    }

    /// Nothing more is to be done with it.
    pub fn is_settled(&self) -> bool {
        self.has(SheetEventKind::Voided) || self.has(SheetEventKind::Verified)
    }

    pub fn state(&self) -> &'static str {
        match self.events.last() {
            None => "given out",
            Some(SheetEventKind::Returned) => "returned, to be transcribed",
            Some(SheetEventKind::Voided) => "voided",
            Some(SheetEventKind::Transcribed) => "transcribed, to be verified",
            Some(SheetEventKind::Verified) => "transcription verified",
        }
    }

    /// The events that can come next.
    pub fn next(&self) -> &'static [SheetEventKind] {
        match self.events.last() {
            None => &[SheetEventKind::Returned, SheetEventKind::Voided],
            Some(SheetEventKind::Returned) => &[SheetEventKind::Transcribed, SheetEventKind::Voided],
            Some(SheetEventKind::Transcribed) => &[SheetEventKind::Verified],
            Some(SheetEventKind::Voided | SheetEventKind::Verified) => &[],
        }
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum SheetRefusal {
    #[error("Say what the sheet is for in at least ten characters: which record, which step or test.")]
    PurposeMissing,
    #[error("{0} cannot take a sheet: the account is disabled.")]
    HolderDisabled(String),
    #[error("Sheet {number} is {state}. That cannot come next.")]
    SheetNotThere { number: i64, state: &'static str },
    #[error("Say in at least ten characters why it is voided, where it was entered, or what was compared.")]
    SheetTextMissing,
    #[error("You transcribed sheet {0} yourself. A second person compares it with what was entered.")]
    TranscriberVerifies(i64, i64),
}

impl NamedReason for SheetRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            SheetRefusal::PurposeMissing => "purpose",
            SheetRefusal::HolderDisabled(_) => "issued_to",
            SheetRefusal::SheetNotThere { .. } => "kind",
            SheetRefusal::SheetTextMissing => "text",
            SheetRefusal::TranscriberVerifies(..) => return None,
        };
        Some(name.to_string())
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            SheetRefusal::TranscriberVerifies(_, account) => Some(vec![*account]),
            _ => None,
        }
    }
}

/// Refuses in this order: the purpose, a holder who is disabled.
pub fn may_issue(purpose: &str, holder: &str, is_enabled: bool) -> Result<(), SheetRefusal> {
    if purpose.trim().chars().count() < 10 {
        return Err(SheetRefusal::PurposeMissing);
    }
    if is_enabled { Ok(()) } else { Err(SheetRefusal::HolderDisabled(holder.to_string())) }
}

/// Refuses in this order: an event that cannot come next, own transcription, the text.
pub fn may_record(
    kind: SheetEventKind,
    text: &str,
    facts: &SheetFacts,
    account: i64,
) -> Result<(), SheetRefusal> {
    if !facts.next().contains(&kind) {
        return Err(SheetRefusal::SheetNotThere { number: facts.number, state: facts.state() });
    }
    if kind == SheetEventKind::Verified && facts.transcriber == Some(account) {
        return Err(SheetRefusal::TranscriberVerifies(facts.number, account));
    }
    if text.trim().chars().count() < 10 {
        return Err(SheetRefusal::SheetTextMissing);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use SheetEventKind::*;

    fn facts(events: &[SheetEventKind]) -> SheetFacts {
        let transcriber = events.contains(&Transcribed).then_some(4);
        SheetFacts { number: 12, events: events.to_vec(), transcriber }
    }

    #[test]
    fn a_sheet_goes_its_way_and_no_other() {
        let text = "compared line by line";
        let not_there = |state| Err(SheetRefusal::SheetNotThere { number: 12, state });
        let table = [
            (facts(&[]), Returned, 5, text, Ok(())),
            (facts(&[]), Voided, 5, text, Ok(())),
            (facts(&[]), Transcribed, 5, text, not_there("given out")),
            (facts(&[Returned]), Transcribed, 5, text, Ok(())),
            (facts(&[Returned]), Returned, 5, text, not_there("returned, to be transcribed")),
            (facts(&[Voided]), Returned, 5, text, not_there("voided")),
            (facts(&[Returned, Transcribed]), Verified, 5, text, Ok(())),
            (facts(&[Returned, Transcribed]), Voided, 5, text, not_there("transcribed, to be verified")),
            (facts(&[Returned, Transcribed]), Verified, 4, "", Err(SheetRefusal::TranscriberVerifies(12, 4))),
            (facts(&[Returned, Transcribed]), Verified, 5, "fine", Err(SheetRefusal::SheetTextMissing)),
        ];
        for (facts, kind, account, text, expected) in table {
            assert_eq!(may_record(kind, text, &facts, account), expected, "{facts:?} {kind:?}");
        }
        assert!(facts(&[Voided]).is_settled() && facts(&[Returned, Transcribed, Verified]).is_settled());
        assert!(!facts(&[Returned]).is_settled());
    }

    #[test]
    fn a_sheet_is_issued_for_a_purpose_to_a_person_who_works_here() {
        let table = [
            ("pH of pull 7, ST-011", true, Ok(())),
            ("pH", false, Err(SheetRefusal::PurposeMissing)),
            ("pH of pull 7, ST-011", false, Err(SheetRefusal::HolderDisabled("Rafe".to_string()))),
        ];
        for (purpose, is_enabled, expected) in table {
            assert_eq!(may_issue(purpose, "Rafe", is_enabled), expected, "{purpose}");
        }
    }
}
