//! A signed conclusion, with whether its inputs are still what they were.

use super::super::page::Shell;
use super::super::part::{Signatures, Trail};
use super::super::record::Record;
use super::super::reply::Outcome;
use super::super::show;
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::new::four;
use crate::acts;
use crate::domain::conclusion::{Content, LeftOutLot};
use crate::domain::digest::sha256_hex;
use crate::domain::subject::{Kind, Subject};
use crate::store;

pub fn page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (found, content, now, signatures, lines) = visit.read(|reader| {
        let found = store::conclusion::get(reader, id)?;
        let content = found.content()?;
        let now = acts::conclusion::again(reader, found.study_arm, &content)?;
        let signatures = store::signature::of(reader, Kind::Conclusion, id)?;
        let lines = store::trail::of_subject(reader, Subject::new(Kind::Conclusion, id))?;
        Ok((found, content, now, signatures, lines))
    })?;
    let digest = sha256_hex(found.text.as_bytes());
    let title = format!("Conclusion {id} on {}", content.presentation);
    let shell = Shell::of(visit, &title)
        .crumb("/evaluations", "Evaluation")
        .crumb(format!("/evaluations?presentation={}", found.presentation), found.presentation_code.as_str())
        .print("Signed", &digest);
    let lead = format!(
        "{} months proposed for {} at {}. A shelf life is assigned by the authorised person, never taken from a \
         computation.",
        content.proposed_months, content.presentation, content.condition
    );
    let mut record = Record::new(shell, lead)
        .fact("Proposed", format!("{} months", content.proposed_months))
        .fact("At most", format!("{} months", content.most_months))
        .fact("What binds", content.binds.clone())
        .fact("Data on every lot", format!("{} months", content.covered_months))
        .fact("Cap", format!("{} months, leaf {} of the tree", content.cap_months, content.node))
        .fact("Limits", content.specification.clone())
        .fact("Level for pooling", format!("{} %", content.alpha_percent))
        .fact("Rules and program", format!("{}, {}", content.rules, content.program))
        .fact("Digest of the inputs", format!("sha256 {}", show::digest(&found.inputs_digest)))
        .sentences("Inputs now", now_sentences(&content, &now))
        .table("Tests", tests(&content, found.study_arm))
        .table("Lots", lots(&content))
        .sentences("The answers, step by step", content.steps.clone())
        .more_facts("In words", words(&content));
    record = record.sentences("What the data suggested", content.suggested.clone());
    record
        .signatures(Signatures::of(&signatures, &digest, visit.at.zone))
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}

fn now_sentences(content: &Content, now: &Content) -> Vec<String> {
    let found = content.differences(now);
    if found.is_empty() {
        return vec![
            "The results and limits are those that were signed; computed again they give the same numbers."
                .to_string(),
        ];
    }
    let mut sentences = vec![
        "The records have changed since; what was signed stands below as it was. Conclude anew if it matters."
            .to_string(),
    ];
    sentences.extend(found.into_iter().map(|one| format!("▲ {one}.")));
    sentences
}

fn tests(content: &Content, arm: i64) -> Table {
    let heads =
        ["Test", "Limit", "Results#", "Scale", "Model", "Status", "Exactly, months#", "Lot that binds"];
    let rows = content.tests.iter().map(|test| {
        vec![
            Cell::link(super::super::evaluation::path(arm, &test.test, &test.component), test.title.clone()),
            Cell::text(&test.limits),
            Cell::number(test.inputs.len().to_string()),
            Cell::text(&test.scale),
            Cell::text(test.model.replace('_', " ")),
            Cell::text(test.status.replace('_', " ")),
            Cell::number_or_missing(test.months.clone().map(four), "none"),
            Cell::or_missing(test.lot.clone(), if test.months.is_some() { "all lots alike" } else { "none" }),
        ]
    });
    Table::new("As computed when it was signed", &heads, "No test.").rows(rows)
}

fn lots(content: &Content) -> Table {
    let chosen = content.lots.iter().map(|lot| {
        vec![
            Cell::link(format!("/lots/{}", lot.id), lot.number.clone()),
            Cell::text(&lot.formulation),
            Cell::text("chosen"),
        ]
    });
    let out = |lot: &LeftOutLot| {
        vec![
            Cell::link(format!("/lots/{}", lot.id), lot.number.clone()),
            Cell::Missing("not of this conclusion".to_string()),
            Cell::text(format!("left out: {}", lot.why)),
        ]
    };
    Table::new("Chosen and left out", &["Lot", "Formulation", "Part"], "No lot.")
        .rows(chosen.chain(content.left_out.iter().map(out)))
}

fn words(content: &Content) -> Vec<(String, String)> {
    let answers = &content.answers;
    [
        ("Accelerated, why", &answers.accelerated_why),
        ("Intermediate, why", &answers.intermediate_why),
        ("Little or no change, what was seen", &answers.little_change_why),
        ("Supporting data", &answers.supporting_why),
        ("Physical attributes beyond the data", &answers.physical_why),
    ]
    .into_iter()
    .filter(|(_, text)| !text.is_empty())
    .map(|(name, text)| (name.to_string(), text.clone()))
    .collect()
}
