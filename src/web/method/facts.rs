//! How the content of a method version reads.

use super::super::record::Record;
use super::super::show;
use super::super::table::{Cell, Table};
use crate::domain::formula::example_reproduces;
use crate::domain::method::{
    Attribute, Component, Formula, Grade, Input, Level, MethodContent, Reportable, Settings,
};
use crate::domain::rounding;
use crate::domain::stage::part_words;
use crate::domain::version::VersionState;
use crate::store::attachment::Attachment;
use crate::store::version::Version;

/// The state of a version as a sentence without its full stop.
pub fn state_words(version: &Version) -> String {
    match version.state {
        VersionState::Draft => "A draft: nothing can rest on it yet".to_string(),
        VersionState::SignedByAuthor => "Signed by its author, waiting for a second person".to_string(),
        VersionState::Approved => "Approved".to_string(),
        VersionState::Imported => "Imported, not approved here".to_string(),
    }
}

pub fn sign_note(version: &Version) -> &'static str {
    match version.state {
        VersionState::Draft => "Signing freezes this version. A second person approves it then.",
        _ => "The author of a version cannot approve it.",
    }
}

/// `photos`: the files of the method, among them the reference photographs of its grades.
pub fn show(page: Record, content: &MethodContent, photos: &[Attachment]) -> Record {
    let page = page.more_facts("How it is done", done(content));
    let page = page.more_facts("What is reported", reported(content));
    match &content.settings {
        Settings::Appearance { attributes } => page.table("Grades", grade_table(content, attributes, photos)),
        Settings::Numeric { inputs, formula, components, has_total } => {
            let page = match formula {
                Some(formula) => page
                    .table("Formula", input_table(inputs, formula))
                    .sentences("", formula_words(content, inputs, formula)),
                None => page,
            };
            if components.is_empty() {
                return page;
            }
            page.table("Components", component_table(components, *has_total))
        }
        settings => page.more_facts("Settings", settings_facts(settings)),
    }
}

fn fact(name: &str, value: impl Into<String>) -> (String, String) {
    (name.to_string(), value.into())
}

fn yes(is_so: bool) -> &'static str {
    if is_so { "yes" } else { "no" }
}

fn done(content: &MethodContent) -> Vec<(String, String)> {
    let instruments = if content.instruments.is_empty() {
        "none named".to_string()
    } else {
        content.instruments.join(", ")
    };
    let volume =
        content.ml_needed.map_or("not stated".to_string(), |ml| show::with_unit(&ml.to_string(), "mL"));
    let second = content
        .second_reader_tolerance
        .map_or("no".to_string(), |within| format!("reads blind, agrees within {within}"));
    vec![
        fact("Stage", content.stage.words()),
        fact("Containers needed", content.containers_needed.to_string()),
        fact("Volume needed", volume),
        fact("Unopened container", yes(content.needs_unopened)),
        fact("Shared after", yes(content.may_share_after)),
        fact("Repeatable on the same container", yes(content.is_repeatable_on_container)),
        fact("Tested within", days(content.test_within_days)),
        fact("Hands-on time", format!("{} min", content.hands_on_minutes)),
        fact("Instruments", instruments),
        fact("Second reader", second),
        fact("Laboratory check", yes(content.needs_check)),
        fact("Limits hidden until recorded", yes(content.hides_limits)),
    ]
}

/// `1 container`, `3 containers`.
fn replicate_words(count: u32, level: &str) -> String {
    match count {
        1 => format!(
            "1 {}",
            level.replacen("readings", "reading", 1).replacen("preparations", "preparation", 1).replacen(
                "containers",
                "container",
                1
            )
        ),
        count => format!("{count} {level}"),
    }
}

fn days(days: u32) -> String {
    match days {
        0 => "the same day".to_string(),
        1 => "1 day of the pull".to_string(),
        days => format!("{days} days of the pull"),
    }
}

fn reported(content: &MethodContent) -> Vec<(String, String)> {
    let level = match content.level {
        Level::Reading => "readings of one preparation",
        Level::Preparation => "preparations",
        Level::Container => "containers",
    };
    let mut facts = vec![fact("Replicates", replicate_words(content.replicates, level))];
    if matches!(content.settings, Settings::Appearance { .. }) {
        facts.push(fact("Reported", "conforms, or the attribute and grade that does not"));
        return facts;
    }
    let unit = if content.unit.is_empty() { "none".to_string() } else { content.unit.clone() };
    facts.extend([
        fact("Unit", unit),
        fact("Read to", format!("{} decimals", content.reading_decimals)),
        fact("Possible readings", format!("{} to {}", content.possible_least, content.possible_most)),
        fact(
            "Repeatability",
            content.repeatability.map_or("not stated".to_string(), |value| value.to_string()),
        ),
        fact("Reportable value", reportable_words(&content.reportable)),
        fact("Rounding", rounding::words(content.rounding)),
    ]);
    facts
}

fn reportable_words(rule: &Reportable) -> String {
    match rule {
        Reportable::EachContainer => "each container is judged".to_string(),
        Reportable::Worst { highest: true } => "the highest value judges".to_string(),
        Reportable::Worst { highest: false } => "the lowest value judges".to_string(),
        Reportable::Mean { range_at_most, rsd_percent_at_most } => {
            let range = range_at_most.map(|most| format!("the range is at most {most}"));
            let rsd = rsd_percent_at_most.map(|most| format!("the RSD is at most {most} %"));
            let both: Vec<String> = range.into_iter().chain(rsd).collect();
            if both.is_empty() {
                "the mean".to_string()
            } else {
                format!("the mean, while {}", both.join(" and "))
            }
        }
    }
}

fn settings_facts(settings: &Settings) -> Vec<(String, String)> {
    match settings {
        Settings::AsStoredSediment => {
            vec![fact("Ratio", "(top of the bed − base) ÷ (fill line − base)")]
        }
        Settings::Redispersibility { cap, beat_per_minute, inspect_every, instruction } => vec![
            fact("Counted up to", format!("{cap} inversions")),
            fact("Beat", format!("{beat_per_minute} per minute")),
            fact("Inspected after every", format!("{inspect_every} inversions")),
            fact("How it is turned", instruction),
        ],
        Settings::Ph { temperature_least_c, temperature_most_c, slope_least_percent, slope_most_percent } => {
            vec![
                fact("Sample temperature", format!("{temperature_least_c} to {temperature_most_c} °C")),
                fact("Slope of the day", format!("{slope_least_percent} to {slope_most_percent} %")),
            ]
        }
        Settings::Viscosity {
            spindle,
            speed_rpm,
            torque_least_percent,
            torque_most_percent,
            temperature_c,
            temperature_tolerance_c,
            rest_minutes,
        } => vec![
            fact("Spindle", spindle),
            fact("Speed", format!("{speed_rpm} rpm")),
            fact("Torque", format!("{torque_least_percent} to {torque_most_percent} %")),
            fact("Sample temperature", format!("{temperature_c} ± {temperature_tolerance_c} °C")),
            fact("Rest before reading", format!("{rest_minutes} min")),
        ],
        Settings::Sedimentation { planned_minutes, report_at_minute, vessel_ml, .. } => vec![
            fact("Read at", format!("{} min", join(planned_minutes))),
            fact("Reported at", format!("{report_at_minute} min after shaking, F = sediment ÷ total volume")),
            fact("Vessel holds", format!("{vessel_ml} mL")),
        ],
        Settings::Appearance { .. } | Settings::Numeric { .. } => Vec::new(),
    }
}

fn join(minutes: &[u32]) -> String {
    minutes.iter().map(u32::to_string).collect::<Vec<_>>().join(", ")
}

fn photo_cell(grade: &Grade, photos: &[Attachment]) -> Cell {
    let found = photos.iter().find(|file| Some(&file.sha256) == grade.photo.as_ref());
    match found {
        Some(file) => Cell::Link {
            path: format!("/attachments/{}", file.id),
            words: "Photograph".to_string(),
            note: format!("sha256 {}", &file.sha256[..12]),
        },
        None => Cell::Missing("none".to_string()),
    }
}

fn grade_table(content: &MethodContent, attributes: &[Attribute], photos: &[Attachment]) -> Table {
    let rows = attributes.iter().flat_map(|attribute| {
        attribute.grades.iter().map(|grade| {
            vec![
                Cell::noted(&attribute.title, &attribute.code),
                Cell::text(part_words(content.stage_of(attribute))),
                Cell::text(&grade.code),
                Cell::text(&grade.word),
                Cell::text(&grade.anchor),
                photo_cell(grade, photos),
            ]
        })
    });
    Table::new(
        "Attributes and their grades",
        &["Attribute", "Part", "Grade", "Word", "Anchor sentence", "Reference"],
        "",
    )
    .rows(rows)
}

fn input_table(inputs: &[Input], formula: &Formula) -> Table {
    let rows = inputs.iter().map(|input| {
        let example = formula.example_inputs.iter().find(|(code, _)| *code == input.code);
        vec![
            Cell::noted(&input.label, &input.code),
            Cell::text(&input.unit),
            Cell::number(input.decimals.to_string()),
            Cell::number_or_missing(example.map(|(_, value)| value.to_string()), "not in the example"),
        ]
    });
    Table::new("Inputs", &["Input", "Unit", "Decimals#", "Worked example#"], "").rows(rows)
}

fn formula_words(content: &MethodContent, inputs: &[Input], formula: &Formula) -> Vec<String> {
    let check = match example_reproduces(formula, inputs, content.rounding.halves) {
        Ok(()) => "It reproduces.".to_string(),
        Err(refusal) => format!("It does not reproduce yet. {refusal}"),
    };
    vec![
        format!("Result = {}", formula.expression),
        format!("The worked example gives {}. {check}", formula.example_result),
        "Computed as one exact fraction and divided once, at the end, to 28 digits.".to_string(),
    ]
}

fn component_table(components: &[Component], has_total: bool) -> Table {
    let mut rows: Vec<Vec<Cell>> = components
        .iter()
        .map(|component| {
            let threshold = component.reporting_threshold.map(|value| value.to_string());
            let named =
                if component.is_unspecified { "by its relative retention time" } else { "by its name" };
            vec![
                Cell::noted(&component.title, &component.code),
                Cell::text(named),
                Cell::number_or_missing(threshold, "none"),
            ]
        })
        .collect();
    if has_total {
        rows.push(vec![
            Cell::noted("Total", "total"),
            Cell::text("sum of the reported components, unrounded"),
            Cell::Missing("computed".to_string()),
        ]);
    }
    Table::new("Components", &["Component", "Named", "Reporting threshold#"], "").rows(rows)
}
