//! The grids of a method form: grades of an appearance, inputs and components of a numeric test.

use super::super::field::{Entry, Field};
use super::super::form::{Form, Typed};
use super::super::rows::{self, all, decimal, filled, maybe_decimal, name, shown, whole};
use super::super::visit::Visit;
use crate::domain::method::{Attribute, Component, Formula, Grade, Input, Settings};

const GRADE_FIELDS: [&str; 5] = ["attribute", "title", "code", "word", "anchor"];
const AFTER_SHAKE: &str = "Graded after the label shake";
const INPUT_FIELDS: [&str; 5] = ["code", "label", "unit", "decimals", "example"];
const COMPONENT_FIELDS: [&str; 3] = ["code", "title", "threshold"];

fn cell(prefix: &str, row: usize, field: &str, label: &str, value: &str) -> Field {
    Field::new(&name(prefix, row, field), &format!("{label}, row {row}"), Entry::Text).value(value)
}

/// One row per grade; a row without an attribute belongs to the one above.
pub fn grades(visit: &Visit, form: Form, attributes: &[Attribute]) -> Form {
    let mut lines: Vec<[String; 6]> = Vec::new();
    for attribute in attributes {
        for (index, grade) in attribute.grades.iter().enumerate() {
            let (code, title) =
                if index == 0 { (attribute.code.as_str(), attribute.title.as_str()) } else { ("", "") };
            let shaken = if index == 0 && attribute.is_after_shake { "yes" } else { "" };
            lines.push([code, title, &grade.code, &grade.word, &grade.anchor, shaken].map(str::to_string));
        }
    }
    let count = rows::count(visit, "grade", lines.len(), 6);
    let row = |row: usize| {
        let line = lines.get(row - 1);
        let value = |index: usize| line.map_or("", |line: &[String; 6]| line[index].as_str());
        let shaken = Field { entry: Entry::Tick, ..cell("grade", row, "shaken", AFTER_SHAKE, value(5)) };
        vec![
            cell("grade", row, "attribute", "Attribute code", value(0)).width(12),
            cell("grade", row, "title", "Attribute", value(1)).width(20),
            shaken,
            cell("grade", row, "code", "Grade code", value(2)).width(8),
            cell("grade", row, "word", "Grade word", value(3)).width(20),
            cell("grade", row, "anchor", "Anchor sentence", value(4)),
        ]
    };
    form.heading(
        "Attributes and grades",
        "One row per grade, in order. Where the attribute is left empty the grade belongs to the row above. An \
         attribute ticked as graded after the label shake belongs to the second part of the test, which opens once \
         the container is redispersed and is judged by itself.",
    )
    .grid(
        "Grades",
        &["Attribute code", "Attribute", "After the shake", "Grade", "Word", "Sentence that anchors it"],
        (1..=count).map(row).collect(),
    )
}

pub fn read_grades(typed: &mut Typed<'_>) -> Option<Settings> {
    let count = rows::count(typed.visit, "grade", 0, 0);
    let mut attributes: Vec<Attribute> = Vec::new();
    let mut is_whole = true;
    for row in filled(typed, "grade", count, &GRADE_FIELDS) {
        let at = |field: &str| name("grade", row, field);
        if !typed.raw(&at("attribute")).is_empty() || attributes.is_empty() {
            let (code, title) = (typed.text(&at("attribute"), 40), typed.text(&at("title"), 60));
            is_whole &= code.is_some() && title.is_some();
            attributes.push(Attribute {
                code: code.unwrap_or_default(),
                title: title.unwrap_or_default(),
                is_after_shake: typed.tick(&at("shaken")),
                grades: Vec::new(),
            });
        }
        let (code, word) = (typed.text(&at("code"), 12), typed.text(&at("word"), 40));
        let anchor = typed.text(&at("anchor"), 200);
        match (code, word, anchor, attributes.last_mut()) {
            (Some(code), Some(word), Some(anchor), Some(attribute)) => {
                attribute.grades.push(Grade { code, word, anchor, photo: None });
            }
            _ => is_whole = false,
        }
    }
    is_whole.then_some(Settings::Appearance { attributes })
}

pub fn numeric(
    visit: &Visit,
    form: Form,
    inputs: &[Input],
    formula: Option<&Formula>,
    components: &[Component],
    has_total: bool,
) -> Form {
    let form = form
        .heading("Inputs and formula", "Leave both empty where the result itself is read.")
        .grid(
            "What is typed at the bench",
            &["Code", "Label", "Unit", "Decimals", "In the worked example"],
            input_rows(visit, inputs, formula),
        )
        .field(
            Field::new("formula", "Formula", Entry::Text)
                .value(formula.map_or("", |formula| formula.expression.as_str()))
                .hint("Codes, numbers, + − × ÷ and parentheses, such as found × 100 ÷ declared."),
        )
        .field(
            Field::new("example_result", "Result of the worked example", Entry::Decimal)
                .width(12)
                .value(formula.map(|formula| formula.example_result.to_string()).unwrap_or_default())
                .hint("Worked out by hand. The version can be signed once the formula gives this result."),
        );
    let has_total = if has_total { "yes" } else { "" };
    form.heading("Components", "For a result of several components, such as degradation products.")
        .grid(
            "Components",
            &["Code", "Name", "Named by its retention time", "Reporting threshold"],
            component_rows(visit, components),
        )
        .field(
            Field::new("has_total", "The total of the components is reported", Entry::Tick).value(has_total),
        )
}

fn input_rows(visit: &Visit, inputs: &[Input], formula: Option<&Formula>) -> Vec<Vec<Field>> {
    let count = rows::count(visit, "input", inputs.len(), 5);
    let example = |code: &str| {
        let known = formula?.example_inputs.iter().find(|(known, _)| known == code)?;
        Some(known.1.to_string())
    };
    let row = |row: usize| {
        let input = inputs.get(row - 1);
        let value = |of: fn(&Input) -> String| input.map(of).unwrap_or_default();
        let worked = input.and_then(|input| example(&input.code)).unwrap_or_default();
        vec![
            cell("input", row, "code", "Code", &value(|input| input.code.clone())).width(12),
            cell("input", row, "label", "Label", &value(|input| input.label.clone())).width(20),
            cell("input", row, "unit", "Unit", &value(|input| input.unit.clone())).width(8),
            Field {
                entry: Entry::Count,
                ..cell("input", row, "decimals", "Decimals", &value(|input| input.decimals.to_string()))
            }
            .width(4),
            Field { entry: Entry::Decimal, ..cell("input", row, "example", "Worked example", &worked) }
                .width(12),
        ]
    };
    (1..=count).map(row).collect()
}

fn component_rows(visit: &Visit, components: &[Component]) -> Vec<Vec<Field>> {
    let count = rows::count(visit, "component", components.len(), 5);
    let row = |row: usize| {
        let component = components.get(row - 1);
        let text = |of: fn(&Component) -> String| component.map(of).unwrap_or_default();
        let unspecified = component.is_some_and(|component| component.is_unspecified);
        let threshold = text(|component| shown(component.reporting_threshold));
        vec![
            cell("component", row, "code", "Code", &text(|component| component.code.clone())).width(12),
            cell("component", row, "title", "Name", &text(|component| component.title.clone())).width(20),
            Field {
                entry: Entry::Tick,
                ..cell("component", row, "unspecified", "Named by its relative retention time", "")
            }
            .value(if unspecified { "yes" } else { "" }),
            Field {
                entry: Entry::Decimal,
                ..cell("component", row, "threshold", "Reporting threshold", &threshold)
            }
            .width(8),
        ]
    };
    (1..=count).map(row).collect()
}

pub fn read_numeric(typed: &mut Typed<'_>) -> Option<Settings> {
    let inputs = read_inputs(typed);
    let formula = read_formula(typed);
    let components = read_components(typed);
    let has_total = typed.tick("has_total");
    Some(Settings::Numeric { inputs: inputs?, formula: formula?, components: components?, has_total })
}

fn read_inputs(typed: &mut Typed<'_>) -> Option<Vec<Input>> {
    let count = rows::count(typed.visit, "input", 0, 0);
    let mut read = Vec::new();
    for row in filled(typed, "input", count, &INPUT_FIELDS) {
        let at = |field: &str| name("input", row, field);
        let (code, label) = (typed.text(&at("code"), 40), typed.text(&at("label"), 60));
        let (unit, decimals) = (typed.maybe_text(&at("unit"), 20), whole(typed, &at("decimals"), 0, 9));
        let input = || {
            Some(Input { code: code?, label: label?, unit: unit?.unwrap_or_default(), decimals: decimals? })
        };
        read.push(input());
    }
    all(read)
}

/// The formula with its example; `Some(None)` where there is none.
fn read_formula(typed: &mut Typed<'_>) -> Option<Option<Formula>> {
    let expression = typed.maybe_text("formula", 500);
    let has_formula = expression.as_ref().is_some_and(Option::is_some);
    if !has_formula && !typed.raw("example_result").is_empty() {
        typed.fault("formula", "The worked example has a result and no formula. Write the formula.");
        return None;
    }
    if !has_formula {
        return expression.map(|_| None);
    }
    let example_result = decimal(typed, "example_result", "Result of the worked example");
    let count = rows::count(typed.visit, "input", 0, 0);
    let mut example = Vec::new();
    for row in filled(typed, "input", count, &INPUT_FIELDS) {
        let label = format!("Worked example, row {row}");
        let value = decimal(typed, &name("input", row, "example"), &label);
        let code = typed.raw(&name("input", row, "code"));
        example.push(value.map(|value| (code, value)));
    }
    let example_inputs = all(example);
    Some(Some(Formula {
        expression: expression??,
        example_inputs: example_inputs?,
        example_result: example_result?,
    }))
}

fn read_components(typed: &mut Typed<'_>) -> Option<Vec<Component>> {
    let count = rows::count(typed.visit, "component", 0, 0);
    let mut read = Vec::new();
    for row in filled(typed, "component", count, &COMPONENT_FIELDS) {
        let at = |field: &str| name("component", row, field);
        let (code, title) = (typed.text(&at("code"), 40), typed.text(&at("title"), 80));
        let label = format!("Reporting threshold, row {row}");
        let threshold = maybe_decimal(typed, &at("threshold"), &label);
        let is_unspecified = typed.tick(&at("unspecified"));
        let component = || {
            Some(Component { code: code?, title: title?, is_unspecified, reporting_threshold: threshold? })
        };
        read.push(component());
    }
    all(read)
}
