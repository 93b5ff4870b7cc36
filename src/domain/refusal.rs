//! A rule said no: a named reason and one sentence a person can act on.

/// The reasons of one noun. Each noun has its own small enum; its `Display` is the sentence.
pub trait NamedReason: std::error::Error {
    /// The form field the reason belongs to, if it belongs to one.
    fn field(&self) -> Option<String> {
        None
    }

    /// Who took part in the work, where the reason is that nobody signs, checks or decides on own work. Such an
    /// attempt stays in the trail.
    fn took_part(&self) -> Option<Vec<i64>> {
        None
    }

    /// Whether the attempt stays in the trail although the form comes back, such as a wrong label at the bench.
    fn is_noted(&self) -> bool {
        false
    }
}

/// One refusal, whichever noun it came from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    /// The reason's name, as in `PullClosed`.
    pub name: String,
    pub sentence: String,
    pub field: Option<String>,
    /// The accounts that took part, where the reason is own work (screen_U76).
    pub took_part: Option<Vec<i64>>,
    /// The attempt stays in the trail.
    pub is_noted: bool,
}

impl<R: NamedReason> From<R> for Refusal {
    fn from(reason: R) -> Refusal {
        let shown = format!("{reason:?}");
        let end = shown.find(|c: char| !c.is_alphanumeric()).unwrap_or(shown.len());
        Refusal {
            name: shown[..end].to_string(),
            sentence: reason.to_string(),
            field: reason.field(),
            took_part: reason.took_part(),
            is_noted: reason.is_noted() || reason.took_part().is_some(),
        }
    }
}
