//! From readings to a reportable value and its verdict.
//!
//! The order is fixed: what was read → single values → the reportable value as the method's rule makes it →
//! comparison with the limit → flags. Values stay exact throughout and are rounded once, for the comparison
//! and for showing; a shown value is never an input (decision A6). Limits are judged on first recorded
//! values too.

mod component;
mod gather;
mod grade;
pub mod limit;
pub mod spread;
mod value;

use rust_decimal::Decimal;

use super::method::{MethodContent, Settings};
use super::protocol::LimitsDo;
use super::specification::{LimitSet, TestLimits};

/// How a reading stands to what was read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Qualifier {
    Equal,
    /// More than the value: a censored count.
    Above,
    /// Less than the value: below a reporting limit.
    Below,
    Words,
    NotRead,
}

impl Qualifier {
    /// As stored in `reading.qualifier`.
    pub fn code(self) -> &'static str {
        match self {
            Qualifier::Equal => "=",
            Qualifier::Above => ">",
            Qualifier::Below => "<",
            Qualifier::Words => "words",
            Qualifier::NotRead => "not read",
        }
    }

    pub fn from_code(code: &str) -> Option<Qualifier> {
        [Qualifier::Equal, Qualifier::Above, Qualifier::Below, Qualifier::Words, Qualifier::NotRead]
            .into_iter()
            .find(|qualifier| qualifier.code() == code)
    }
}

/// A reading as it stands now, with the first recorded value where it was corrected since.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReadingValue {
    pub container: Option<i64>,
    /// Shown in sentences: "bottle 07".
    pub container_label: String,
    pub replicate: u32,
    pub field: String,
    pub typed: String,
    pub value: Option<Decimal>,
    pub qualifier: Qualifier,
    pub first_typed: Option<(String, Option<Decimal>)>,
}

/// How the reportable value stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ResultQualifier {
    Equal,
    Above,
    Below,
    Words,
    None,
}

impl ResultQualifier {
    /// As stored in `result.qualifier`.
    pub fn code(self) -> &'static str {
        match self {
            ResultQualifier::Equal => "=",
            ResultQualifier::Above => ">",
            ResultQualifier::Below => "<",
            ResultQualifier::Words => "words",
            ResultQualifier::None => "none",
        }
    }
}

/// What the limits say of a reportable value.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Verdict {
    Conforms,
    OutOfSpecification,
    /// Beyond a limit for the time of use: QA follows it up, it is no OOS (decision A7).
    OutsideInUseLimit,
    NoLimit,
    /// The readings do not agree well enough, or are missing: nothing may be reported from them.
    NoReportableValue,
    /// On this arm limits are information or serve the significant-change rules.
    NotJudged,
}

impl Verdict {
    pub const ALL: [Verdict; 6] = [
        Verdict::Conforms,
        Verdict::OutOfSpecification,
        Verdict::OutsideInUseLimit,
        Verdict::NoLimit,
        Verdict::NoReportableValue,
        Verdict::NotJudged,
    ];

    /// As stored in `result.verdict`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Verdict::Conforms => "conforms",
            Verdict::OutOfSpecification => "out of specification",
            Verdict::OutsideInUseLimit => "outside in-use limit",
            Verdict::NoLimit => "no limit",
            Verdict::NoReportableValue => "no reportable value",
            Verdict::NotJudged => "not judged",
        }
    }

    pub fn from_words(words: &str) -> Option<Verdict> {
        Verdict::ALL.into_iter().find(|verdict| verdict.words() == words)
    }
}

/// How loudly a flag speaks: exceptions come first at review and must be answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FlagLevel {
    Exception,
    Mark,
    Context,
}

impl FlagLevel {
    /// As stored in `flag.level`.
    pub fn code(self) -> &'static str {
        match self {
            FlagLevel::Exception => "exception",
            FlagLevel::Mark => "mark",
            FlagLevel::Context => "context",
        }
    }
}

/// The kinds of flag a judgement or the trend raises, as stored in `flag.kind`.
pub mod flag_kind {
    pub const OUT_OF_SPECIFICATION: &str = "out of specification";
    pub const IN_USE_LIMIT: &str = "in-use limit";
    pub const SIGNIFICANT_CHANGE: &str = "significant change";
    pub const INFORMATION: &str = "information";
    pub const SPREAD: &str = "spread";
    pub const NO_VALUE: &str = "no reportable value";
    pub const SINGLE_VALUE_OUTSIDE: &str = "single value outside";
    pub const FIRST_VALUE_OUTSIDE: &str = "first value outside";
    pub const HIGH_RATIO: &str = "high sedimentation ratio";
    pub const OUT_OF_TREND: &str = "out of trend";
    pub const NOT_EVALUABLE: &str = "not evaluable";
    pub const LOT_TREND: &str = "trend of the lot";
    pub const EARLY_WARNING: &str = "early warning";
}

/// A flag to be stored with its result.
#[derive(Clone, Debug, PartialEq)]
pub struct NewFlag {
    pub kind: &'static str,
    pub level: FlagLevel,
    pub sentence: String,
    pub numbers: serde_json::Value,
}

/// The judged result of one component; a single-value test has the component "".
#[derive(Clone, Debug, PartialEq)]
pub struct Judged {
    pub component: String,
    /// The unrounded exact value; for a censored one the bound.
    pub value: Option<Decimal>,
    pub qualifier: ResultQualifier,
    /// Rounded as the method says, or the words.
    pub shown: String,
    pub unit: String,
    pub verdict: Verdict,
    /// Single values, mean, spread, limit, way of comparing.
    pub detail: serde_json::Value,
    pub flags: Vec<NewFlag>,
}

impl Judged {
    /// The result goes to an investigation (decision A7).
    pub fn is_out_of_specification(&self) -> bool {
        self.verdict == Verdict::OutOfSpecification
    }
}

/// Judges the readings of one test.
///
/// `limits_do` is what a limit does on the sample's arm; `None` is a sample without an arm, where a limit
/// always means out of specification. One entry per component; a test without components gives exactly one.
pub fn judge(
    method: &MethodContent,
    limits: Option<&TestLimits>,
    set: LimitSet,
    limits_do: Option<LimitsDo>,
    readings: &[ReadingValue],
) -> Vec<Judged> {
    let yardstick = limit::Yardstick::new(method, limits, set, limits_do);
    match &method.settings {
        Settings::Appearance { .. } => grade::judge(&yardstick, readings),
        Settings::Numeric { components, has_total, .. } if !components.is_empty() => {
            component::judge(&yardstick, components, *has_total, readings)
        }
        _ => {
            let range = yardstick.range();
            let gathered = gather::singles(method, readings);
            vec![value::judge(&yardstick, &value::Subject::whole(), range, gathered)]
        }
    }
}

#[cfg(test)]
mod tests;
