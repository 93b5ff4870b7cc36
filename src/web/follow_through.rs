//! What was seen on a container that is never opened: its table and its form, on the container's page.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{Form, Typed};
use super::show;
use super::visit::Visit;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::follow_through::{NewObservation, loss_percent};
use crate::domain::rounding::to_decimals;
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::follow_through::Observation;

/// The table on the page of the container.
#[derive(Template)]
#[template(path = "container/follow_through.html")]
pub struct Followed {
    rows: Vec<Row>,
}

impl askama::filters::HtmlSafe for Followed {}

struct Row {
    when: String,
    weight: String,
    loss: String,
    bed: String,
    photo: Option<i64>,
    by: String,
    at: String,
    act: i64,
    /// Was → is, with the reason, where it corrects an earlier row.
    correction: String,
}

const AT_LOADING: &str = "loading";

impl Followed {
    pub fn of(visit: &Visit, container: i64) -> Result<Followed, Failure> {
        let found = visit.read(|reader| store::follow_through::of_container(reader, container))?;
        let is_superseded = |id: i64| found.iter().any(|row| row.supersedes == Some(id));
        let loading = found.iter().rev().find(|row| row.pull.is_none()).map(|row| row.weight_g);
        let standing = found.iter().filter(|row| !is_superseded(row.id));
        let row = |one: &Observation| Row {
            when: if one.pull.is_none() { "At loading".to_string() } else { one.age.clone() },
            weight: show::with_unit(&one.weight_g.to_string(), "g"),
            loss: loss(loading, one),
            bed: heights(one),
            photo: one.attachment,
            by: one.by.clone(),
            at: show::instant(&one.at, visit.at.zone),
            act: one.act,
            correction: correction(&found, one),
        };
        Ok(Followed { rows: standing.map(row).collect() })
    }
}

fn loss(loading: Option<rust_decimal::Decimal>, one: &Observation) -> String {
    let percent = loading.filter(|_| one.pull.is_some()).and_then(|first| loss_percent(first, one.weight_g));
    let halves = crate::domain::method::Halves::AwayFromZero;
    percent.map(|value| format!("{} %", to_decimals(value, 2, halves))).unwrap_or_default()
}

fn heights(one: &Observation) -> String {
    match (one.bed_top_mm, one.fill_line_mm) {
        (Some(bed), Some(fill)) => format!("bed {bed} mm of {fill} mm"),
        (Some(bed), None) => format!("bed {bed} mm"),
        (None, Some(fill)) => format!("fill line {fill} mm"),
        (None, None) => String::new(),
    }
}

fn correction(all: &[Observation], one: &Observation) -> String {
    let was = one.supersedes.and_then(|id| all.iter().find(|row| row.id == id));
    let why = one.note.clone().unwrap_or_default();
    was.map(|was| format!("was {} g: {why}", was.weight_g)).unwrap_or_default()
}

/// The form; `None` for who may not record it.
pub fn observe_form(visit: &Visit, container: i64) -> Result<Option<Form>, Failure> {
    if !visit.may(Act::RecordContainer) {
        return Ok(None);
    }
    let ages = visit.read(|reader| store::follow_through::ages(reader, container))?;
    let choices = ages.into_iter().map(|(pull, age)| (pull.to_string(), age));
    let choices = std::iter::once((AT_LOADING.to_string(), "At loading".to_string())).chain(choices);
    let form =
        Form::new(visit, &format!("/containers/{container}/observations"), "Record weight and heights")?
            .field(Field::new("age", "When", Entry::Select).choices(choices))
            .field(Field::new("weight_g", "Weight, unopened, g", Entry::Decimal).width(8))
            .field(Field::new("bed_top_mm", "Top of the bed above the base, mm", Entry::Decimal).width(8))
            .field(Field::new("fill_line_mm", "Fill line above the base, mm", Entry::Decimal).width(8))
            .field(
                Field::new("photo", "Photo", Entry::File)
                    .hint("PNG or JPEG, at most 10 MiB. May stay empty."),
            )
            .field(
                Field::new("why", "Why a recorded one is corrected", Entry::Text)
                    .hint("Only for a correction, at least ten characters."),
            );
    Ok(Some(form.quiet()))
}

pub fn typed(typed: &mut Typed<'_>) -> Option<NewObservation> {
    let age = typed.choice("age");
    let rule =
        |label: &str, most: i64| NumberRule { most_decimals: 4, ..NumberRule::between(label, 0, most) };
    let weight = typed.decimal("weight_g", &rule("Weight", 100_000));
    let bed = typed.maybe_decimal("bed_top_mm", &rule("Top of the bed", 2_000));
    let fill = typed.maybe_decimal("fill_line_mm", &rule("Fill line", 2_000));
    let why = typed.maybe_text("why", 300);
    let age = age?;
    let pull = if age == AT_LOADING { None } else { Some(age.parse().ok()?) };
    Some(NewObservation {
        pull,
        weight_g: weight?.value,
        bed_top_mm: bed?.map(|number| number.value),
        fill_line_mm: fill?.map(|number| number.value),
        why: why?.unwrap_or_default(),
    })
}
