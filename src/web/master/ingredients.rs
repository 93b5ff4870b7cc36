//! Batch sizes, and how each ingredient is weighed.

use rust_decimal::Decimal;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::rows::{name, shown};
use super::super::visit::Visit;
use super::Draft;
use crate::domain::failure::Failure;
use crate::domain::formulation::Ingredient;
use crate::domain::master::scale::{Dimension, basis_of};
use crate::domain::master::{MasterIngredient, MasterRecord, Potency, SIZE_UNITS, Tolerance, WEIGHING_UNITS};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::material::Material;

const SIZES: usize = 4;
const LEAD: &str =
    "Amounts are the version's quantities, scaled to a batch size and rounded to the balance's step.";
const HEADS: [&str; 10] = [
    "Ingredient",
    "Weighed in",
    "Rounded to",
    "Overage, %",
    "Below",
    "Above",
    "Tolerance in %",
    "Correct for assay",
    "Salt factor",
    "Stays solid",
];

fn row_fields(row: usize, ingredient: &Ingredient, master: Option<&MasterIngredient>) -> Vec<Field> {
    let field = |what: &str, label: &str, entry: Entry| {
        Field::new(&name("weigh", row, what), &format!("{label}, {}", ingredient.name), entry)
    };
    let decimal = |what: &str, label: &str, value: Option<Decimal>| {
        field(what, label, Entry::Decimal).width(8).value(shown(value))
    };
    let tick = |what: &str, label: &str, is_so: bool| {
        field(what, label, Entry::Tick).value(if is_so { "yes" } else { "" })
    };
    let tolerance = master.map(|one| one.tolerance);
    let is_percent = tolerance.is_none_or(|tolerance| tolerance.is_percent);
    let is_active = ingredient.function == "active";
    let overage = master.map(|one| one.overage_percent).filter(|overage| !overage.is_zero());
    let salt = master.and_then(|one| one.potency).map(|potency| potency.salt_factor);
    vec![
        field("name", "Ingredient", Entry::Fixed).value(ingredient.name.as_str()),
        field("unit", "Weighed in", Entry::Select)
            .choices(WEIGHING_UNITS.map(|unit| (unit, unit)))
            .value(master.map(|one| one.unit.clone()).unwrap_or_default()),
        decimal("step", "Rounded to", master.map(|one| one.rounding_step)),
        decimal("overage", "Overage in %", overage),
        decimal("below", "Tolerance below", tolerance.and_then(|one| one.below)),
        decimal("above", "Tolerance above", tolerance.and_then(|one| one.above)),
        tick("percent", "Tolerance in %", is_percent),
        tick("potency", "Correct for assay and water", salt.is_some()),
        decimal("salt", "Salt factor", salt.filter(|factor| *factor != Decimal::ONE)),
        tick("solid", "Stays solid", master.map_or(is_active, |one| one.is_undissolved)),
    ]
}

fn draft_form(visit: &Visit, draft: &Draft) -> Result<Form, Failure> {
    let master = draft.content.master.clone().unwrap_or_default();
    let sizes = (1..=SIZES).map(|at| {
        let size = master.batch_sizes.get(at - 1).copied();
        Field::new(&format!("size.{at}"), &format!("Batch size {at}"), Entry::Decimal)
            .width(8)
            .value(shown(size))
    });
    let unit = if master.size_unit.is_empty() { usual_unit(draft) } else { &master.size_unit };
    let rows = draft.content.ingredients.iter().enumerate();
    let rows = rows.map(|(at, one)| row_fields(at + 1, one, master.ingredient(one.material))).collect();
    Ok(draft
        .form(visit, "/master", "Save sizes and weighing")?
        .grid("Batch sizes a lot may be made in", &["First", "Second", "Third", "Fourth"], vec![sizes.collect()])
        .field(
            Field::new("size_unit", "Unit of the batch sizes", Entry::Select)
                .choices(SIZE_UNITS.map(|unit| (unit, unit)))
                .value(unit),
        )
        .heading(
            "Weighing",
            "A tolerance has one side or two; an empty box leaves its side open. Correction for assay and water is \
             computed from the material lot at hand, with a salt factor where one is typed.",
        )
        .grid("How each ingredient is weighed", &HEADS, rows))
}

fn usual_unit(draft: &Draft) -> &'static str {
    match basis_of(&draft.content.quantity_basis) {
        Some((Dimension::Mass, _)) => "kg",
        _ => "L",
    }
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let draft = Draft::of(visit)?;
    let form = draft_form(visit, &draft)?;
    draft.show(200, visit, "sizes and weighing", LEAD, form)
}

/// What was typed: sizes, their unit, the rows, and the digest of what the form was filled from.
struct Written {
    sizes: Vec<Decimal>,
    size_unit: String,
    ingredients: Vec<MasterIngredient>,
    seen: String,
}

fn typed_row(
    typed: &mut Typed<'_>,
    row: usize,
    ingredient: &Ingredient,
    materials: &[Material],
) -> Option<MasterIngredient> {
    let at = |what: &str| name("weigh", row, what);
    let rule = |label: &str| NumberRule {
        label: format!("{label}, {}", ingredient.name),
        ..NumberRule::between(label, 0, 1_000_000)
    };
    let unit = typed.choice(&at("unit"));
    let step = typed.decimal(&at("step"), &rule("Rounded to"));
    let overage = typed.maybe_decimal(&at("overage"), &rule("Overage in %"));
    let below = typed.maybe_decimal(&at("below"), &rule("Tolerance below"));
    let above = typed.maybe_decimal(&at("above"), &rule("Tolerance above"));
    let salt = typed.maybe_decimal(&at("salt"), &rule("Salt factor"));
    let value = |number: Option<crate::domain::typed::Number>| number.map(|number| number.value);
    let salt = value(salt?);
    let is_corrected = typed.tick(&at("potency")) || salt.is_some();
    let density = materials.iter().find(|one| one.id == ingredient.material);
    Some(MasterIngredient {
        material: ingredient.material,
        name: ingredient.name.clone(),
        unit: unit?,
        rounding_step: step?.value,
        overage_percent: value(overage?).unwrap_or_default(),
        tolerance: Tolerance {
            below: value(below?),
            above: value(above?),
            is_percent: typed.tick(&at("percent")),
        },
        potency: is_corrected.then(|| Potency { salt_factor: salt.unwrap_or(Decimal::ONE) }),
        is_undissolved: typed.tick(&at("solid")),
        density_g_per_ml: density.and_then(|one| one.density_g_per_ml),
    })
}

fn typed_all(typed: &mut Typed<'_>, draft: &Draft, materials: &[Material]) -> Option<Written> {
    let rule = NumberRule::between("Batch size", 0, 10_000_000);
    let sizes: Vec<_> = (1..=SIZES).map(|at| typed.maybe_decimal(&format!("size.{at}"), &rule)).collect();
    let size_unit = typed.choice("size_unit");
    let rows: Vec<_> = draft
        .content
        .ingredients
        .iter()
        .enumerate()
        .map(|(at, one)| typed_row(typed, at + 1, one, materials))
        .collect();
    let sizes: Option<Vec<_>> = sizes.into_iter().collect();
    Some(Written {
        sizes: sizes?.into_iter().flatten().map(|number| number.value).collect(),
        size_unit: size_unit?,
        ingredients: rows.into_iter().collect::<Option<_>>()?,
        seen: typed.raw("seen"),
    })
}

pub fn write(visit: &Visit) -> Outcome {
    let draft = Draft::of(visit)?;
    let materials = visit.read(store::material::all)?;
    form::submit(
        visit,
        draft_form(visit, &draft)?,
        |typed| typed_all(typed, &draft, &materials),
        |actor, written| {
            draft.rewrite(visit, actor, &written.seen, |master: &mut MasterRecord| {
                master.batch_sizes = written.sizes;
                master.size_unit = written.size_unit;
                master.ingredients = written.ingredients;
            })
        },
        |()| format!("/formulation-versions/{}", draft.version.id),
        |status, form| draft.show(status, visit, "sizes and weighing", LEAD, form),
    )
}
