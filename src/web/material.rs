//! Materials, by function in the trade's terms.

use super::field::{Entry, Field};
use super::form::{self, Form};
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
use crate::domain::material::{FUNCTIONS, NewMaterial};
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/materials", list),
    get("/materials/new", new_page),
    post("/materials/new", &[Act::AddMaterial], add),
    get("/materials/{id}", material),
];

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::material::all)?;
    let lead = format!(
        "{} from which formulations are written.",
        show::counted(found.len(), "material", "materials")
    );
    let empty = "No material is recorded yet. Formulation versions choose from this list; add the first one.";
    let table = Table::new("By name", &["Material", "Code", "Function", "Density, g/mL#"], empty).rows(
        found.iter().map(|one| {
            vec![
                Cell::link(format!("/materials/{}", one.id), &one.name),
                Cell::text(&one.code),
                Cell::text(&one.function),
                Cell::number_or_missing(one.density_g_per_ml.map(|one| one.to_string()), "not stated"),
            ]
        }),
    );
    Record::new(Shell::of(visit, "Materials").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddMaterial), "/materials/new", "Add a material")
        .table("", table)
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/materials/new", "Add the material")?
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Never used twice."))
        .field(Field::new("name", "Name, with grade where it matters", Entry::Text))
        .field(
            Field::new("function", "Function", Entry::Select)
                .choices(FUNCTIONS.map(|one| (one, one)))
                .hint("What it mostly does; a formulation version can name another."),
        )
        .field(
            Field::new("density_g_per_ml", "Density, g/mL", Entry::Decimal)
                .width(8)
                .hint("True density of a solid. May be left empty."),
        ))
}

const NEW_LEAD: &str =
    "A material is named once; formulation versions keep the name it had when they were written.";

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Add a material", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a material",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (code, name) = (typed.text("code", 40), typed.text("name", 120));
            let function = typed.choice("function");
            let rule = NumberRule::between("Density", 0, 25).unit("g/mL");
            let density = typed.maybe_decimal("density_g_per_ml", &rule);
            Some(NewMaterial {
                code: code?,
                name: name?,
                function: function?,
                density_g_per_ml: density?.map(|number| number.value),
            })
        },
        |actor, new| acts::material::add(visit.db(), actor, &new),
        |id| format!("/materials/{id}"),
    )
}

fn material(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (one, uses, lines) = visit.read(|reader| {
        Ok((
            store::material::get(reader, id)?,
            store::material::uses(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Material, id))?,
        ))
    })?;
    let empty = "No formulation version names it yet.";
    let heads = ["Formulation version", "Quantity#", "Unit", "Function there"];
    let table =
        Table::new("By formulation, newest version first", &heads, empty).rows(uses.iter().map(|one| {
            vec![
                Cell::link(
                    format!("/formulation-versions/{}", one.formulation_version),
                    format!("{} version {}", one.formulation_code, one.number),
                ),
                Cell::number(&one.quantity),
                Cell::text(&one.unit),
                Cell::text(&one.function),
            ]
        }));
    let density = one.density_g_per_ml.map_or("not stated".to_string(), |density| density.to_string());
    Record::new(Shell::of(visit, &one.name).crumb("/materials", "Materials"), "")
        .fact("Code", &one.code)
        .fact("Function", &one.function)
        .fact("Density, g/mL", density)
        .table("Used in", table)
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}
