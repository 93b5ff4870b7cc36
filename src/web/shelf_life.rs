//! The shelf life of a presentation, assigned by QA.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::shelf_life::{ExpiryFormat, NewShelfLife, STORAGE_STATEMENTS, expiry};
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::product::Presentation;
use crate::store::shelf_life::ShelfLife;

pub const ROUTES: &[Route] = &[
    get("/presentations/{id}/shelf-life", shelf_life),
    post("/presentations/{id}/shelf-life", &[Act::AssignShelfLife], assign),
];

fn shelf_life(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let presentation = visit.read(|reader| store::product::presentation(reader, id))?;
    let form = if visit.may(Act::AssignShelfLife) { Some(assign_form(visit, &presentation)?) } else { None };
    shelf_life_page(200, visit, &presentation, form)
}

fn shelf_life_page(status: u16, visit: &Visit, presentation: &Presentation, form: Option<Form>) -> Outcome {
    let id = presentation.id;
    let (lives, lines) = visit.read(|reader| {
        Ok((
            store::shelf_life::of_presentation(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Presentation, id))?,
        ))
    })?;
    let mut shell = Shell::of(visit, &format!("Shelf life of {}", presentation.code))
        .crumb(format!("/products/{}", presentation.product), presentation.product_code.as_str())
        .crumb(format!("/presentations/{id}"), presentation.code.as_str());
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    let lead = "Assigned by a person from a report, never taken from a computation. Lots made before an \
                assignment's day keep the one they had.";
    let note = "One signature, under the whole assignment.";
    Record::new(shell, lead)
        .table("Assignments", table(&lives, visit))
        .form("Assign a shelf life", note, form)
        .trail(Trail::of(&lines, visit.at.zone))
        .show_with(status)
}

fn table(lives: &[ShelfLife], visit: &Visit) -> Table {
    let heads = [
        "From",
        "Market",
        "Months#",
        "In use, days#",
        "Storage statement",
        "Basis",
        "Expiry of a lot made today",
        "Reference",
        "Assigned by",
    ];
    let empty =
        "No shelf life is assigned yet. QA assigns one below; a lot released without it has no expiry.";
    Table::new("The latest first", &heads, empty).rows(lives.iter().map(|life| {
        let new = &life.assigned;
        let example = date_shown(expiry(visit.at.date(), new.months, new.expiry_format));
        vec![
            Cell::text(date_shown(new.effective_from)),
            Cell::text(&new.market),
            Cell::number(new.months.to_string()),
            Cell::number_or_missing(new.in_use_days.map(|days| days.to_string()), "not stated"),
            Cell::text(&new.storage_statement),
            Cell::text(&new.basis),
            Cell::noted(example, new.expiry_format.words()),
            Cell::text(&new.reference),
            Cell::noted(&life.assigned_by, show::instant(&life.assigned_at, visit.at.zone)),
        ]
    }))
}

fn assign_form(visit: &Visit, presentation: &Presentation) -> Result<Form, Failure> {
    let action = format!("/presentations/{}/shelf-life", presentation.id);
    Ok(Form::new(visit, &action, "Sign and assign")?
        .field(Field::new("market", "Market", Entry::Text).width(20).value(presentation.market.as_str()))
        .field(
            Field::new("storage_statement", "Storage statement", Entry::Select)
                .choices(STORAGE_STATEMENTS.map(|one| (one, one))),
        )
        .field(Field::new("months", "Shelf life, months", Entry::Count).width(4))
        .field(
            Field::new("in_use_days", "In use after opening or constitution, days", Entry::Count)
                .width(4)
                .hint("May be left empty."),
        )
        .field(Field::new("basis", "Basis", Entry::Radios).choices([
            ("tentative", "tentative: from data so far"),
            ("verified", "verified: from real time"),
        ]))
        .field(Field::new("reference", "Report, protocol or registration it rests on", Entry::Text))
        .field(
            Field::new("effective_from", "For lots made from", Entry::Date)
                .width(12)
                .value(date_shown(visit.at.date())),
        )
        .field(
            Field::new("expiry_format", "Expiry on the label", Entry::Radios)
                .choices(ExpiryFormat::ALL.map(|format| (format.code(), format.words()))),
        )
        .signature(Meaning::Approval.words()))
}

fn typed_shelf_life(typed: &mut Typed<'_>, presentation: i64) -> Option<NewShelfLife> {
    let market = typed.text("market", 80);
    let statement = typed.choice("storage_statement");
    let (months, in_use) = (typed.count("months", 1, 120), typed.maybe_count("in_use_days", 1, 1000));
    let (basis, reference) = (typed.choice("basis"), typed.text("reference", 200));
    let effective_from = typed.date("effective_from");
    let format = typed.choice("expiry_format").and_then(|code| ExpiryFormat::from_code(&code));
    Some(NewShelfLife {
        presentation,
        market: market?,
        storage_statement: statement?,
        months: u32::try_from(months?).ok()?,
        in_use_days: in_use?.and_then(|days| u32::try_from(days).ok()),
        basis: basis?,
        reference: reference?,
        effective_from: effective_from?,
        expiry_format: format?,
    })
}

fn assign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let presentation = visit.read(|reader| store::product::presentation(reader, id))?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        assign_form(visit, &presentation)?,
        |typed| {
            let new = typed_shelf_life(typed, id);
            let password = typed.visit.form.get("password")?.to_string();
            Some((new?, typed.raw("user_name"), password))
        },
        |actor, (new, user_name, password)| {
            let signed = acts::signature::authenticate(db, secrets, actor, &user_name, &password)?;
            acts::shelf_life::assign(db, actor, &new, &signed)
        },
        |_| format!("/presentations/{id}/shelf-life"),
        |status, form| shelf_life_page(status, visit, &presentation, Some(form)),
    )
}
