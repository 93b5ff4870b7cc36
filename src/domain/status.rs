//! The nine status words. One enum renders all of them, on every page, in print and in exports.

/// Where a pull, a test or a result stands (decision A17).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Status {
    NotStarted,
    CannotStartYet,
    InProgress,
    WaitingForCheck,
    WaitingForReview,
    SentBack,
    Signed,
    OutOfSpecification,
    Missed,
}

impl Status {
    pub const ALL: [Status; 9] = [
        Status::NotStarted,
        Status::CannotStartYet,
        Status::InProgress,
        Status::WaitingForCheck,
        Status::WaitingForReview,
        Status::SentBack,
        Status::Signed,
        Status::OutOfSpecification,
        Status::Missed,
    ];

    pub fn words(self) -> &'static str {
        match self {
            Status::NotStarted => "Not started",
            Status::CannotStartYet => "Cannot start yet",
            Status::InProgress => "In progress",
            Status::WaitingForCheck => "Waiting for check",
            Status::WaitingForReview => "Waiting for review",
            Status::SentBack => "Sent back",
            Status::Signed => "Signed",
            Status::OutOfSpecification => "Out of specification",
            Status::Missed => "Missed",
        }
    }

    /// The word used in class names and symbol ids.
    pub fn slug(self) -> String {
        self.words().to_lowercase().replace(' ', "-")
    }
}
