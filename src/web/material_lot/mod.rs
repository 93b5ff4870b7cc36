//! Material lots: the list, receiving, and one with its status, assay, ledger and history.

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::{Signatures, Trail};
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::material_lot::{MaterialLotFacts, NewMaterialLot, may_use};
use crate::domain::moment::date_shown;
use crate::domain::stock::UNITS;
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::material_lot::{Assay, MaterialLot, StatusLine};
use crate::store::stock::StockEntry;

mod change;

pub const ROUTES: &[Route] = &[
    get("/material-lots", list),
    get("/material-lots/new", new_page),
    post("/material-lots/new", &[Act::ReceiveMaterialLot], receive),
    get("/material-lots/{id}", one),
    get("/material-lots/{id}/status", change::status_page),
    post("/material-lots/{id}/status", &[Act::SignMaterialStatus], change::set_status),
    get("/material-lots/{id}/assay", change::assay_page),
    post("/material-lots/{id}/assay", &[Act::RecordMaterialAssay], change::record_assay),
    get("/material-lots/{id}/stock", change::stock_page),
    post("/material-lots/{id}/stock", &[Act::MoveStock], change::move_stock),
];

const PAGE: i64 = 50;
/// So many lines of a ledger stand on the page of its lot.
const LEDGER_LINES: i64 = 200;

/// Whether a step may take from it today: the first sentence of what stops it.
fn today_words(facts: &MaterialLotFacts, visit: &Visit) -> String {
    let wanted = (facts.material, facts.material_name.as_str());
    match may_use(facts, wanted, visit.at.date()) {
        Ok(()) if facts.balance.is_zero() => "released, nothing left".to_string(),
        Ok(()) => "may be dispensed".to_string(),
        Err(refusal) => {
            let sentence = refusal.to_string();
            let first = sentence.split(". ").next().unwrap_or_default().trim_end_matches('.');
            first.trim_start_matches(&facts.number).trim_start().to_string()
        }
    }
}

fn last_day(facts: &MaterialLotFacts) -> String {
    let days = [("retest", facts.retest_on), ("expires", facts.expires_on)];
    let words: Vec<String> =
        days.iter().filter_map(|(what, day)| day.map(|day| format!("{what} {}", date_shown(day)))).collect();
    words.join(", ")
}

fn balance(facts: &MaterialLotFacts) -> String {
    show::with_unit(&facts.balance.normalize().to_string(), &facts.unit)
}

fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&["before"])?;
    let before = visit.query.get("before").and_then(|text| text.parse().ok());
    let found = visit.read(|reader| store::material_lot::before(reader, before, PAGE + 1))?;
    let has_older = found.len() as i64 > PAGE;
    let shown: Vec<MaterialLot> = found.into_iter().take(PAGE as usize).collect();
    let usable = shown.iter().filter(|lot| today_words(&lot.facts, visit) == "may be dispensed").count();
    let lead = format!(
        "{}{}, {usable} of them may be dispensed today. A label is scanned or typed into the search box above.",
        show::counted(shown.len(), "material lot", "material lots"),
        if has_older || before.is_some() { " on this page" } else { "" }
    );
    let older =
        shown.last().map(|lot| format!("/material-lots?before={}", lot.facts.id)).filter(|_| has_older);
    let empty =
        "No material lot is received yet. The operator or the lab manager receives the first delivery.";
    let heads = ["Material lot", "Material", "Status", "Today", "Last day", "Balance#"];
    let table = Table::new("Newest first", &heads, empty).rows(shown.iter().map(|lot| {
        vec![
            Cell::Link {
                path: format!("/material-lots/{}", lot.facts.id),
                words: lot.facts.number.clone(),
                note: format!("{} {}", lot.supplier, lot.supplier_lot),
            },
            Cell::text(&lot.facts.material_name),
            Cell::text(lot.facts.status.words()),
            Cell::text(today_words(&lot.facts, visit)),
            Cell::text(last_day(&lot.facts)),
            Cell::number(balance(&lot.facts)),
        ]
    }));
    Record::new(Shell::of(visit, "Material lots").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::ReceiveMaterialLot), "/material-lots/new", "Receive a material lot")
        .table("", table)
        .quiet_link_if(older.is_some(), older.unwrap_or_default(), "Older material lots")
        .show()
}

const NEW_LEAD: &str = "A delivery comes in under quarantine. QA releases or rejects it by signature.";

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let materials = visit.read(store::material::all)?;
    let choices =
        materials.into_iter().map(|one| (one.id.to_string(), format!("{} ({})", one.name, one.code)));
    let on = |name: &str, label: &str| Field::new(name, label, Entry::Date).width(12);
    Ok(Form::new(visit, "/material-lots/new", "Receive the material lot")?
        .field(Field::new("material", "Material", Entry::Select).choices(choices))
        .field(
            Field::new("number", "Our number, as on its label", Entry::Text)
                .width(20)
                .hint("Never used twice. A scan gives exactly this text."),
        )
        .field(Field::new("supplier", "Supplier", Entry::Text))
        .field(Field::new("supplier_lot", "Supplier's lot", Entry::Text).width(20))
        .field(on("received_on", "Received on").value(date_shown(visit.at.date())))
        .field(Field::new("quantity", "Quantity", Entry::Decimal).width(12))
        .field(Field::new("unit", "Unit", Entry::Select).choices(UNITS.map(|unit| (unit, unit))))
        .field(Field::new("packages", "Packages, where counted", Entry::Count).width(4))
        .field(on("retest_on", "Retest on").hint("The last day before it is tested again."))
        .field(on("expires_on", "Expires on").hint("The last day of use. One of the two days is needed."))
        .field(Field::new("location", "Where it stands", Entry::Text).width(20)))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Receive a material lot", NEW_LEAD, new_form(visit)?)
}

fn typed_new(typed: &mut Typed<'_>) -> Option<NewMaterialLot> {
    let (material, number) = (typed.record("material"), typed.text("number", 40));
    let (supplier, supplier_lot) = (typed.text("supplier", 120), typed.text("supplier_lot", 60));
    let received_on = typed.date("received_on");
    let quantity = typed.decimal("quantity", &NumberRule::between("Quantity", 0, 1_000_000_000));
    let unit = typed.choice("unit");
    let packages = typed.maybe_count("packages", 1, 10_000);
    let (retest_on, expires_on) = (maybe_date(typed, "retest_on"), maybe_date(typed, "expires_on"));
    let location = typed.text("location", 80);
    Some(NewMaterialLot {
        material: material?,
        number: number?,
        supplier: supplier?,
        supplier_lot: supplier_lot?,
        received_on: received_on?,
        quantity: quantity?.value,
        unit: unit?,
        packages: packages?,
        retest_on: retest_on?,
        expires_on: expires_on?,
        location: location?,
    })
}

/// A date that may be missing.
pub fn maybe_date(typed: &mut Typed<'_>, name: &str) -> Option<Option<chrono::NaiveDate>> {
    if typed.raw(name).is_empty() { Some(None) } else { typed.date(name).map(Some) }
}

fn receive(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Receive a material lot",
        NEW_LEAD,
        new_form(visit)?,
        typed_new,
        |actor, new| acts::material_lot::receive(visit.db(), actor, &new),
        |id| format!("/material-lots/{id}"),
    )
}

fn ledger(lines: &[StockEntry], unit: &str, visit: &Visit) -> Table {
    let caption = format!("Newest first, in {unit}");
    let heads = ["When", "What", "Quantity#", "Balance#", "Lot", "Why", "By"];
    Table::new(&caption, &heads, "Nothing has moved yet.").rows(lines.iter().map(|line| {
        let by = match &line.witness {
            Some(witness) => format!("{}, seen by {witness}", line.by),
            None => line.by.clone(),
        };
        vec![
            Cell::text(show::instant(&line.at, visit.at.zone)),
            Cell::text(&line.kind),
            Cell::number(line.quantity.to_string()),
            Cell::number(line.balance.to_string()),
            match &line.lot {
                Some((id, number)) => Cell::link(format!("/lots/{id}"), number),
                None => Cell::text(""),
            },
            Cell::text(&line.why),
            Cell::text(by),
        ]
    }))
}

fn assay_table(found: &[Assay], visit: &Visit) -> Table {
    let heads = ["Recorded", "Assay#", "Referred to", "Water or loss on drying#", "Reference", "By"];
    let empty =
        "No assay is recorded. Where a master record corrects an amount by it, record it before dispensing.";
    Table::new("Newest first; the newest counts", &heads, empty).rows(found.iter().map(|one| {
        let new = &one.recorded;
        let assay = new.assay.map(|value| show::with_unit(&value.to_string(), &new.assay_unit));
        let water = new.water.map(|value| show::with_unit(&value.to_string(), &new.water_unit));
        vec![
            Cell::text(show::instant(&one.at, visit.at.zone)),
            Cell::number_or_missing(assay, "not stated"),
            Cell::text(&new.assay_basis),
            Cell::number_or_missing(water, "not stated"),
            Cell::text(&new.reference),
            Cell::text(&one.by),
        ]
    }))
}

fn status_table(found: &[StatusLine], visit: &Visit) -> Table {
    let heads = ["When", "Status", "Next retest", "Because", "By"];
    Table::new("Newest first; the newest counts", &heads, "").rows(found.iter().map(|line| {
        vec![
            Cell::text(show::instant(&line.at, visit.at.zone)),
            Cell::text(&line.status),
            Cell::or_missing(line.retest_on.map(date_shown), "as before"),
            Cell::text(&line.why),
            Cell::text(&line.by),
        ]
    }))
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (lot, statuses, assays, lines, signed, trail) = visit.read(|reader| {
        Ok((
            store::material_lot::get(reader, id)?,
            store::material_lot::statuses(reader, id)?,
            store::material_lot::assays(reader, id)?,
            store::stock::of_material_lot(reader, id, LEDGER_LINES)?,
            signatures(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::MaterialLot, id))?,
        ))
    })?;
    let facts = &lot.facts;
    let lead = format!("{}: {}.", facts.material_name, today_words(facts, visit));
    let path = |page: &str| format!("/material-lots/{id}/{page}");
    Record::new(Shell::of(visit, &facts.number).crumb("/material-lots", "Material lots"), lead)
        .fact("Material", format!("{} ({})", facts.material_name, lot.material_code))
        .fact("Status", facts.status.words())
        .fact("Balance", balance(facts))
        .fact("Last day", last_day(facts))
        .fact("Supplier", format!("{}, lot {}", lot.supplier, lot.supplier_lot))
        .fact("Received", received(&lot))
        .fact("Where it stands", &lot.location)
        .link_if(visit.may(Act::SignMaterialStatus), path("status"), "Sign its status")
        .quiet_link_if(visit.may(Act::RecordMaterialAssay), path("assay"), "Record assay and water")
        .quiet_link_if(visit.may(Act::MoveStock), path("stock"), "Adjust, destroy or bring back")
        .quiet_link_if(true, path("label"), "Label")
        .quiet_link_if(
            visit.may(Act::OpenDeviation),
            format!("/deviations/new?material_lot={id}"),
            "Open a deviation",
        )
        .table("Ledger", ledger(&lines, &facts.unit, visit))
        .table("Assay and water", assay_table(&assays, visit))
        .table("Status", status_table(&statuses, visit))
        .signatures(Signatures::each(signed, visit.at.zone))
        .trail(Trail::of(&trail, visit.at.zone))
        .show()
}

/// The signatures under a material lot, each with the digest of what it went over as it stands now.
fn signatures(
    reader: &store::Reader<'_>,
    id: i64,
) -> Result<Vec<(store::signature::Signature, String)>, Failure> {
    let signed = store::signature::of(reader, Kind::MaterialLot, id)?;
    let with_digest = signed.into_iter().map(|one| {
        let text = store::material_lot::canonical_of_signature(reader, one.id)?;
        Ok((one, sha256_hex(text.unwrap_or_default().as_bytes())))
    });
    with_digest.collect()
}

fn received(lot: &MaterialLot) -> String {
    let quantity = show::with_unit(&lot.quantity, &lot.facts.unit);
    let packages = lot.packages.map(|count| format!(" in {count} packages")).unwrap_or_default();
    format!("{}, {quantity}{packages}", date_shown(lot.received_on))
}

/// A lot named by its number, as scanned or typed; may be missing.
pub fn typed_lot(typed: &mut Typed<'_>, name: &str) -> Option<Option<i64>> {
    let Some(number) = typed.maybe_text(name, 60)? else { return Some(None) };
    let visit = typed.visit;
    match visit.read(|reader| store::lot::by_number(reader, &number)) {
        Ok(Some(lot)) => Some(Some(lot.id)),
        _ => {
            typed.fault(name, format!("There is no lot {number}. Check its number."));
            None
        }
    }
}

/// A record named by what its label says; may be missing.
pub fn typed_label<T>(
    typed: &mut Typed<'_>,
    name: &str,
    what: &str,
    find: impl FnOnce(&store::Reader<'_>, &str) -> Result<Option<T>, Failure>,
) -> Option<Option<T>> {
    let Some(text) = typed.maybe_text(name, 60)? else { return Some(None) };
    let visit = typed.visit;
    match visit.read(|reader| find(reader, &text)) {
        Ok(Some(found)) => Some(Some(found)),
        _ => {
            typed.fault(name, format!("There is no {what} {text}. Scan its label, or check what was typed."));
            None
        }
    }
}
