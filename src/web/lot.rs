//! Lots: the list, recording one, and one with its facts, samples, studies and history.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::reply::{Outcome, page, page_with};
use super::route::{Route, get, post};
use super::show;
use super::suggestion::Suggestions;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot::{LotState, NewDistribution, NewLot, Scale};
use crate::domain::moment::date_shown;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::report::cylinder::Strip;
use crate::store;
use crate::store::lot::Lot;

pub const ROUTES: &[Route] = &[
    get("/lots", list),
    get("/lots/new", new_page),
    post("/lots/new", &[Act::MakeLot], make),
    get("/lots/{id}", one),
    post("/lots/{id}/distribution", &[Act::RecordDistribution], distribute),
];

const PAGE: i64 = 50;

#[derive(Template)]
#[template(path = "lot/list.html")]
struct LotsPage {
    shell: Shell,
    rows: Vec<Row>,
    older: Option<i64>,
    may_make: bool,
}

struct Row {
    id: i64,
    number: String,
    product: String,
    pack: String,
    formulation: String,
    made_on: String,
    scale: String,
    state: &'static str,
}

fn made_on(lot: &Lot) -> String {
    lot.made_on.map_or("not stated".to_string(), date_shown)
}

fn row(lot: Lot) -> Row {
    Row {
        id: lot.id,
        made_on: made_on(&lot),
        state: lot.state().words(),
        product: format!("{} {}", lot.product_code, lot.product_name),
        pack: lot.presentation_words,
        formulation: format!("{} version {}", lot.formulation_code, lot.formulation_number),
        number: lot.number,
        scale: lot.scale,
    }
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let lots = visit.read(|reader| store::lot::before(reader, before, PAGE + 1))?;
    let has_older = lots.len() as i64 > PAGE;
    let rows: Vec<Row> = lots.into_iter().take(PAGE as usize).map(row).collect();
    let older = rows.last().map(|row| row.id).filter(|_| has_older);
    let may_make = visit.may(Act::MakeLot);
    page(&LotsPage { shell: Shell::of(visit, "Lots"), rows, older, may_make })
}

const LEAD: &str =
    "A lot is made to an approved formulation version; the digest of that version is kept with it.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::ProductionOperator, Role::LabManager], Act::MakeLot)?;
    let (presentations, formulations, lots) = visit.read(|reader| {
        Ok((
            store::lot::presentations(reader)?,
            store::lot::approved_formulations(reader)?,
            store::lot::before(reader, None, 200)?,
        ))
    })?;
    let ids = |found: Vec<(i64, String)>| found.into_iter().map(|(id, words)| (id.to_string(), words));
    let bulk =
        lots.into_iter().filter(|lot| lot.imported.is_none()).map(|lot| (lot.id.to_string(), lot.number));
    let asked = visit.query.get("presentation").unwrap_or_default().to_string();
    Ok(Form::new(visit, "/lots/new", "Record the lot")?
        .field(Field::new("number", "Lot number", Entry::Text).width(20).hint("Never used twice."))
        .field(
            Field::new("presentation", "Presentation", Entry::Select)
                .choices(ids(presentations))
                .value(asked),
        )
        .field(
            Field::new("formulation_version", "Formulation version", Entry::Select)
                .choices(ids(formulations))
                .hint("Only approved versions are listed."),
        )
        .field(Field::new("made_on", "Made on", Entry::Date).width(12))
        .field(Field::new("size", "Size", Entry::Decimal).width(12).hint("May be left empty."))
        .field(Field::new("size_unit", "Unit of the size", Entry::Text).width(8).hint("L, kg, bottles."))
        .field(
            Field::new("scale", "Scale", Entry::Select)
                .choices(Scale::ALL.map(|one| (one.words(), one.words()))),
        )
        .field(
            Field::new("container_closure", "Container and closure", Entry::Text)
                .hint("Type, material, nominal volume, closure, liner."),
        )
        .field(
            Field::new("bulk_lot", "Filled from bulk lot", Entry::Select)
                .choices(bulk)
                .value(visit.query.get("bulk").unwrap_or_default())
                .hint("For a packed lot; leave it open otherwise."),
        ))
}

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["presentation", "bulk"])?;
    form::show(visit, "New lot", LEAD, new_form(visit)?)
}

fn read(typed: &mut Typed<'_>) -> Option<NewLot> {
    let number = typed.text("number", 40);
    let presentation = typed.record("presentation");
    let formulation_version = typed.record("formulation_version");
    let made_on = typed.date("made_on");
    let size = typed.maybe_decimal("size", &NumberRule::between("Size", 0, 10_000_000));
    let size_unit = typed.maybe_text("size_unit", 20);
    let scale = typed.choice("scale").and_then(|words| Scale::from_words(&words));
    let container_closure = typed.text("container_closure", 200);
    let bulk_lot = typed.maybe_record("bulk_lot");
    Some(NewLot {
        number: number?,
        presentation: presentation?,
        formulation_version: formulation_version?,
        made_on: made_on?,
        size: size?.map(|number| number.value),
        size_unit: size_unit?,
        scale: scale?,
        container_closure: container_closure?,
        bulk_lot: bulk_lot?,
    })
}

fn make(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "New lot",
        LEAD,
        new_form(visit)?,
        read,
        |actor, new| acts::lot::make(visit.db(), actor, &new),
        |id| format!("/lots/{id}"),
    )
}

#[derive(Template)]
#[template(path = "lot/lot.html")]
struct LotPage {
    shell: Shell,
    lot: Lot,
    made_on: String,
    size: String,
    state: &'static str,
    expires_on: String,
    digest: String,
    is_digest_current: bool,
    packed: Vec<(i64, String)>,
    distributions: Vec<(String, String)>,
    samples: Vec<store::lot::SampleLine>,
    studies: Vec<(store::lot::StudyLine, String)>,
    made_with: super::lot_parts::Parts,
    links: Vec<(String, &'static str)>,
    /// Path, test and place, what the early warning says.
    warnings: Vec<(String, String, String)>,
    suggestions: Option<Suggestions>,
    /// The cylinders of each arm over its ages.
    strips: Vec<(String, Strip)>,
    /// Signed conclusions on it: address and words.
    conclusions: Vec<(String, String)>,
    distribution: Option<Form>,
    trail: Trail,
}

fn one(visit: &Visit) -> Outcome {
    lot_page(200, visit, visit.id("id")?, None)
}

fn lot_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (lot, packed, distributions, samples, studies, warnings, suggestions, lines) =
        visit.read(|reader| {
            Ok((
                store::lot::get(reader, id)?,
                store::lot::packed_from(reader, id)?,
                store::lot::distributions(reader, id)?,
                store::lot::samples(reader, id)?,
                store::lot::studies(reader, id)?,
                store::trend::tally::warnings_of_lot(reader, id)?,
                Suggestions::of(reader, id)?,
                store::trail::of_subject(reader, Subject::new(Kind::Lot, id))?,
            ))
        })?;
    let state = lot.state();
    let record = visit.read(|reader| store::batch::id_of_lot(reader, id))?;
    let distribution = match failed {
        Some(failed) => Some(failed),
        None if state == LotState::Released && visit.may(Act::RecordDistribution) => {
            Some(distribution_form(visit, id)?)
        }
        None => None,
    };
    let mut shell = Shell::of(visit, &format!("Lot {}", lot.number)).crumb("/lots", "Lots");
    if let Some(form) = &distribution {
        shell = shell.with_errors(form);
    }
    let (strips, conclusions) = seen_of(visit, id)?;
    let page = LotPage {
        strips,
        conclusions,
        shell,
        made_on: made_on(&lot),
        size: match (&lot.size, &lot.size_unit) {
            (Some(size), Some(unit)) => show::with_unit(size, unit),
            _ => "not stated".to_string(),
        },
        state: state.words(),
        expires_on: lot.expires_on.map(date_shown).unwrap_or_default(),
        digest: show::digest(&lot.formulation_digest),
        is_digest_current: sha256_hex(lot.formulation_content.as_bytes()) == lot.formulation_digest,
        packed,
        distributions: distributions.into_iter().map(|one| (date_shown(one.first_on), one.markets)).collect(),
        samples,
        studies: studies.into_iter().map(started).collect(),
        made_with: super::lot_parts::Parts::of(visit, id)?,
        links: with_record(record, links(visit, id, state)),
        suggestions,
        warnings: warnings.into_iter().map(super::trend::warning).collect(),
        distribution,
        trail: Trail::of(&lines, visit.at.zone),
        lot,
    };
    page_with(status, &page)
}

fn started(study: store::lot::StudyLine) -> (store::lot::StudyLine, String) {
    let started_on = study.started_on.map_or("not stated".to_string(), date_shown);
    (study, started_on)
}

/// Cylinder strips by arm, and links to conclusions with their words.
type SeenOf = (Vec<(String, Strip)>, Vec<(String, String)>);

/// What was seen of the lot over its ages, and what was concluded from it.
fn seen_of(visit: &Visit, id: i64) -> Result<SeenOf, Failure> {
    let (arms, clarities, concluded) = visit.read(|reader| {
        Ok((
            super::settling::arms_of_lot(reader, id)?,
            store::series::clarities_of_lot(reader, id)?,
            store::conclusion::of_lot(reader, id)?,
        ))
    })?;
    let words = |(id, months, condition): (i64, u32, String)| {
        (format!("/conclusions/{id}"), format!("Conclusion {id}: {months} months proposed, {condition}"))
    };
    Ok((super::settling::strips(&arms, &clarities), concluded.into_iter().map(words).collect()))
}

/// What this person can do from here.
fn links(visit: &Visit, id: i64, state: LotState) -> Vec<(String, &'static str)> {
    let mut links =
        vec![(format!("/lots/{id}/file"), "Lot file"), (format!("/lots/{id}/settling"), "How it settles")];
    if state == LotState::Imported {
        return links;
    }
    if visit.may(Act::ReceiveSample) {
        links.push((format!("/samples/new?lot={id}"), "Receive a sample"));
    }
    if visit.may(Act::StartStudy) {
        links.push((format!("/studies/new?lot={id}"), "Start a study"));
    }
    links.push((format!("/lots/{id}/completeness"), "Completeness"));
    links.push((format!("/lots/{id}/certificate"), "Certificate of analysis"));
    links.push((format!("/lots/{id}/packaging"), "Containers and labels"));
    if visit.may(Act::KeepRetain) {
        links.push((format!("/lots/{id}/retains/new"), "Record a retain"));
    }
    if visit.may(Act::OpenDeviation) {
        links.push((format!("/deviations/new?lot={id}"), "Open a deviation"));
    }
    if visit.may(Act::DecideLot) {
        links.push((format!("/lots/{id}/decision"), "Release or reject"));
    }
    links
}

/// The way to the lot's batch record comes first, where it was made here.
fn with_record(record: Option<i64>, mut links: Vec<(String, &'static str)>) -> Vec<(String, &'static str)> {
    if let Some(record) = record {
        links.insert(0, (format!("/batches/{record}"), "Batch record"));
    }
    links
}

fn distribution_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/lots/{id}/distribution"), "Record the distribution")?
        .field(Field::new("first_on", "First distributed on", Entry::Date).width(12))
        .field(Field::new("markets", "Markets", Entry::Text).hint("Such as United Kingdom, Ireland."))
        .quiet())
}

fn distribute(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        distribution_form(visit, id)?,
        |typed| {
            let first_on = typed.date("first_on");
            let markets = typed.text("markets", 200);
            Some(NewDistribution { first_on: first_on?, markets: markets? })
        },
        |actor, new| acts::lot::distribute(visit.db(), actor, id, &new),
        |()| format!("/lots/{id}"),
        |status, form| lot_page(status, visit, id, Some(form)),
    )
}
