//! What changes a material lot: its status by signature, its assay and water, its stock.

use super::{balance, maybe_date, today_words, typed_lot};
use crate::acts;
use crate::acts::signature::{MaterialStatus as MaterialStatusMeaning, authenticate};
use crate::domain::failure::Failure;
use crate::domain::material_lot::{ASSAY_BASES, MaterialStatus, NewAssay, NewStatus};
use crate::domain::signature::Meaning;
use crate::domain::stock::{EntryKind, NewMovement};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::material_lot::MaterialLot;
use crate::web::failure::capital;
use crate::web::field::{Entry, Field};
use crate::web::form::{self, Form, Typed};
use crate::web::reply::Outcome;
use crate::web::visit::Visit;

fn status_form(visit: &Visit, lot: &MaterialLot) -> Result<Form, Failure> {
    let choices = [MaterialStatus::Released, MaterialStatus::Rejected, MaterialStatus::UsedUp];
    Ok(Form::new(visit, &format!("/material-lots/{}/status", lot.facts.id), "Sign the status")?
        .field(
            Field::new("status", "Status", Entry::Radios)
                .choices(choices.map(|status| (status.words(), capital(status.words())))),
        )
        .field(
            Field::new("retest_on", "Next retest, where this release follows one", Entry::Date)
                .width(12)
                .hint("May be left empty. It never lies after the expiry."),
        )
        .field(
            Field::new("why", "Because …", Entry::Long)
                .hint("Certificate or test record. It stands beside the signature."),
        )
        .signature(Meaning::MaterialStatus.words()))
}

fn status_lead(lot: &MaterialLot, visit: &Visit) -> String {
    format!("{}: {}.", lot.facts.material_name, today_words(&lot.facts, visit))
}

pub(super) fn status_page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    let title = format!("Status of {}", lot.facts.number);
    form::show(visit, &title, &status_lead(&lot, visit), status_form(visit, &lot)?)
}

pub(super) fn set_status(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit_page(
        visit,
        &format!("Status of {}", lot.facts.number),
        &status_lead(&lot, visit),
        status_form(visit, &lot)?,
        |typed| {
            let (status, why) = (typed.choice("status"), typed.text("why", 1000));
            let retest_on = maybe_date(typed, "retest_on");
            let status = MaterialStatus::from_words(&status?)?;
            let new = NewStatus { status, retest_on: retest_on?, why: why? };
            let password = typed.visit.form.get("password").unwrap_or_default().to_string();
            Some((new, typed.raw("user_name"), password))
        },
        |actor, (new, user_name, password)| {
            let signed = authenticate::<MaterialStatusMeaning>(db, secrets, actor, &user_name, &password)?;
            acts::material_lot::set_status(db, actor, id, &new, &signed.stating(&new.why))
        },
        |()| format!("/material-lots/{id}"),
    )
}

const ASSAY_LEAD: &str =
    "Assay and water by which a dispensed amount is corrected. The newest record counts.";

fn assay_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let units = ["% (w/w)", "mg/g", "g/mL"];
    Ok(Form::new(visit, &format!("/material-lots/{id}/assay"), "Record it")?
        .field(Field::new("assay", "Assay", Entry::Decimal).width(8).hint("May be left empty."))
        .field(
            Field::new("assay_unit", "Unit of the assay", Entry::Select).choices(units.map(|one| (one, one))),
        )
        .field(
            Field::new("assay_basis", "Assay refers to the material", Entry::Radios)
                .choices(ASSAY_BASES.map(|one| (one, one))),
        )
        .field(
            Field::new("water", "Water or loss on drying, % (w/w)", Entry::Decimal)
                .width(8)
                .hint("May be left empty."),
        )
        .field(Field::new("reference", "Certificate or test record", Entry::Text)))
}

pub(super) fn assay_page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    form::show(visit, &format!("Assay of {}", lot.facts.number), ASSAY_LEAD, assay_form(visit, id)?)
}

fn typed_assay(typed: &mut Typed<'_>) -> Option<NewAssay> {
    let assay = typed.maybe_decimal("assay", &NumberRule::between("Assay", 0, 2000));
    let water = typed.maybe_decimal("water", &NumberRule::between("Water", 0, 100).unit("%"));
    let has_assay = !typed.raw("assay").is_empty();
    let unit = if has_assay { typed.choice("assay_unit") } else { Some(String::new()) };
    let basis = if has_assay { typed.choice("assay_basis") } else { Some(String::new()) };
    let reference = typed.text("reference", 200);
    if !has_assay && typed.raw("water").is_empty() {
        typed.fault("assay", "Type the assay, the water, or both.");
    }
    Some(NewAssay {
        assay: assay?.map(|number| number.value),
        assay_unit: unit?,
        assay_basis: basis?,
        water: water?.map(|number| number.value),
        water_unit: "% (w/w)".to_string(),
        reference: reference?,
    })
}

pub(super) fn record_assay(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    form::submit_page(
        visit,
        &format!("Assay of {}", lot.facts.number),
        ASSAY_LEAD,
        assay_form(visit, id)?,
        typed_assay,
        |actor, new| acts::material_lot::record_assay(visit.db(), actor, id, &new),
        |()| format!("/material-lots/{id}"),
    )
}

fn stock_form(visit: &Visit, lot: &MaterialLot) -> Result<Form, Failure> {
    let people = visit.read(store::account::people)?;
    let people = people.into_iter().filter(|person| person.is_enabled);
    let kinds = [
        (EntryKind::Adjusted, "Adjust: the quantity is what was found"),
        (EntryKind::Destroyed, "Destroyed: the quantity is what was destroyed"),
        (EntryKind::Returned, "Brought back from a lot: the quantity is what came back"),
    ];
    let label = format!("Quantity, {}", lot.facts.unit);
    Ok(Form::new(visit, &format!("/material-lots/{}/stock", lot.facts.id), "Enter it in the ledger")?
        .field(
            Field::new("kind", "What moves", Entry::Radios)
                .choices(kinds.map(|(kind, words)| (kind.words(), words))),
        )
        .field(Field::new("quantity", &label, Entry::Decimal).width(12))
        .field(
            Field::new("lot", "Lot it comes back from", Entry::Text)
                .width(20)
                .hint("Only for what is brought back: scan or type the lot's number."),
        )
        .field(
            Field::new("witness", "Seen by, where it is destroyed", Entry::Select)
                .choices(people.map(|person| (person.id.to_string(), person.full_name))),
        )
        .field(Field::new("why", "Why", Entry::Text).hint("At least ten characters.")))
}

pub(super) fn stock_page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    form::show(visit, &stock_title(&lot), &stock_lead(&lot), stock_form(visit, &lot)?)
}

fn stock_title(lot: &MaterialLot) -> String {
    format!("Stock of {}", lot.facts.number)
}

fn stock_lead(lot: &MaterialLot) -> String {
    format!(
        "It holds {} by the ledger. What goes into a lot is taken at the step that weighs it.",
        balance(&lot.facts)
    )
}

fn typed_movement(typed: &mut Typed<'_>, unit: &str) -> Option<NewMovement> {
    let kind = typed.choice("kind");
    let rule = NumberRule::between("Quantity", -1_000_000_000, 1_000_000_000).unit(unit);
    let quantity = typed.decimal("quantity", &rule);
    let lot = typed_lot(typed, "lot");
    let witness = typed.maybe_record("witness");
    let why = typed.text("why", 400);
    let kind = EntryKind::from_words(&kind?)?;
    Some(NewMovement { kind, quantity: quantity?.value, lot: lot?, why: why?, witness: witness? })
}

pub(super) fn move_stock(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let lot = visit.read(|reader| store::material_lot::get(reader, id))?;
    form::submit_page(
        visit,
        &stock_title(&lot),
        &stock_lead(&lot),
        stock_form(visit, &lot)?,
        |typed| typed_movement(typed, &lot.facts.unit),
        |actor, new| acts::material_lot::move_stock(visit.db(), actor, id, &new),
        |_| format!("/material-lots/{id}"),
    )
}
