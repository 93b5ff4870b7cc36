//! A protocol version: which arms a study has, at which ages, with which tests.

pub mod cost;
pub mod generator;
pub mod preset;
pub mod rules;

use rust_decimal::Decimal;
use serde::{Deserialize, Serialize};

use super::age::Age;
use super::refusal::NamedReason;

/// The content of a protocol version.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct ProtocolContent {
    pub programme: Programme,
    /// The protocol binds the specification version (decision A12).
    pub specification_version: i64,
    pub arms: Vec<Arm>,
    /// The tests with the method version each is done by.
    pub tests: Vec<PlannedTest>,
    /// Containers kept beyond those the pulls need, per arm.
    pub spare_containers: u32,
    pub retain_containers: u32,
    /// Containers per arm that are never opened and followed through all ages (decision A3).
    #[serde(default, skip_serializing_if = "is_none")]
    pub follow_through_containers: u32,
    /// Why a 25 °C/60 % RH protocol has no contingent intermediate arm (decision A16).
    pub why_no_intermediate: Option<String>,
    /// For a routine study in one orientation: which was the worst and why (requirement C11).
    pub worst_orientation: Option<String>,
    /// Percent of good lots that may ever see a false trend action over the planned pulls of an arm; versions that
    /// fix none are judged at 1 % a pull.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub trend_promise_percent: Option<Decimal>,
}

/// Left out of the document, so that versions from before the field stay the same text.
fn is_none(count: &u32) -> bool {
    *count == 0
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Programme {
    Primary,
    Commitment,
    Ongoing,
    Development,
}

impl Programme {
    pub fn from_words(words: &str) -> Option<Programme> {
        Programme::ALL.into_iter().find(|programme| programme.words() == words)
    }

    pub const ALL: [Programme; 4] =
        [Programme::Primary, Programme::Commitment, Programme::Ongoing, Programme::Development];

    /// As stored in `study.programme`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Programme::Primary => "primary",
            Programme::Commitment => "commitment",
            Programme::Ongoing => "ongoing",
            Programme::Development => "development",
        }
    }
}

/// How a container stands in its chamber.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Orientation {
    Upright,
    Inverted,
    Horizontal,
}

impl Orientation {
    pub const ALL: [Orientation; 3] = [Orientation::Upright, Orientation::Inverted, Orientation::Horizontal];

    pub fn words(self) -> &'static str {
        match self {
            Orientation::Upright => "upright",
            Orientation::Inverted => "inverted",
            Orientation::Horizontal => "horizontal",
        }
    }

    pub fn from_words(words: &str) -> Option<Orientation> {
        Orientation::ALL.into_iter().find(|orientation| orientation.words() == words)
    }
}

/// What a result beyond a limit does on this arm (decision A7).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum LimitsDo {
    OutOfSpecification,
    SignificantChange,
    Information,
    InUse,
}

impl LimitsDo {
    pub const ALL: [LimitsDo; 4] =
        [LimitsDo::OutOfSpecification, LimitsDo::SignificantChange, LimitsDo::Information, LimitsDo::InUse];

    /// As stored in `study_arm.limits_do`.
    pub fn words(self) -> &'static str {
        match self {
            LimitsDo::OutOfSpecification => "OOS",
            LimitsDo::SignificantChange => "significant-change rules",
            LimitsDo::Information => "information",
            LimitsDo::InUse => "in-use limits",
        }
    }

    pub fn from_words(words: &str) -> Option<LimitsDo> {
        LimitsDo::ALL.into_iter().find(|limits_do| limits_do.words() == words)
    }
}

/// One arm: a condition in one orientation, with its ages.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Arm {
    pub condition: i64,
    pub orientation: Orientation,
    pub limits_do: LimitsDo,
    /// The labelled storage condition: its results count for the label's expiry.
    pub is_labelled_condition: bool,
    /// Placed at time zero, tested only when triggered (decision A16).
    pub is_contingent: bool,
    pub ages: Vec<PlannedAge>,
}

/// One age of an arm with the tests done then.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct PlannedAge {
    pub age: Age,
    /// Test codes, in bench order.
    pub tests: Vec<String>,
    /// Days before and after the due date; `None` takes the site's default for the age (decision A11).
    pub window: Option<(u32, u32)>,
}

/// A test of the protocol and the method version it is done by.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct PlannedTest {
    pub test: String,
    pub title: String,
    pub method_version: i64,
    /// Done for information: the bound specification has no limit for it.
    #[serde(default)]
    pub is_information: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ProtocolCodeRefusal {
    #[error("There is a protocol {0} already. A code is never used twice.")]
    ProtocolCodeTaken(String),
}

impl NamedReason for ProtocolCodeRefusal {
    fn field(&self) -> Option<String> {
        Some("code".to_string())
    }
}
