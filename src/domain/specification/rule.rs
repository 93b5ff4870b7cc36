//! What a specification must be before it is written down, and what is only noted.

use rust_decimal::Decimal;

use super::{Limit, Range, SpecificationContent, TestLimits};
use crate::domain::method::{MethodContent, Settings};
use crate::domain::refusal::NamedReason;

/// Why a specification cannot be taken as it is. The first field of each is the row (from 1) of the test.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum SpecificationRefusal {
    #[error("The code {0} belongs to another specification already. Choose a code of its own.")]
    CodeTaken(String),
    #[error("This presentation has the specification {0}. Write a new version of that one.")]
    PresentationTaken(String),
    #[error("A specification has at least one test. Choose a method in the first row.")]
    TestsMissing,
    #[error(
        "The test code “{1}” stands twice. Each test is limited once; choose another code or take a row away."
    )]
    TestDoubled(usize, String),
    #[error("{title}: the method has no approved version yet. Approve it first.")]
    MethodNotApproved { row: usize, title: String },
    #[error("{title} is limited in {unit}, and its method reports {method_unit}. Use the method's unit.")]
    UnitDiffers { row: usize, title: String, unit: String, method_unit: String },
    #[error(
        "{title}: the lower {set} limit, {lower}, is above the upper one, {upper}. Exchange or correct them."
    )]
    LimitsCrossed { row: usize, title: String, set: &'static str, lower: Decimal, upper: Decimal },
    #[error("{title}: a limit of grades belongs to an appearance, numbers to a numeric test.")]
    LimitOfAnotherKind { row: usize, title: String },
    #[error("{title}: “{code}” is not known to its method. Correct the name.")]
    CodeUnknown { row: usize, title: String, code: String },
}

impl NamedReason for SpecificationRefusal {
    fn field(&self) -> Option<String> {
        match self {
            SpecificationRefusal::CodeTaken(_) => Some("code".to_string()),
            SpecificationRefusal::PresentationTaken(_) => Some("presentation".to_string()),
            SpecificationRefusal::TestsMissing => Some("test.1.method".to_string()),
            SpecificationRefusal::TestDoubled(row, _) => Some(format!("test.{row}.code")),
            SpecificationRefusal::MethodNotApproved { row, .. }
            | SpecificationRefusal::UnitDiffers { row, .. } => Some(format!("test.{row}.method")),
            SpecificationRefusal::LimitsCrossed { row, set, .. } => {
                Some(format!("test.{row}.{}_lower", set.replace('-', "_")))
            }
            SpecificationRefusal::LimitOfAnotherKind { .. } | SpecificationRefusal::CodeUnknown { .. } => {
                None
            }
        }
    }
}

/// The limit sets with their words, as forms and sentences name them.
fn sets(test: &TestLimits) -> [(&'static str, &Limit); 3] {
    [("release", &test.release), ("shelf-life", &test.shelf_life), ("in-use", &test.in_use)]
}

/// May this content be written?
///
/// `method_of` gives the newest approved content of a method. Refuses in this order: no test, a doubled
/// test; then row by row: no approved method, another unit, crossed limits, a limit of another kind, an
/// unknown code.
pub fn may_be_written<'a>(
    content: &SpecificationContent,
    method_of: &dyn Fn(i64) -> Option<&'a MethodContent>,
) -> Result<(), SpecificationRefusal> {
    if content.tests.is_empty() {
        return Err(SpecificationRefusal::TestsMissing);
    }
    for (index, test) in content.tests.iter().enumerate() {
        if content.tests[..index].iter().any(|earlier| earlier.test == test.test) {
            return Err(SpecificationRefusal::TestDoubled(index + 1, test.test.clone()));
        }
    }
    for (index, test) in content.tests.iter().enumerate() {
        let (row, title) = (index + 1, test.title.clone());
        let Some(method) = method_of(test.method) else {
            return Err(SpecificationRefusal::MethodNotApproved { row, title });
        };
        if method.unit != test.unit {
            let (unit, method_unit) = (test.unit.clone(), method.unit.clone());
            return Err(SpecificationRefusal::UnitDiffers { row, title, unit, method_unit });
        }
        for (set, limit) in sets(test) {
            limit_holds(row, &title, set, limit, method)?;
        }
    }
    Ok(())
}

fn limit_holds(
    row: usize,
    title: &str,
    set: &'static str,
    limit: &Limit,
    method: &MethodContent,
) -> Result<(), SpecificationRefusal> {
    let another_kind = || SpecificationRefusal::LimitOfAnotherKind { row, title: title.to_string() };
    let unknown = |code: &str| SpecificationRefusal::CodeUnknown {
        row,
        title: title.to_string(),
        code: code.to_string(),
    };
    match (limit, &method.settings) {
        (Limit::None, _) => Ok(()),
        (Limit::Grades(limited), Settings::Appearance { attributes }) => {
            for (code, grades) in limited {
                let attribute = attributes.iter().find(|attribute| attribute.code == *code);
                let attribute = attribute.ok_or_else(|| unknown(code))?;
                let is_known = |grade: &&String| attribute.grades.iter().any(|one| one.code == **grade);
                if let Some(grade) = grades.iter().find(|grade| !is_known(grade)) {
                    return Err(unknown(grade));
                }
            }
            Ok(())
        }
        (Limit::Components(limited), Settings::Numeric { components, has_total, .. })
            if !components.is_empty() =>
        {
            for (code, range) in limited {
                let is_known = components.iter().any(|component| component.code == *code);
                let is_total = *has_total && code == "total";
                if !is_known && !is_total {
                    return Err(unknown(code));
                }
                in_order(row, title, set, range.lower, range.upper)?;
            }
            Ok(())
        }
        (Limit::Between { .. }, Settings::Appearance { .. }) => Err(another_kind()),
        (Limit::Between { .. }, Settings::Numeric { components, .. }) if !components.is_empty() => {
            Err(another_kind())
        }
        (Limit::Between { lower, upper }, _) => in_order(row, title, set, *lower, *upper),
        (Limit::Grades(_) | Limit::Components(_), _) => Err(another_kind()),
    }
}

fn in_order(
    row: usize,
    title: &str,
    set: &'static str,
    lower: Option<Decimal>,
    upper: Option<Decimal>,
) -> Result<(), SpecificationRefusal> {
    match (lower, upper) {
        (Some(lower), Some(upper)) if lower > upper => {
            Err(SpecificationRefusal::LimitsCrossed { row, title: title.to_string(), set, lower, upper })
        }
        _ => Ok(()),
    }
}

/// What a reader should know, though it may be meant: release limits wider than the shelf-life limits, and
/// tests without any limit.
pub fn notes(content: &SpecificationContent) -> Vec<String> {
    content.tests.iter().filter_map(note).collect()
}

fn note(test: &TestLimits) -> Option<String> {
    if sets(test).iter().all(|(_, limit)| **limit == Limit::None) {
        return Some(format!("{} has no limit: its results are information.", test.title));
    }
    is_wider(&test.release, &test.shelf_life).then(|| {
        format!("{}: a release limit is wider than the shelf-life limit. Is that meant?", test.title)
    })
}

fn is_wider(release: &Limit, shelf_life: &Limit) -> bool {
    match (release, shelf_life) {
        (Limit::Between { lower, upper }, Limit::Between { lower: life_lower, upper: life_upper }) => {
            range_is_wider(
                &Range { lower: *lower, upper: *upper },
                &Range { lower: *life_lower, upper: *life_upper },
            )
        }
        (Limit::Components(release), Limit::Components(life)) => life.iter().any(|(code, life)| {
            release.iter().any(|(known, release)| known == code && range_is_wider(release, life))
        }),
        (Limit::Grades(release), Limit::Grades(life)) => life.iter().any(|(code, life)| {
            let own = release.iter().find(|(known, _)| known == code);
            own.is_some_and(|(_, grades)| grades.iter().any(|grade| !life.contains(grade)))
        }),
        _ => false,
    }
}

fn range_is_wider(release: &Range, life: &Range) -> bool {
    let below = life.lower.is_some_and(|life| release.lower.is_none_or(|release| release < life));
    let above = life.upper.is_some_and(|life| release.upper.is_none_or(|release| release > life));
    below || above
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::method::{TestKind, preset};
    use crate::domain::specification::Way;

    fn d(text: &str) -> Decimal {
        text.parse().unwrap()
    }

    fn between(lower: Option<&str>, upper: Option<&str>) -> Limit {
        Limit::Between { lower: lower.map(d), upper: upper.map(d) }
    }

    fn ph(release: Limit, shelf_life: Limit) -> TestLimits {
        TestLimits {
            test: "ph".to_string(),
            title: "pH".to_string(),
            method: 1,
            unit: "pH units".to_string(),
            release,
            shelf_life,
            in_use: Limit::None,
            way: Way::Rounding,
        }
    }

    fn check(tests: Vec<TestLimits>) -> Result<(), SpecificationRefusal> {
        let (ph, appearance) = (preset::of(TestKind::Ph), preset::of(TestKind::Appearance));
        let method_of = |id| match id {
            1 => Some(&ph),
            2 => Some(&appearance),
            _ => None,
        };
        may_be_written(&SpecificationContent { tests }, &method_of)
    }

    #[test]
    fn reasons_come_in_their_order() {
        let good = || ph(between(Some("6.20"), Some("7.20")), between(Some("6.00"), Some("7.50")));
        let name = |result: Result<(), SpecificationRefusal>| match result {
            Ok(()) => "accepted".to_string(),
            Err(refusal) => crate::domain::refusal::Refusal::from(refusal).name,
        };
        let grades = |attribute: &str, grade: &str| {
            Limit::Grades(vec![(attribute.to_string(), vec![grade.to_string()])])
        };
        let appearance = |limit| TestLimits {
            test: "appearance".to_string(),
            method: 2,
            unit: String::new(),
            ..ph(Limit::None, limit)
        };
        let table = [
            (vec![], "TestsMissing"),
            (vec![good(), good()], "TestDoubled"),
            (vec![TestLimits { method: 9, ..good() }], "MethodNotApproved"),
            (vec![TestLimits { unit: "%".to_string(), ..good() }], "UnitDiffers"),
            (vec![ph(Limit::None, between(Some("7.5"), Some("6.0")))], "LimitsCrossed"),
            (vec![ph(Limit::None, grades("caking", "0"))], "LimitOfAnotherKind"),
            (vec![appearance(between(None, Some("1")))], "LimitOfAnotherKind"),
            (vec![appearance(grades("smell", "0"))], "CodeUnknown"),
            (vec![appearance(grades("caking", "9"))], "CodeUnknown"),
            (vec![good(), appearance(grades("caking", "0"))], "accepted"),
            (vec![ph(Limit::None, between(Some("7.5"), Some("7.5")))], "accepted"),
        ];
        for (index, (tests, expected)) in table.into_iter().enumerate() {
            assert_eq!(name(check(tests)), expected, "case {index}");
        }
    }

    #[test]
    fn release_limits_wider_than_shelf_life_are_noted() {
        let life = || between(Some("6.00"), Some("7.50"));
        let table = [
            (between(Some("6.20"), Some("7.20")), 0),
            (between(Some("5.90"), Some("7.20")), 1),
            (between(Some("6.20"), None), 1),
            (Limit::None, 0),
        ];
        for (release, count) in table {
            let content = SpecificationContent { tests: vec![ph(release.clone(), life())] };
            assert_eq!(notes(&content).len(), count, "{release:?}");
        }
        let unlimited = SpecificationContent { tests: vec![ph(Limit::None, Limit::None)] };
        assert_eq!(notes(&unlimited), ["pH has no limit: its results are information."]);
    }
}
