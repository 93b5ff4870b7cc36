//! Comparing a value with a limit, and how limits read.

use rust_decimal::Decimal;
use serde_json::json;

use super::{FlagLevel, NewFlag, Verdict, flag_kind};
use crate::domain::method::{Attribute, MethodContent, RoundTo, Rounding, Settings};
use crate::domain::protocol::LimitsDo;
use crate::domain::rounding::{rounded, to_decimals};
use crate::domain::specification::{Limit, LimitSet, Range, TestLimits, Way, range_words};

/// What is known of a value: exactly, or only a bound.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Known {
    Exactly(Decimal),
    Above(Decimal),
    Below(Decimal),
}

impl Known {
    pub fn number(self) -> Decimal {
        match self {
            Known::Exactly(value) | Known::Above(value) | Known::Below(value) => value,
        }
    }

    pub fn is_exact(self) -> bool {
        matches!(self, Known::Exactly(_))
    }

    /// The value with its sign of censoring, the number shown by `show`.
    pub fn shown(self, show: impl Fn(Decimal) -> Decimal) -> String {
        match self {
            Known::Exactly(value) => show(value).to_string(),
            Known::Above(value) => format!(">{value}"),
            Known::Below(value) => format!("<{value}"),
        }
    }
}

/// Where a value stands to a range. The limit that was crossed comes along.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Standing {
    Within,
    Above(Decimal),
    Below(Decimal),
    /// A censored value whose bound does not decide.
    Undecided,
}

/// What a sample's results are measured with.
pub(super) struct Yardstick<'a> {
    pub method: &'a MethodContent,
    pub limit: Option<&'a Limit>,
    pub way: Way,
    pub limits_do: Option<LimitsDo>,
}

impl<'a> Yardstick<'a> {
    pub fn new(
        method: &'a MethodContent,
        limits: Option<&'a TestLimits>,
        set: LimitSet,
        limits_do: Option<LimitsDo>,
    ) -> Yardstick<'a> {
        let limit = limits.map(|limits| limits.limit(set)).filter(|limit| **limit != Limit::None);
        Yardstick { method, limit, way: limits.map_or(Way::Rounding, |limits| limits.way), limits_do }
    }

    pub fn range(&self) -> Option<Range> {
        match self.limit {
            Some(Limit::Between { lower, upper }) => Some(Range { lower: *lower, upper: *upper }),
            _ => None,
        }
    }

    /// The number that is compared with this limit: rounded once to the limit's place, or as it is.
    pub fn compared(&self, value: Decimal, limit: Decimal) -> Decimal {
        match self.way {
            Way::Absolute => value,
            Way::Rounding => to_place_of(value, limit, self.method.rounding),
        }
    }

    pub fn standing(&self, known: Known, range: &Range) -> Standing {
        match known {
            Known::Exactly(value) => self.standing_of(value, range),
            Known::Above(bound) => match (range.upper, range.lower) {
                (Some(upper), _) if bound >= upper => Standing::Above(upper),
                (None, Some(lower)) if bound >= lower => Standing::Within,
                (None, None) => Standing::Within,
                _ => Standing::Undecided,
            },
            Known::Below(bound) => match (range.lower, range.upper) {
                (Some(lower), _) if bound <= lower => Standing::Below(lower),
                (None, Some(upper)) if bound <= upper => Standing::Within,
                (None, None) => Standing::Within,
                _ => Standing::Undecided,
            },
        }
    }

    fn standing_of(&self, value: Decimal, range: &Range) -> Standing {
        if let Some(upper) = range.upper.filter(|upper| self.compared(value, *upper) > *upper) {
            return Standing::Above(upper);
        }
        match range.lower.filter(|lower| self.compared(value, *lower) < *lower) {
            Some(lower) => Standing::Below(lower),
            None => Standing::Within,
        }
    }

    /// `7.62 pH units, above 7.50`; nothing for a value within.
    pub fn outside_words(&self, known: Known, standing: Standing) -> Option<String> {
        let (side, limit) = match standing {
            Standing::Above(limit) => ("above", limit),
            Standing::Below(limit) => ("below", limit),
            Standing::Within | Standing::Undecided => return None,
        };
        let value = with_unit(&known.shown(|value| self.compared(value, limit)), &self.method.unit);
        let note = if self.way == Way::Absolute { ", compared unrounded" } else { "" };
        Some(format!("{value}, {side} {limit}{note}"))
    }

    /// Verdict, kind and level of a value beyond its limit (decision A7).
    pub fn beyond(&self) -> (Verdict, &'static str, FlagLevel) {
        match self.limits_do {
            None | Some(LimitsDo::OutOfSpecification) => {
                (Verdict::OutOfSpecification, flag_kind::OUT_OF_SPECIFICATION, FlagLevel::Exception)
            }
            Some(LimitsDo::InUse) => {
                (Verdict::OutsideInUseLimit, flag_kind::IN_USE_LIMIT, FlagLevel::Exception)
            }
            Some(LimitsDo::SignificantChange) => {
                (Verdict::NotJudged, flag_kind::SIGNIFICANT_CHANGE, FlagLevel::Mark)
            }
            Some(LimitsDo::Information) => (Verdict::NotJudged, flag_kind::INFORMATION, FlagLevel::Context),
        }
    }

    /// The verdict on a value within its limits.
    pub fn within(&self) -> Verdict {
        match self.limits_do {
            None | Some(LimitsDo::OutOfSpecification | LimitsDo::InUse) => Verdict::Conforms,
            Some(LimitsDo::SignificantChange | LimitsDo::Information) => Verdict::NotJudged,
        }
    }

    /// The flag of a value beyond its limit; `words` says value, unit and limit.
    pub fn beyond_flag(&self, words: &str, numbers: serde_json::Value) -> NewFlag {
        let (_, kind, level) = self.beyond();
        let end = match kind {
            flag_kind::SIGNIFICANT_CHANGE => ": for the significant-change rules of this arm.",
            flag_kind::INFORMATION => ": the limit is information on this arm.",
            flag_kind::IN_USE_LIMIT => " (in-use limit).",
            _ => ".",
        };
        NewFlag { kind, level, sentence: format!("{words}{end}"), numbers }
    }

    /// A flag that is no verdict of its own, such as a single value outside: as loud as the arm's limits.
    pub fn side_flag(&self, kind: &'static str, sentence: String) -> NewFlag {
        NewFlag { kind, level: self.beyond().2, sentence, numbers: json!({ "way": way_words(self.way) }) }
    }
}

/// Rounded to the last place of the limit by the method's rule. A method that rounds to a step or to
/// significant figures keeps that rule where the limit itself is stated to it; else the limit's decimals
/// count, the stricter reading of a limit such as 1505.
fn to_place_of(value: Decimal, limit: Decimal, rounding: Rounding) -> Decimal {
    let keeps_own_rule = !matches!(rounding.to, RoundTo::Decimals(_))
        && limit.scale() == 0
        && rounded(limit, rounding) == limit;
    if keeps_own_rule {
        return rounded(value, rounding);
    }
    to_decimals(value, limit.scale(), rounding.halves)
}

/// `7.62 pH units`; a value without a unit stands alone.
pub fn with_unit(value: &str, unit: &str) -> String {
    if unit.is_empty() { value.to_string() } else { format!("{value} {unit}") }
}

pub fn way_words(way: Way) -> &'static str {
    match way {
        Way::Rounding => "rounded to the limit's last place, then compared",
        Way::Absolute => "compared unrounded",
    }
}

/// A limit as it reads beside a value: `6.00 to 7.50`, `at most 20`, `caking: none or slight`, `no limit`.
pub fn limit_words(limit: &Limit, method: Option<&MethodContent>) -> String {
    match limit {
        Limit::None => "no limit".to_string(),
        Limit::Between { lower, upper } => range_words(*lower, *upper),
        Limit::Grades(attributes) => {
            let known = match method.map(|method| &method.settings) {
                Some(Settings::Appearance { attributes }) => attributes.as_slice(),
                _ => &[],
            };
            let each = attributes.iter().map(|(code, grades)| grades_words(code, grades, known));
            each.collect::<Vec<_>>().join("; ")
        }
        Limit::Components(components) => {
            let each = components.iter().map(|(code, range)| {
                format!("{}: {}", component_title(code, method), range_words(range.lower, range.upper))
            });
            each.collect::<Vec<_>>().join("; ")
        }
    }
}

fn grades_words(code: &str, grades: &[String], known: &[Attribute]) -> String {
    let attribute = known.iter().find(|attribute| attribute.code == code);
    let title = attribute.map_or(code, |attribute| attribute.title.as_str());
    let words: Vec<&str> = grades
        .iter()
        .map(|grade| {
            let found = attribute.and_then(|found| found.grades.iter().find(|one| one.code == *grade));
            found.map_or(grade.as_str(), |found| found.word.as_str())
        })
        .collect();
    format!("{title}: {}", words.join(" or "))
}

/// The title of a component, also of `total` and of one named by its relative retention time.
pub fn component_title(code: &str, method: Option<&MethodContent>) -> String {
    let components = match method.map(|method| &method.settings) {
        Some(Settings::Numeric { components, .. }) => components.as_slice(),
        _ => &[],
    };
    if let Some(time) = code.strip_prefix("unspecified@") {
        return format!("Unspecified, relative retention time {time}");
    }
    match components.iter().find(|component| component.code == code) {
        Some(component) => component.title.clone(),
        None if code == "total" => "Total".to_string(),
        None => code.to_string(),
    }
}

/// A result with its limit, always together: `6.83 (6.00 to 7.50) pH units` (screen_U104).
pub fn result_words(shown: &str, unit: &str, limit: &str) -> String {
    with_unit(&format!("{shown} ({limit})"), unit)
}
