//! Containers on study: their labels, and the ledger of what became of each.

use super::digest::sha256;
use super::refusal::NamedReason;

/// Letters and digits that are not mistaken for each other.
const CODE_LETTERS: &[u8; 32] = b"23456789ABCDEFGHJKLMNPQRSTUVWXYZ";

/// What a container is kept for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Purpose {
    Pull,
    Spare,
    Retain,
    /// Never opened: weighed, measured and photographed at each age.
    FollowThrough,
}

impl Purpose {
    /// As stored in `container.purpose`.
    pub fn words(self) -> &'static str {
        match self {
            Purpose::Pull => "pull",
            Purpose::Spare => "spare",
            Purpose::Retain => "retain",
            Purpose::FollowThrough => "follow-through",
        }
    }
}

/// The label of a container: `ST-031-A07-K7QD`. The last four characters tell it apart by eye and by scan; they
/// depend on the study, so that another study's container shows itself.
pub fn label(study: &str, arm: usize, number: u32, taken: &[String]) -> String {
    let letter = char::from(b'A' + u8::try_from(arm % 26).unwrap_or(0));
    let mut salt = 0_u32;
    loop {
        let digest = sha256(format!("{study}/{arm}/{number}/{salt}").as_bytes());
        let code: String =
            digest.iter().take(4).map(|byte| char::from(CODE_LETTERS[usize::from(byte % 32)])).collect();
        if !taken.iter().any(|label| label.ends_with(&code)) {
            return format!("{study}-{letter}{number:02}-{code}");
        }
        salt += 1;
    }
}

/// What became of a container, in the words of the ledger (decision A3).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Event {
    Pulled,
    Broken,
    Leaked,
    Lost,
    Investigation,
    PartialPull,
    RePull,
    Destroyed,
}

impl Event {
    pub const ALL: [Event; 8] = [
        Event::Pulled,
        Event::Broken,
        Event::Leaked,
        Event::Lost,
        Event::Investigation,
        Event::PartialPull,
        Event::RePull,
        Event::Destroyed,
    ];
    /// What a person records by hand; the other events come with a pull.
    pub const BY_HAND: [Event; 5] =
        [Event::Broken, Event::Leaked, Event::Lost, Event::Investigation, Event::Destroyed];

    /// As stored in `container_event.kind`.
    pub fn words(self) -> &'static str {
        match self {
            Event::Pulled => "pulled",
            Event::Broken => "broken",
            Event::Leaked => "leaked",
            Event::Lost => "lost",
            Event::Investigation => "investigation",
            Event::PartialPull => "partial pull",
            Event::RePull => "re-pull",
            Event::Destroyed => "destroyed",
        }
    }

    pub fn from_words(words: &str) -> Option<Event> {
        Event::ALL.into_iter().find(|event| event.words() == words)
    }
}

/// What is known of a container when something becomes of it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct ContainerFacts {
    /// It left its chamber already.
    pub has_left: bool,
    pub is_destroyed: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ContainerRefusal {
    #[error("The container is destroyed. Nothing more can become of it.")]
    ContainerDestroyed,
    #[error("The container has left its chamber already. It can only be destroyed.")]
    ContainerHasLeft,
    #[error("A destruction needs a witness. Choose who saw it.")]
    WitnessMissing,
    #[error("The witness is another person than the one who destroys.")]
    WitnessIsActor,
    #[error("Say in a few words how it came about, at least ten characters.")]
    NoteMissing,
}

impl NamedReason for ContainerRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            ContainerRefusal::WitnessMissing | ContainerRefusal::WitnessIsActor => "witness",
            ContainerRefusal::NoteMissing => "note",
            _ => "kind",
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: destroyed, has left, witness missing, witness is the actor, note missing.
pub fn may_record(
    event: Event,
    facts: ContainerFacts,
    witness: Option<i64>,
    actor: i64,
    note: &str,
) -> Result<(), ContainerRefusal> {
    if facts.is_destroyed {
        return Err(ContainerRefusal::ContainerDestroyed);
    }
    if facts.has_left && event != Event::Destroyed {
        return Err(ContainerRefusal::ContainerHasLeft);
    }
    if event == Event::Destroyed {
        match witness {
            None => return Err(ContainerRefusal::WitnessMissing),
            Some(witness) if witness == actor => return Err(ContainerRefusal::WitnessIsActor),
            Some(_) => {}
        }
    }
    if note.trim().chars().count() < super::reason::SHORTEST_REASON {
        return Err(ContainerRefusal::NoteMissing);
    }
    Ok(())
}

/// The last four characters of what was scanned or typed, as labels are compared: capitals, no spaces.
pub fn code_of(text: &str) -> String {
    let plain: Vec<char> =
        text.chars().filter(|c| c.is_alphanumeric()).flat_map(char::to_uppercase).collect();
    plain[plain.len().saturating_sub(4)..].iter().collect()
}

/// Whether what was scanned (the whole label) or typed (its last four characters) names this label.
pub fn names_label(text: &str, label: &str) -> bool {
    let typed = text.chars().filter(|c| c.is_alphanumeric()).count();
    let is_short = typed == 4 && code_of(text) == code_of(label);
    is_short || text.trim().eq_ignore_ascii_case(label)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_of_a_study_differ_in_their_last_four_characters() {
        let mut taken: Vec<String> = Vec::new();
        for arm in 0..6 {
            for number in 1..=99 {
                let label = label("ST-031", arm, number, &taken);
                assert!(!taken.iter().any(|other| code_of(other) == code_of(&label)), "{label}");
                taken.push(label);
            }
        }
        assert!(taken[0].starts_with("ST-031-A01-") && taken[593].starts_with("ST-031-F99-"));
        assert_ne!(code_of(&label("ST-031", 0, 1, &[])), code_of(&label("ST-032", 0, 1, &[])));
    }

    /// screen_U68: the whole label or its last four characters, nothing else.
    #[test]
    fn a_label_is_named_by_scan_or_by_its_last_four_characters() {
        let label = "ST-031-A07-K7QD";
        for text in ["ST-031-A07-K7QD", " st-031-a07-k7qd ", "K7QD", "k7qd", " k7 qd"] {
            assert!(names_label(text, label), "{text}");
        }
        for text in ["", "7QD", "K7QE", "ST-032-A07-K7QD", "A07-K7QD", "D"] {
            assert!(!names_label(text, label), "{text}");
        }
    }

    #[test]
    fn a_container_leaves_once_and_is_destroyed_once_before_a_witness() {
        let (here, left) =
            (ContainerFacts::default(), ContainerFacts { has_left: true, is_destroyed: false });
        let gone = ContainerFacts { has_left: true, is_destroyed: true };
        let note = "fell from the shelf";
        let table = [
            (Event::Broken, here, None, note, Ok(())),
            (Event::Broken, here, None, "fell", Err(ContainerRefusal::NoteMissing)),
            (Event::Leaked, left, None, note, Err(ContainerRefusal::ContainerHasLeft)),
            (Event::Destroyed, left, None, note, Err(ContainerRefusal::WitnessMissing)),
            (Event::Destroyed, left, Some(1), note, Err(ContainerRefusal::WitnessIsActor)),
            (Event::Destroyed, left, Some(2), note, Ok(())),
            (Event::Destroyed, gone, Some(2), note, Err(ContainerRefusal::ContainerDestroyed)),
        ];
        for (event, facts, witness, note, expected) in table {
            assert_eq!(may_record(event, facts, witness, 1, note), expected, "{event:?} {facts:?}");
        }
    }
}
