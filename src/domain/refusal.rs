//! A rule said no: a named reason and one sentence a person can act on.

/// The reasons of one noun. Each noun has its own small enum; its `Display` is the sentence.
pub trait NamedReason: std::error::Error {
    /// The form field the reason belongs to, if it belongs to one.
    fn field(&self) -> Option<String> {
        None
    }
}

/// One refusal, whichever noun it came from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    /// The reason's name, as in `PullClosed`.
    pub name: String,
    pub sentence: String,
    pub field: Option<String>,
}

impl<R: NamedReason> From<R> for Refusal {
    fn from(reason: R) -> Refusal {
        let shown = format!("{reason:?}");
        let end = shown.find(|c: char| !c.is_alphanumeric()).unwrap_or(shown.len());
        Refusal { name: shown[..end].to_string(), sentence: reason.to_string(), field: reason.field() }
    }
}
