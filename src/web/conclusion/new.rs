//! Concluding: look at the tests and what the data suggest, answer, see what may be proposed, sign.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form};
use super::super::page::Shell;
use super::super::reply::{Outcome, page_with};
use super::super::table::{Cell, Table};
use super::super::visit::Visit;
use super::answers;
use crate::acts;
use crate::acts::conclusion::Prepared;
use crate::acts::signature::Conclusion;
use crate::domain::act::Act;
use crate::domain::conclusion::Proposal;
use crate::domain::conclusion::rule::may_conclude;
use crate::domain::failure::Failure;
use crate::domain::role::Role;
use crate::domain::signature::Meaning;

#[derive(Template)]
#[template(path = "conclusion/new.html")]
struct NewPage {
    shell: Shell,
    lead: String,
    tests: Table,
    suggested: Vec<String>,
    fields: Vec<Field>,
    lots: Vec<Vec<Field>>,
    arm: i64,
    /// What the answers lead to; empty on a first visit.
    steps: Vec<String>,
    result: String,
    why_not: String,
    form: Option<Form>,
}

pub fn page(visit: &Visit) -> Outcome {
    visit.needs_role(&[Role::LabManager, Role::QaReviewer], Act::ConcludeEvaluation)?;
    answers::check(&visit.query)?;
    let arm = arm_of(visit.query.get("arm"))?;
    let first = visit.read(|reader| acts::conclusion::prepare(reader, arm, &Proposal::default()))?;
    let lots = numbers(&first);
    let proposal = answers::proposal(&visit.query, &lots);
    let is_first = !answers::are_given(&visit.query);
    let found = if is_first {
        first
    } else {
        visit.read(|reader| acts::conclusion::prepare(reader, arm, &proposal))?
    };
    let form = sign_form(visit, &found, &proposal, is_first)?;
    shown(200, visit, &found, &proposal, is_first, form)
}

fn arm_of(text: Option<&str>) -> Result<i64, Failure> {
    text.and_then(|text| text.parse().ok()).ok_or_else(|| Failure::missing("arm with this number"))
}

fn numbers(found: &Prepared) -> Vec<i64> {
    found.lots.iter().map(|lot| lot.id).collect()
}

/// The signing form, where signing is possible with the most that may be proposed.
fn sign_form(
    visit: &Visit,
    found: &Prepared,
    proposal: &Proposal,
    is_first: bool,
) -> Result<Option<Form>, Failure> {
    if is_first || why_not(found).is_some() {
        return Ok(None);
    }
    Ok(Some(form_of(visit, found, proposal)?))
}

fn form_of(visit: &Visit, found: &Prepared, proposal: &Proposal) -> Result<Form, Failure> {
    let mut form = Form::new(visit, "/conclusions/new", "Sign this conclusion")?;
    for (name, value) in answers::carried(found.group.arm, proposal, &numbers(found)) {
        form = form.hide(&name, value);
    }
    Ok(form
        .field(
            Field::new("months", "Proposed shelf life, months", Entry::Count)
                .width(4)
                .hint(&format!("At most {}.", found.content.most_months))
                .value(found.content.most_months.to_string()),
        )
        .field(
            Field::new("physical_why", "Why physical attributes may be read beyond the data", Entry::Text)
                .hint("Caking, redispersion, viscosity. Needed where the proposal is longer than the data."),
        )
        .signature(Meaning::Conclusion.words()))
}

/// Why nothing could be signed whatever is proposed; none where a proposal of no reach would do.
fn why_not(found: &Prepared) -> Option<String> {
    let mut facts = found.facts.clone();
    facts.proposed_months = 0;
    may_conclude(&facts).err().map(|refusal| refusal.to_string())
}

fn shown(
    status: u16,
    visit: &Visit,
    found: &Prepared,
    proposal: &Proposal,
    is_first: bool,
    form: Option<Form>,
) -> Outcome {
    let group = &found.group;
    let title = format!("Conclude on {} at {}", group.presentation_code, group.condition_words());
    let mut shell = Shell::of(visit, &title).crumb("/evaluations", "Evaluation").crumb(
        format!("/evaluations?presentation={}", group.key.presentation),
        group.presentation_code.as_str(),
    );
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let content = &found.content;
    let page = NewPage {
        shell,
        lead: "The numbers, what the data suggest, your answers: together they say how long a shelf life may be \
               proposed. It is assigned by the authorised person, never taken from here."
            .to_string(),
        tests: tests(found),
        suggested: content.suggested.clone(),
        fields: answers::fields(found, proposal, is_first),
        lots: answers::lot_fields(found, proposal),
        arm: group.arm,
        steps: if is_first { Vec::new() } else { content.steps.clone() },
        result: if is_first || content.steps.is_empty() {
            String::new()
        } else {
            format!("At most {} months may be proposed. {}", content.most_months, content.binds)
        },
        why_not: if is_first { String::new() } else { why_not(found).unwrap_or_default() },
        form,
    };
    page_with(status, &page)
}

fn tests(found: &Prepared) -> Table {
    let heads = ["Test", "Limit", "Results#", "Outcome", "Exactly, months#", "Lot that binds"];
    let row =
        |(one, test): (&crate::domain::evaluation::group::Computed, &crate::domain::conclusion::Test)| {
            let path = super::super::evaluation::path(found.group.arm, &test.test, &test.component);
            let short = one.found.as_ref().map(crate::report::evaluation::words::life_short);
            let outcome = if one.is_in_words { "in words".to_string() } else { short.unwrap_or_default() };
            vec![
                Cell::link(path, test.title.clone()),
                Cell::text(&test.limits),
                Cell::number(test.inputs.len().to_string()),
                Cell::text(outcome),
                Cell::number_or_missing(test.months.clone().map(four), "none"),
                Cell::or_missing(
                    test.lot.clone(),
                    if test.months.is_some() { "all lots alike" } else { "none" },
                ),
            ]
        };
    Table::new("Every test of this condition, with the lots chosen", &heads, "No test has a result yet.")
        .rows(found.computed.iter().zip(&found.content.tests).map(row))
}

/// Four decimals of a stored number of months.
pub fn four(months: String) -> String {
    months.parse::<f64>().map(|months| format!("{months:.4}")).unwrap_or(months)
}

pub fn sign(visit: &Visit) -> Outcome {
    let arm = arm_of(visit.form.get("arm"))?;
    let first = visit.read(|reader| acts::conclusion::prepare(reader, arm, &Proposal::default()))?;
    let proposal = answers::proposal(&visit.form, &numbers(&first));
    let found = visit.read(|reader| acts::conclusion::prepare(reader, arm, &proposal))?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        form_of(visit, &found, &proposal)?,
        |typed| {
            let months = typed.count("months", 0, 120);
            let why = typed.maybe_text("physical_why", 1000);
            let password = typed.visit.form.get("password")?.to_string();
            let mut proposal = proposal.clone();
            proposal.months = u32::try_from(months?).ok()?;
            proposal.answers.physical_why = why?.unwrap_or_default();
            Some((proposal, typed.raw("user_name"), password))
        },
        |actor, (proposal, user_name, password)| {
            let signed =
                acts::signature::authenticate::<Conclusion>(db, secrets, actor, &user_name, &password)?;
            acts::conclusion::conclude(db, actor, arm, &proposal, &signed)
        },
        |id| format!("/conclusions/{id}"),
        |status, form| shown(status, visit, &found, &proposal, false, Some(form)),
    )
}
