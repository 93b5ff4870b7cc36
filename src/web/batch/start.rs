//! Starting a lot: choose master record and size, look at the amounts, name the lot.

use askama::Template;
use rust_decimal::Decimal;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::master::scaling;
use super::super::page::Shell;
use super::super::reply::{Outcome, page_with};
use super::super::table::Table;
use super::super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::batch::start::{NewBatch, StartRefusal, may_start_record};
use crate::domain::failure::Failure;
use crate::domain::formulation::FormulationContent;
use crate::domain::lot::Scale;
use crate::domain::version::Versioned;
use crate::store;

struct Choice {
    path: String,
    name: String,
}

#[derive(Template)]
#[template(path = "batch/start.html")]
struct StartPage {
    shell: Shell,
    lead: String,
    choices: Vec<Choice>,
    amounts: Option<Table>,
    facts: Vec<(String, String)>,
    form: Option<Form>,
}

/// The version and size that were chosen, from the address or from the form that comes back.
fn chosen(visit: &Visit) -> Option<(i64, Decimal)> {
    let said = |name: &str| visit.query.get(name).or(visit.form.get(name));
    Some((said("formulation_version")?.parse().ok()?, said("size")?.parse().ok()?))
}

fn choices(visit: &Visit) -> Outcome {
    let masters = visit.read(|reader| {
        let found = store::batch::approved_masters(reader)?;
        let contents = found.into_iter().map(|(id, _, words)| {
            let version = store::version::get(reader, Versioned::Formulation, id)?;
            Ok((id, words, version.read::<FormulationContent>()?))
        });
        contents.collect::<Result<Vec<_>, Failure>>()
    })?;
    let mut choices = Vec::new();
    for (id, words, content) in masters {
        for (size, unit) in
            content.master.iter().flat_map(|one| one.batch_sizes.iter().map(|size| (size, &one.size_unit)))
        {
            choices.push(Choice {
                path: format!("/batches/new?formulation_version={id}&size={size}"),
                name: format!("{words} · {size}\u{202f}{unit}"),
            });
        }
    }
    let lead = match choices.len() {
        0 => "No approved formulation version has a master record, so no lot can be made step by step.",
        _ => "Choose what is made and how much. The amounts are shown before the lot is started.",
    };
    let shell = Shell::of(visit, "Start a lot").crumb("/batches", "Batches");
    page_with(
        200,
        &StartPage { shell, lead: lead.to_string(), choices, amounts: None, facts: Vec::new(), form: None },
    )
}

fn start_form(visit: &Visit, version: i64, size: Decimal) -> Result<Form, Failure> {
    let presentations = visit.read(|reader| {
        let parent = store::version::get(reader, Versioned::Formulation, version)?.parent;
        let product = store::lot::product_of_formulation(reader, parent)?;
        let mut own = Vec::new();
        for (id, words) in store::lot::presentations(reader)? {
            if store::lot::product_of_presentation(reader, id)? == product {
                own.push((id.to_string(), words));
            }
        }
        Ok(own)
    })?;
    Ok(Form::new(visit, "/batches/new", "Start the lot")?
        .field(Field::new("number", "Lot number", Entry::Text).width(20).hint("Never used twice."))
        .field(Field::new("presentation", "Presentation", Entry::Select).choices(presentations))
        .field(
            Field::new("scale", "Scale", Entry::Select)
                .choices(Scale::ALL.map(|one| (one.words(), one.words())))
                .value(Scale::Production.words()),
        )
        .field(
            Field::new("container_closure", "Container and closure", Entry::Text)
                .hint("Type, material, nominal volume, closure, liner."),
        )
        .hide("formulation_version", version.to_string())
        .hide("size", size.to_string()))
}

fn check_page(status: u16, visit: &Visit, version: i64, size: Decimal, form: Form) -> Outcome {
    let (found, owner) = visit.read(|reader| {
        let found = store::version::get(reader, Versioned::Formulation, version)?;
        let owner = store::formulation::get(reader, found.parent)?;
        Ok((found, owner))
    })?;
    let content: FormulationContent = found.read()?;
    let scaled = may_start_record(&content, size)?;
    let Some(master) = &content.master else { return Err(StartRefusal::NoMasterRecord.into()) };
    let title = format!("Start a lot: {} version {}, {size} {}", owner.code, found.number, scaled.size_unit);
    let shell = Shell::of(visit, &title)
        .crumb("/batches", "Batches")
        .crumb("/batches/new", "Start a lot")
        .with_errors(&form);
    page_with(
        status,
        &StartPage {
            shell,
            lead: format!(
                "{}. The lot counts as made from today on; its record is a copy of what is approved.",
                scaled.sum
            ),
            choices: Vec::new(),
            amounts: Some(scaling::table(&scaled, master)),
            facts: scaling::facts(&scaled),
            form: Some(form),
        },
    )
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&["formulation_version", "size"])?;
    if !visit.may(Act::StartBatchRecord) {
        return Err(Failure::Denied(Act::StartBatchRecord));
    }
    match chosen(visit) {
        Some((version, size)) => check_page(200, visit, version, size, start_form(visit, version, size)?),
        None => choices(visit),
    }
}

fn typed_batch(typed: &mut Typed<'_>, formulation_version: i64, size: Decimal) -> Option<NewBatch> {
    let number = typed.text("number", 40);
    let presentation = typed.record("presentation");
    let scale = typed.choice("scale").and_then(|words| Scale::from_words(&words));
    let container_closure = typed.text("container_closure", 200);
    Some(NewBatch {
        number: number?,
        presentation: presentation?,
        formulation_version,
        size,
        scale: scale?,
        container_closure: container_closure?,
    })
}

pub fn start(visit: &Visit) -> Outcome {
    let Some((version, size)) = chosen(visit) else {
        return Err(Failure::BadRequest("Choose the master record and the batch size first.".to_string()));
    };
    form::submit(
        visit,
        start_form(visit, version, size)?,
        |typed| typed_batch(typed, version, size),
        |actor, new| acts::batch::start(visit.db(), actor, &new),
        |id| format!("/batches/{id}"),
        |status, form| check_page(status, visit, version, size, form),
    )
}
