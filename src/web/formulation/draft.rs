//! Writing a version: the ingredient grid, target and physical data; a new version begins as a copy.

use rust_decimal::Decimal;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::page::Shell;
use super::super::reply::{Outcome, page_with, see};
use super::super::show;
use super::super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::formulation::{
    FormulationContent, Ingredient, IntendedState, PHYSICAL, PhysicalData, UNITS, basis_unit,
};
use crate::domain::master::MasterRecord;
use crate::domain::material::FUNCTIONS;
use crate::domain::product::DOSAGE_FORMS;
use crate::domain::role::Role;
use crate::domain::typed::NumberRule;
use crate::domain::version::{VersionRefusal, VersionState, Versioned};
use crate::store;
use crate::store::material::Material;
use crate::store::version::Version;

const OF: Versioned = Versioned::Formulation;
/// A form offers this many empty rows after those that are filled; at most [`MOST_ROWS`] are taken.
const SPARE_ROWS: usize = 8;
const MOST_ROWS: usize = 60;

/// What a draft's form is filled from.
struct Filled<'a> {
    content: &'a FormulationContent,
    reason: &'a str,
    action: &'a str,
    button: &'a str,
}

fn row_fields(row: usize, ingredient: Option<&Ingredient>, materials: &[Material]) -> Vec<Field> {
    let name = |field: &str| format!("ingredient.{row}.{field}");
    let label = |what: &str| format!("{what}, ingredient {row}");
    let text = |value: Option<String>| value.unwrap_or_default();
    let quantity = ingredient
        .filter(|one| !(one.is_quantity_sufficient && one.quantity.is_zero()))
        .map(|one| one.quantity.to_string());
    let is_sufficient = ingredient.is_some_and(|one| one.is_quantity_sufficient);
    vec![
        Field::new(&name("material"), &label("Material"), Entry::Select)
            .choices(materials.iter().map(|one| (one.id.to_string(), format!("{}, {}", one.name, one.code))))
            .value(text(ingredient.map(|one| one.material.to_string()))),
        Field::new(&name("quantity"), &label("Quantity"), Entry::Decimal).width(8).value(text(quantity)),
        Field::new(&name("unit"), &label("Unit"), Entry::Select)
            .choices(UNITS.map(|unit| (unit, unit)))
            .value(text(ingredient.map(|one| one.unit.clone()))),
        Field::new(&name("function"), &label("Function"), Entry::Select)
            .choices(FUNCTIONS.map(|one| (one, one)))
            .value(text(ingredient.map(|one| one.function.clone()))),
        Field::new(&name("qs"), &label("Quantity sufficient"), Entry::Tick).value(if is_sufficient {
            "yes"
        } else {
            ""
        }),
    ]
}

/// How many rows the form has: as many as were sent, else the filled ones and some to spare.
fn row_count(visit: &Visit, filled: usize) -> usize {
    let sent =
        visit.form.iter().filter(|(name, _)| name.starts_with("ingredient.") && name.ends_with(".unit"));
    match sent.count() {
        0 => (filled + SPARE_ROWS).clamp(12, MOST_ROWS),
        sent => sent.min(MOST_ROWS),
    }
}

fn draft_form(visit: &Visit, materials: &[Material], filled: &Filled<'_>) -> Result<Form, Failure> {
    let content = filled.content;
    let rows = row_count(visit, content.ingredients.len());
    let rows = (1..=rows).map(|row| row_fields(row, content.ingredients.get(row - 1), materials)).collect();
    let mut form = Form::new(visit, filled.action, filled.button)?
        .field(
            Field::new("reason", "Why this version exists", Entry::Text)
                .hint("At least ten characters; it stands beside the version for good.")
                .value(filled.reason),
        )
        .field(
            Field::new("dosage_form", "Dosage form", Entry::Select)
                .choices(DOSAGE_FORMS.map(|one| (one, one)))
                .value(content.dosage_form.as_str()),
        )
        .field(
            Field::new("intended_state", "Intended state", Entry::Radios)
                .choices(IntendedState::ALL.map(|state| (state.words(), state.words())))
                .value(content.intended_state.words()),
        )
        .field(
            Field::new("quantity_basis", "Quantities are stated per", Entry::Text)
                .width(12)
                .hint("Such as 100 mL, 100 g or % (w/w).")
                .value(content.quantity_basis.as_str()),
        )
        .field(
            Field::new("target_total", "Target total, in the unit of the basis", Entry::Decimal)
                .width(12)
                .hint("The sum the quantities should reach, with its decimals. May be left empty.")
                .value(content.target_total.map(|total| total.to_string()).unwrap_or_default()),
        )
        .heading(
            "Ingredients",
            "Rows without a material are left out. q.s.: made up to the target, at most one.",
        )
        .grid("Ingredients", &["Material", "Quantity", "Unit", "Function", "q.s."], rows)
        .heading("Physical data", "What settling and flow are computed from. Each may be left empty.");
    for ((name, label), value) in PHYSICAL.iter().zip(content.physical.values()) {
        let value = value.map(|value| value.to_string()).unwrap_or_default();
        form = form.field(Field::new(name, label, Entry::Decimal).width(12).value(value));
    }
    Ok(form)
}

/// One row as typed: `Some(None)` for a row that is left empty.
fn typed_row(typed: &mut Typed<'_>, row: usize, materials: &[Material]) -> Option<Option<Ingredient>> {
    let name = |field: &str| format!("ingredient.{row}.{field}");
    let is_sufficient = typed.tick(&name("qs"));
    if typed.raw(&name("material")).is_empty() {
        if !typed.raw(&name("quantity")).is_empty() || is_sufficient {
            typed.fault(
                &name("material"),
                format!("Ingredient {row} has no material. Choose it, or empty the row."),
            );
            return None;
        }
        return Some(None);
    }
    let material = typed.record(&name("material"));
    let label = format!("Quantity, ingredient {row}");
    let rule = NumberRule::between(&label, 0, 1_000_000);
    let quantity = if is_sufficient {
        typed
            .maybe_decimal(&name("quantity"), &rule)
            .map(|number| number.map_or(Decimal::ZERO, |one| one.value))
    } else {
        typed.decimal(&name("quantity"), &rule).map(|number| number.value)
    };
    let unit = if is_sufficient && typed.raw(&name("unit")).is_empty() {
        Some(basis_unit(&typed.raw("quantity_basis")).to_string())
    } else {
        typed.choice(&name("unit"))
    };
    let function = typed.maybe_choice(&name("function"));
    let material = materials.iter().find(|one| Some(one.id) == material)?;
    Some(Some(Ingredient {
        material: material.id,
        material_code: material.code.clone(),
        name: material.name.clone(),
        function: function?.unwrap_or_else(|| material.function.clone()),
        quantity: quantity?,
        unit: unit?,
        is_quantity_sufficient: is_sufficient,
    }))
}

/// What was typed: the reason, the content, and the row each ingredient stood in.
struct Draft {
    reason: String,
    content: FormulationContent,
    rows: Vec<usize>,
    seen: String,
}

/// The master record is no part of this form: it stays as it is.
fn typed_draft(
    typed: &mut Typed<'_>,
    count: usize,
    materials: &[Material],
    master: Option<MasterRecord>,
) -> Option<Draft> {
    let reason = typed.reason("reason").and_then(|reason| reason.text().map(str::to_string));
    let dosage_form = typed.choice("dosage_form");
    let state = typed.choice("intended_state");
    let state = state.and_then(|words| IntendedState::ALL.into_iter().find(|state| state.words() == words));
    let basis = typed.text("quantity_basis", 40);
    let target = typed.maybe_decimal("target_total", &NumberRule::between("Target total", 0, 1_000_000));
    let rows: Vec<_> = (1..=count).map(|row| (row, typed_row(typed, row, materials))).collect();
    let physical: Vec<_> = PHYSICAL
        .iter()
        .map(|(name, label)| typed.maybe_decimal(name, &NumberRule::between(label, 0, 1_000_000)))
        .collect();
    let mut ingredients = Vec::new();
    let mut at = Vec::new();
    for (row, ingredient) in rows {
        if let Some(ingredient) = ingredient? {
            ingredients.push(ingredient);
            at.push(row);
        }
    }
    let mut values = [None; 5];
    for (value, read) in values.iter_mut().zip(physical) {
        *value = read?.map(|number| number.value);
    }
    let content = FormulationContent {
        dosage_form: dosage_form?,
        intended_state: state?,
        ingredients,
        quantity_basis: basis?,
        target_total: target?.map(|number| number.value),
        physical: PhysicalData::from_values(values),
        master,
    };
    Some(Draft { reason: reason?, content, rows: at, seen: typed.raw("seen") })
}

/// Leads a refusal from the position in the content to the row it was typed in.
fn at_its_row<T>(answer: Result<T, Failure>, rows: &[usize]) -> Result<T, Failure> {
    let Err(Failure::Refused(mut refusal)) = answer else { return answer };
    refusal.field = refusal.field.map(|field| {
        let mut parts = field.splitn(3, '.');
        match (parts.next(), parts.next().and_then(|text| text.parse::<usize>().ok()), parts.next()) {
            (Some("ingredient"), Some(position), Some(rest)) => {
                let row = rows.get(position.wrapping_sub(1)).copied().unwrap_or(position);
                format!("ingredient.{row}.{rest}")
            }
            _ => field,
        }
    });
    Err(Failure::Refused(refusal))
}

const LEAD: &str = "A draft can be changed until its author signs it. The sum is told on the version's page.";

fn draft_page(status: u16, visit: &Visit, title: &str, form: Form) -> Outcome {
    let shell = Shell::of(visit, title).crumb("/formulations", "Formulations").with_errors(&form);
    page_with(status, &form::FormPage { shell, lead: LEAD.to_string(), note: String::new(), form })
}

/// The form of a new version: a copy of the newest, or nearly empty.
fn new_form(visit: &Visit, materials: &[Material]) -> Result<(String, Form), Failure> {
    visit.needs_role(&[Role::Formulator], Act::DraftFormulationVersion)?;
    let id = visit.id("id")?;
    let (owner, product, newest) = visit.read(|reader| {
        let owner = store::formulation::get(reader, id)?;
        let product = store::product::get(reader, owner.product)?;
        let newest = store::version::of_parent(reader, OF, id)?.into_iter().next();
        Ok((owner, product, newest))
    })?;
    let content = match &newest {
        Some(newest) => newest.read()?,
        None => FormulationContent {
            dosage_form: product.dosage_form,
            quantity_basis: "100 mL".to_string(),
            ..FormulationContent::default()
        },
    };
    let number = newest.map_or(1, |newest| newest.number + 1);
    let action = format!("/formulations/{id}/draft");
    let filled = Filled { content: &content, reason: "", action: &action, button: "Write the draft" };
    Ok((format!("{}: write version {number}", owner.code), draft_form(visit, materials, &filled)?))
}

pub fn new_page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let newest = visit.read(|reader| store::version::of_parent(reader, OF, id))?.into_iter().next();
    if let Some(open) = newest.filter(|newest| newest.state == VersionState::Draft) {
        return see(format!("/formulation-versions/{}/edit", open.id));
    }
    let materials = visit.read(store::material::all)?;
    let (title, form) = new_form(visit, &materials)?;
    draft_page(200, visit, &title, form)
}

pub fn write(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let materials = visit.read(store::material::all)?;
    let (title, form) = new_form(visit, &materials)?;
    let newest = visit.read(|reader| store::version::of_parent(reader, OF, id))?.into_iter().next();
    let master = newest.map(|newest| newest.read::<FormulationContent>()).transpose()?;
    let master = master.and_then(|content| content.master);
    let count = row_count(visit, 0);
    form::submit(
        visit,
        form,
        |typed| typed_draft(typed, count, &materials, master),
        |actor, draft| {
            let written = acts::formulation::draft(visit.db(), actor, id, &draft.reason, &draft.content);
            at_its_row(written, &draft.rows)
        },
        |version| format!("/formulation-versions/{version}"),
        |status, form| draft_page(status, visit, &title, form),
    )
}

/// The form of a draft that exists; frozen versions have none.
fn edit_form(visit: &Visit, materials: &[Material]) -> Result<(Version, String, Form), Failure> {
    visit.needs_role(&[Role::Formulator], Act::DraftFormulationVersion)?;
    let id = visit.id("id")?;
    let (version, owner) = visit.read(|reader| {
        let version = store::version::get(reader, OF, id)?;
        let owner = store::formulation::get(reader, version.parent)?;
        Ok((version, owner))
    })?;
    if version.state != VersionState::Draft {
        return Err(VersionRefusal::VersionFrozen.into());
    }
    let content = version.read()?;
    let action = format!("/formulation-versions/{id}/edit");
    let filled =
        Filled { content: &content, reason: &version.reason, action: &action, button: "Change the draft" };
    let seen = visit.form.get("seen").map_or_else(|| version.digest(), str::to_string);
    let form = draft_form(visit, materials, &filled)?.hide("seen", seen);
    Ok((version.clone(), format!("{}: change draft version {}", owner.code, version.number), form))
}

pub fn edit_page(visit: &Visit) -> Outcome {
    let materials = visit.read(store::material::all)?;
    let (_, title, form) = edit_form(visit, &materials)?;
    draft_page(200, visit, &title, form)
}

/// Once both contents are shown, sending the form again means it: it then carries the digest of what stands
/// there.
fn after_stale(visit: &Visit, version: &Version, mut form: Form) -> Form {
    if let Some(stale) = &mut form.stale {
        stale.changed_at = show::instant(&stale.changed_at, visit.at.zone);
        form.hidden.retain(|(name, _)| name != "seen");
        return form.hide("seen", version.digest());
    }
    form
}

pub fn rewrite(visit: &Visit) -> Outcome {
    let materials = visit.read(store::material::all)?;
    let (version, title, form) = edit_form(visit, &materials)?;
    let master = version.read::<FormulationContent>()?.master;
    let count = row_count(visit, 0);
    form::submit(
        visit,
        form,
        |typed| typed_draft(typed, count, &materials, master),
        |actor, draft| {
            let (db, reason) = (visit.db(), &draft.reason);
            let answer =
                acts::formulation::rewrite(db, actor, version.id, reason, &draft.content, &draft.seen);
            at_its_row(answer, &draft.rows)
        },
        |()| format!("/formulation-versions/{}", version.id),
        |status, form| draft_page(status, visit, &title, after_stale(visit, &version, form)),
    )
}
