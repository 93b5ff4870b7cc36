//! Why something was done: the words that go into the trail.

use super::refusal::NamedReason;

/// The reason of an act. Acts that need none carry an empty one.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Reason(Option<String>);

/// The shortest reason in words; a pick-list choice such as "mistyped" is enough by itself.
pub const SHORTEST_REASON: usize = 10;

/// The one-press reasons for a correction.
pub const PICKED: [&str; 3] = ["mistyped", "re-read", "wrong container"];

#[derive(Debug, thiserror::Error)]
pub enum ReasonRefusal {
    #[error("Say why in at least {SHORTEST_REASON} characters, or choose one of the listed reasons.")]
    ReasonTooShort,
}

impl NamedReason for ReasonRefusal {
    fn field(&self) -> Option<String> {
        Some("reason".to_string())
    }
}

impl Reason {
    pub fn none() -> Reason {
        Reason(None)
    }

    /// A reason the program itself states.
    pub fn stated(text: impl Into<String>) -> Reason {
        Reason(Some(text.into()))
    }

    /// A reason a person gave: one of the listed words, or at least ten characters.
    pub fn given(text: &str) -> Result<Reason, ReasonRefusal> {
        let text = text.trim();
        if PICKED.contains(&text) || text.chars().count() >= SHORTEST_REASON {
            return Ok(Reason(Some(text.to_string())));
        }
        Err(ReasonRefusal::ReasonTooShort)
    }

    pub fn text(&self) -> Option<&str> {
        self.0.as_deref()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_reason_is_a_listed_word_or_ten_characters() {
        for (text, good) in [("mistyped", true), ("  re-read ", true), ("oops", false), ("", false)] {
            assert_eq!(Reason::given(text).is_ok(), good, "{text}");
        }
        assert!(Reason::given("the label was smudged").is_ok());
    }
}
