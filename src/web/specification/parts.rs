//! The grids of a specification form for tests with parts: grades of an appearance, components of a result.

use super::super::field::{Entry, Field};
use super::super::form::{Form, Typed};
use super::super::rows::{self, filled, name, shown};
use super::super::visit::Visit;
use super::form::{SETS, range};
use crate::domain::method::Settings;
use crate::domain::specification::{Limit, Range, SpecificationContent, TestLimits};
use crate::store::method::MethodVersion;

/// The limits of one test in the three sets, in the order of [`SETS`].
type ByTest = Vec<(String, [Limit; 3])>;

fn cell(prefix: &str, row: usize, field: &str, label: &str, value: &str) -> Field {
    Field::new(&name(prefix, row, field), &format!("{label}, row {row}"), Entry::Text).value(value)
}

fn limits(test: &TestLimits) -> [&Limit; 3] {
    [&test.release, &test.shelf_life, &test.in_use]
}

fn settings<'a>(test: &TestLimits, methods: &'a [MethodVersion]) -> Option<&'a Settings> {
    methods.iter().find(|version| version.method == test.method).map(|version| &version.content.settings)
}

/// Test, part and what the grid holds for it, for every part a test has or is limited in.
fn lines(
    content: &SpecificationContent,
    parts_of: &dyn Fn(&TestLimits) -> Vec<String>,
) -> Vec<(String, String)> {
    let of = |test: &TestLimits| {
        parts_of(test).into_iter().map(|part| (test.test.clone(), part)).collect::<Vec<_>>()
    };
    content.tests.iter().flat_map(of).collect()
}

/// One row per attribute of every appearance; grades are typed by their codes, with commas.
pub fn grades(visit: &Visit, form: Form, content: &SpecificationContent, methods: &[MethodVersion]) -> Form {
    let attributes = |test: &TestLimits| match settings(test, methods) {
        Some(Settings::Appearance { attributes }) => {
            attributes.iter().map(|attribute| attribute.code.clone()).collect()
        }
        _ => Vec::new(),
    };
    let lines = lines(content, &attributes);
    let count = rows::count(visit, "grade", lines.len(), 4);
    let row = |row: usize| {
        let (test, attribute) = lines.get(row - 1).cloned().unwrap_or_default();
        let mut fields = vec![
            cell("grade", row, "test", "Test code", &test).width(12),
            cell("grade", row, "part", "Attribute code", &attribute).width(12),
        ];
        let limited = content.tests.iter().find(|known| known.test == test).map(limits);
        for (index, (set, words)) in SETS.iter().enumerate() {
            let codes = match limited.map(|limited| limited[index]) {
                Some(Limit::Grades(known)) => known
                    .iter()
                    .find(|(code, _)| *code == attribute)
                    .map(|(_, grades)| grades.join(", "))
                    .unwrap_or_default(),
                _ => String::new(),
            };
            fields.push(cell("grade", row, set, &format!("Grades that conform, {words}"), &codes).width(12));
        }
        fields
    };
    form.heading("Grades that conform", &grade_note(methods)).grid(
        "Grades",
        &["Test code", "Attribute code", "At release", "Over the shelf life", "In use"],
        (1..=count).map(row).collect(),
    )
}

/// The attributes and grades of the approved appearance methods, so that codes need not be looked up.
fn grade_note(methods: &[MethodVersion]) -> String {
    let mut note = "For an appearance: grade codes with commas, such as 0, 1. Empty is no limit.".to_string();
    for method in methods {
        let Settings::Appearance { attributes } = &method.content.settings else { continue };
        let each = attributes.iter().map(|attribute| {
            let grades = attribute.grades.iter().map(|grade| format!("{} {}", grade.code, grade.word));
            format!("{} ({})", attribute.code, grades.collect::<Vec<_>>().join(", "))
        });
        note.push_str(&format!(" {}: {}.", method.code, each.collect::<Vec<_>>().join("; ")));
    }
    note
}

pub fn read_grades(typed: &mut Typed<'_>, codes: &[String]) -> Option<ByTest> {
    let count = rows::count(typed.visit, "grade", 0, 0);
    let mut found: ByTest = Vec::new();
    let mut is_whole = true;
    for row in filled(typed, "grade", count, &SETS.map(|(set, _)| set)) {
        let Some((test, part)) = part_of(typed, "grade", row, codes) else {
            is_whole = false;
            continue;
        };
        for (index, (set, _)) in SETS.iter().enumerate() {
            let text = typed.raw(&name("grade", row, set));
            let grades: Vec<String> = text
                .split([',', ';'])
                .map(|grade| grade.trim().to_string())
                .filter(|grade| !grade.is_empty())
                .collect();
            if grades.is_empty() {
                continue;
            }
            match &mut entry(&mut found, &test)[index] {
                Limit::Grades(known) => known.push((part.clone(), grades)),
                limit => *limit = Limit::Grades(vec![(part.clone(), grades)]),
            }
        }
    }
    is_whole.then_some(found)
}

/// Test and part code of a row; the test must stand in the first grid.
fn part_of(typed: &mut Typed<'_>, prefix: &str, row: usize, codes: &[String]) -> Option<(String, String)> {
    let at = name(prefix, row, "test");
    let (test, part) = (typed.text(&at, 40), typed.text(&name(prefix, row, "part"), 40));
    let (test, part) = (test?, part?);
    if !codes.contains(&test) {
        typed.fault(&at, format!("No test above has the code “{test}”. Write it as it stands there."));
        return None;
    }
    Some((test, part))
}

fn entry<'a>(found: &'a mut ByTest, test: &str) -> &'a mut [Limit; 3] {
    let at = match found.iter().position(|(known, _)| known == test) {
        Some(at) => at,
        None => {
            found.push((test.to_string(), [Limit::None, Limit::None, Limit::None]));
            found.len() - 1
        }
    };
    &mut found[at].1
}

/// One row per component of every test that has them, and its total.
pub fn components(
    visit: &Visit,
    form: Form,
    content: &SpecificationContent,
    methods: &[MethodVersion],
) -> Form {
    let parts = |test: &TestLimits| match settings(test, methods) {
        Some(Settings::Numeric { components, has_total, .. }) => {
            let named = components.iter().map(|component| component.code.clone());
            named.chain(has_total.then(|| "total".to_string())).collect()
        }
        _ => Vec::new(),
    };
    let lines = lines(content, &parts);
    let count = rows::count(visit, "component", lines.len(), 4);
    let row = |row: usize| {
        let (test, part) = lines.get(row - 1).cloned().unwrap_or_default();
        let mut fields = vec![
            cell("component", row, "test", "Test code", &test).width(12),
            cell("component", row, "part", "Component code", &part).width(12),
        ];
        let limited = content.tests.iter().find(|known| known.test == test).map(limits);
        for (index, (set, words)) in SETS.iter().enumerate() {
            let own = match limited.map(|limited| limited[index]) {
                Some(Limit::Components(known)) => {
                    known.iter().find(|(code, _)| *code == part).map(|(_, range)| range.clone())
                }
                _ => None,
            };
            let Range { lower, upper } = own.unwrap_or_default();
            for (end, value) in [("lower", lower), ("upper", upper)] {
                let label = format!("{end} limit, {words}");
                let field = cell("component", row, &format!("{set}_{end}"), &label, &shown(value));
                fields.push(Field { entry: Entry::Decimal, ..field }.width(8));
            }
        }
        fields
    };
    form.heading(
        "Components",
        "For results of several components: the code of the component, “unspecified” for each named by \
         its retention time, or “total”.",
    )
    .grid(
        "Components",
        &[
            "Test code",
            "Component",
            "Release from",
            "Release to",
            "Shelf life from",
            "Shelf life to",
            "In use from",
            "In use to",
        ],
        (1..=count).map(row).collect(),
    )
}

pub fn read_components(typed: &mut Typed<'_>, codes: &[String]) -> Option<ByTest> {
    let count = rows::count(typed.visit, "component", 0, 0);
    let fields: Vec<String> =
        SETS.iter().flat_map(|(set, _)| [format!("{set}_lower"), format!("{set}_upper")]).collect();
    let fields: Vec<&str> = fields.iter().map(String::as_str).collect();
    let mut found: ByTest = Vec::new();
    let mut is_whole = true;
    for row in filled(typed, "component", count, &fields) {
        let named = part_of(typed, "component", row, codes);
        for (index, (set, words)) in SETS.iter().enumerate() {
            let read = range(typed, &name("component", row, set), &format!("{words}, row {row}"));
            let (Some(read), Some((test, part))) = (read, &named) else {
                is_whole = false;
                continue;
            };
            if read == Range::default() {
                continue;
            }
            match &mut entry(&mut found, test)[index] {
                Limit::Components(known) => known.push((part.clone(), read)),
                limit => *limit = Limit::Components(vec![(part.clone(), read)]),
            }
        }
    }
    is_whole.then_some(found)
}
