//! The questions as fields, and the answers as they were typed.

use super::super::field::{Entry, Field};
use super::super::pairs::Pairs;
use crate::acts::conclusion::Prepared;
use crate::domain::conclusion::Proposal;
use crate::domain::conclusion::cap::{ACCELERATED, Answers, INTERMEDIATE, STORAGES};
use crate::domain::failure::Failure;

/// Names that the questions use, beside `lot.N` and `why.N`.
pub const NAMES: [&str; 12] = [
    "arm",
    "storage",
    "accelerated",
    "accelerated_why",
    "intermediate",
    "intermediate_why",
    "little_change",
    "little_change_why",
    "statistics",
    "supporting_data",
    "supporting_why",
    "months",
];

/// Longest text of one answer.
const LONGEST: usize = 1000;

/// Refuses names that the page does not know, and texts too long for it.
pub fn check(pairs: &Pairs) -> Result<(), Failure> {
    for (name, value) in pairs.iter() {
        let is_lot = name.strip_prefix("lot.").or(name.strip_prefix("why."));
        let is_lot = is_lot.is_some_and(|id| id.parse::<i64>().is_ok());
        if !NAMES.contains(&name) && !is_lot {
            return Err(Failure::BadRequest(format!("This page does not know “{name}”.")));
        }
        if value.chars().count() > LONGEST {
            return Err(Failure::BadRequest(format!("“{name}” is too long: at most {LONGEST} characters.")));
        }
    }
    Ok(())
}

/// Whether the questions were answered at all, or the page is seen for the first time.
pub fn are_given(pairs: &Pairs) -> bool {
    pairs.get("storage").is_some()
}

/// The answers and the lots left out, as typed. On a first visit every lot is chosen.
pub fn proposal(pairs: &Pairs, lots: &[i64]) -> Proposal {
    let text = |name: &str| pairs.get(name).unwrap_or_default().trim().to_string();
    let yes = |name: &str| pairs.get(name) == Some("yes");
    let left = |lot: &i64| (*lot, text(&format!("why.{lot}")));
    let left_out = lots.iter().filter(|lot| are_given(pairs) && !yes(&format!("lot.{lot}"))).map(left);
    Proposal {
        answers: Answers {
            storage: text("storage"),
            accelerated: text("accelerated"),
            accelerated_why: text("accelerated_why"),
            intermediate: text("intermediate"),
            intermediate_why: text("intermediate_why"),
            is_little_change: yes("little_change"),
            little_change_why: text("little_change_why"),
            has_statistics: yes("statistics"),
            has_supporting_data: yes("supporting_data"),
            supporting_why: text("supporting_why"),
            physical_why: text("physical_why"),
        },
        left_out: left_out.collect(),
        months: text("months").parse().unwrap_or(0),
    }
}

/// The answers as (name, value) pairs, to be carried along unseen in the signing form.
pub fn carried(arm: i64, proposal: &Proposal, lots: &[i64]) -> Vec<(String, String)> {
    let answers = &proposal.answers;
    let tick = |is: bool| if is { "yes".to_string() } else { String::new() };
    let mut pairs: Vec<(String, String)> = [
        ("arm", arm.to_string()),
        ("storage", answers.storage.clone()),
        ("accelerated", answers.accelerated.clone()),
        ("accelerated_why", answers.accelerated_why.clone()),
        ("intermediate", answers.intermediate.clone()),
        ("intermediate_why", answers.intermediate_why.clone()),
        ("little_change", tick(answers.is_little_change)),
        ("little_change_why", answers.little_change_why.clone()),
        ("statistics", tick(answers.has_statistics)),
        ("supporting_data", tick(answers.has_supporting_data)),
        ("supporting_why", answers.supporting_why.clone()),
    ]
    .into_iter()
    .map(|(name, value)| (name.to_string(), value))
    .collect();
    for lot in lots {
        let why = proposal.left_out.iter().find(|(left, _)| left == lot);
        pairs.push((format!("lot.{lot}"), tick(why.is_none())));
        pairs.push((format!("why.{lot}"), why.map(|(_, why)| why.clone()).unwrap_or_default()));
    }
    pairs
}

/// The questions, filled with what was answered, or with what the data suggest on a first visit.
pub fn fields(found: &Prepared, proposal: &Proposal, is_first: bool) -> Vec<Field> {
    let answers = &proposal.answers;
    let tick = |is: bool| if is { "yes" } else { "" };
    let or = |given: &str, suggested: Option<&str>| {
        if is_first { suggested.unwrap_or_default().to_string() } else { given.to_string() }
    };
    let cold = found.group.temperature_c.map(|at| at.round().to_string());
    let storage = match cold.as_deref().and_then(|text| text.parse::<i64>().ok()) {
        Some(at) if at <= -10 => "freezer",
        Some(at) if at <= 8 => "refrigerator",
        _ => "room",
    };
    let why = |name: &str, label: &str, hint: &str, value: &str| {
        Field::new(name, label, Entry::Text).hint(hint).value(value)
    };
    let accelerated = found.accelerated.accelerated();
    let intermediate = found.intermediate.intermediate();
    let said = |code: Option<&str>, list: &[(&str, &str)]| match code {
        Some(code) => {
            let words = list.iter().find(|(known, _)| *known == code).map_or("", |(_, words)| words);
            format!("The data suggest: {words}. The answer is yours.")
        }
        None => "The data do not reach far enough to suggest an answer.".to_string(),
    };
    vec![
        Field::new("storage", "Intended storage", Entry::Radios)
            .choices(STORAGES)
            .value(or(&answers.storage, Some(storage))),
        Field::new("accelerated", "Accelerated condition", Entry::Radios)
            .hint(&said(accelerated, &ACCELERATED))
            .choices(ACCELERATED)
            .value(or(&answers.accelerated, accelerated)),
        why("accelerated_why", "Why, if not as suggested", "May stay empty.", &answers.accelerated_why),
        Field::new("intermediate", "Intermediate condition", Entry::Radios)
            .hint(&said(intermediate, &INTERMEDIATE))
            .choices(INTERMEDIATE)
            .value(or(&answers.intermediate, intermediate)),
        why("intermediate_why", "Why, if not as suggested", "May stay empty.", &answers.intermediate_why),
        Field::new(
            "little_change",
            "Long-term and accelerated data show little or no change and variability",
            Entry::Tick,
        )
        .hint("Your judgement, after looking at the charts; never inferred.")
        .value(tick(answers.is_little_change)),
        why("little_change_why", "What you saw", "Needed with the tick.", &answers.little_change_why),
        Field::new(
            "statistics",
            "The data are amenable to statistics, and the statistics support it",
            Entry::Tick,
        )
        .value(tick(answers.has_statistics)),
        Field::new("supporting_data", "Relevant supporting data exist", Entry::Tick)
            .value(tick(answers.has_supporting_data)),
        why("supporting_why", "Which supporting data", "Needed with the tick.", &answers.supporting_why),
    ]
}

/// Each lot with its tick and the reason for leaving it out.
pub fn lot_fields(found: &Prepared, proposal: &Proposal) -> Vec<Vec<Field>> {
    let row = |lot: &crate::domain::conclusion::Lot| {
        let left = proposal.left_out.iter().find(|(id, _)| *id == lot.id);
        let words = format!("{}, {}", lot.number, lot.formulation);
        vec![
            Field::new(&format!("lot.{}", lot.id), &words, Entry::Tick).value(if left.is_none() {
                "yes"
            } else {
                ""
            }),
            Field::new(
                &format!("why.{}", lot.id),
                &format!("If {} is left out: why", lot.number),
                Entry::Text,
            )
            .value(left.map(|(_, why)| why.clone()).unwrap_or_default()),
        ]
        .into_iter()
        .map(|field| Field { is_in_grid: field.entry == Entry::Text, ..field })
        .collect()
    };
    found.lots.iter().map(row).collect()
}
