//! The form of a specification version: a row per test, then grades and components where a test has them.

use super::super::field::{Entry, Field};
use super::super::form::{Form, Typed};
use super::super::rows::{self, all, filled, maybe_decimal, name, shown};
use super::super::visit::Visit;
use super::parts;
use crate::domain::failure::Failure;
use crate::domain::specification::{Limit, Range, SpecificationContent, TestLimits, Way};
use crate::store::method::MethodVersion;

/// The three limit sets: the end of the field names, and the words.
pub const SETS: [(&str, &str); 3] =
    [("release", "release"), ("shelf_life", "shelf life"), ("in_use", "in use")];

const ROW_FIELDS: [&str; 9] = [
    "method",
    "code",
    "title",
    "release_lower",
    "release_upper",
    "shelf_life_lower",
    "shelf_life_upper",
    "in_use_lower",
    "in_use_upper",
];

const WAYS: [(&str, &str); 2] =
    [("rounding", "rounded to the limit's last place"), ("absolute", "unrounded")];

/// What was typed, with the grid rows the tests came from.
pub struct Read {
    pub content: SpecificationContent,
    rows: Vec<usize>,
}

impl Read {
    /// A refusal names the test by its place among the filled rows; the form has it at its own row.
    pub fn at_its_row(&self, failure: Failure) -> Failure {
        let Failure::Refused(mut refusal) = failure else { return failure };
        let moved = refusal.field.as_deref().and_then(|field| {
            let (row, rest) = field.strip_prefix("test.")?.split_once('.')?;
            let place: usize = row.parse().ok()?;
            Some(name("test", *self.rows.get(place.checked_sub(1)?)?, rest))
        });
        if moved.is_some() {
            refusal.field = moved;
        }
        Failure::Refused(refusal)
    }
}

pub fn identity(form: Form, presentations: Vec<(i64, String)>, chosen: &str) -> Form {
    let choices = presentations.into_iter().map(|(id, words)| (id.to_string(), words));
    form.field(Field::new("presentation", "Presentation", Entry::Select).choices(choices).value(chosen))
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Such as S-104. Never used twice."))
}

pub fn reason(form: Form, value: &str) -> Form {
    form.field(
        Field::new("reason", "Why this version", Entry::Text)
            .hint("It stands in the history and under the signatures.")
            .value(value),
    )
}

pub fn content(visit: &Visit, form: Form, content: &SpecificationContent, methods: &[MethodVersion]) -> Form {
    let count = rows::count(visit, "test", content.tests.len(), 4);
    let lines = (1..=count).map(|row| line(row, content.tests.get(row - 1), methods)).collect();
    let form = form
        .heading(
            "Tests and their limits",
            "A row per test. An empty end of a limit is open; both empty is no limit. The unit is the \
             method's.",
        )
        .grid(
            "Tests",
            &[
                "Method",
                "Test code",
                "Title",
                "Release from",
                "Release to",
                "Shelf life from",
                "Shelf life to",
                "In use from",
                "In use to",
                "Compared",
            ],
            lines,
        );
    let form = parts::grades(visit, form, content, methods);
    parts::components(visit, form, content, methods)
}

fn line(row: usize, test: Option<&TestLimits>, methods: &[MethodVersion]) -> Vec<Field> {
    let text = |field: &str, label: &str, value: String| {
        Field::new(&name("test", row, field), &format!("{label}, row {row}"), Entry::Text).value(value)
    };
    let mut known: Vec<(String, String)> = Vec::new();
    for method in methods {
        let id = method.method.to_string();
        if !known.iter().any(|(seen, _)| *seen == id) {
            known.push((id, format!("{} {}", method.code, method.name)));
        }
    }
    let method = test.map(|test| test.method.to_string()).unwrap_or_default();
    let way = if test.is_some_and(|test| test.way == Way::Absolute) { "absolute" } else { "rounding" };
    let mut fields = vec![
        Field { entry: Entry::Select, ..text("method", "Method", method) }.choices(known),
        text("code", "Test code", test.map(|test| test.test.clone()).unwrap_or_default()).width(12),
        text("title", "Title", test.map(|test| test.title.clone()).unwrap_or_default()).width(20),
    ];
    let limits = test.map(|test| [&test.release, &test.shelf_life, &test.in_use]);
    for (index, (set, words)) in SETS.iter().enumerate() {
        let (lower, upper) = match limits.map(|limits| limits[index]) {
            Some(Limit::Between { lower, upper }) => (shown(*lower), shown(*upper)),
            _ => (String::new(), String::new()),
        };
        for (end, value) in [("lower", lower), ("upper", upper)] {
            let label = format!("{end} limit, {words}");
            let field = text(&format!("{set}_{end}"), &label, value);
            fields.push(Field { entry: Entry::Decimal, ..field }.width(8));
        }
    }
    fields.push(Field { entry: Entry::Select, ..text("way", "Compared", way.to_string()) }.choices(WAYS));
    fields
}

/// Reads the whole content; every fault stands at its field.
pub fn read(typed: &mut Typed<'_>, methods: &[MethodVersion]) -> Option<Read> {
    let count = rows::count(typed.visit, "test", 0, 0);
    let found = filled(typed, "test", count, &ROW_FIELDS);
    let tests = found.iter().map(|row| test(typed, *row, methods)).collect();
    let codes: Vec<String> = found.iter().map(|row| typed.raw(&name("test", *row, "code"))).collect();
    let grades = parts::read_grades(typed, &codes);
    let components = parts::read_components(typed, &codes);
    let mut content = SpecificationContent { tests: all(tests)? };
    for (code, limits) in grades?.into_iter().chain(components?) {
        if let Some(test) = content.tests.iter_mut().find(|test| test.test == code) {
            let [release, shelf_life, in_use] = limits;
            test.release = either(release, &test.release);
            test.shelf_life = either(shelf_life, &test.shelf_life);
            test.in_use = either(in_use, &test.in_use);
        }
    }
    Some(Read { content, rows: found })
}

fn either(part: Limit, own: &Limit) -> Limit {
    if part == Limit::None { own.clone() } else { part }
}

fn test(typed: &mut Typed<'_>, row: usize, methods: &[MethodVersion]) -> Option<TestLimits> {
    let at = |field: &str| name("test", row, field);
    let method = typed.record(&at("method"));
    let (code, title) = (typed.text(&at("code"), 40), typed.text(&at("title"), 80));
    let [release, shelf_life, in_use] =
        SETS.map(|(set, words)| range(typed, &at(set), &format!("{words}, row {row}")).map(between));
    let way = typed.choice(&at("way"));
    let method = method?;
    let unit = methods.iter().find(|known| known.method == method).map(|known| known.content.unit.clone());
    Some(TestLimits {
        test: code?.to_lowercase().replace(' ', "-"),
        title: title?,
        method,
        unit: unit?,
        release: release?,
        shelf_life: shelf_life?,
        in_use: in_use?,
        way: if way? == "absolute" { Way::Absolute } else { Way::Rounding },
    })
}

/// `<start>_lower` and `<start>_upper`.
pub fn range(typed: &mut Typed<'_>, start: &str, words: &str) -> Option<Range> {
    let lower = maybe_decimal(typed, &format!("{start}_lower"), &format!("Lower limit, {words}"));
    let upper = maybe_decimal(typed, &format!("{start}_upper"), &format!("Upper limit, {words}"));
    Some(Range { lower: lower?, upper: upper? })
}

fn between(range: Range) -> Limit {
    if range == Range::default() {
        return Limit::None;
    }
    Limit::Between { lower: range.lower, upper: range.upper }
}
