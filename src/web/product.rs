//! Customers, products and presentations.

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
use crate::domain::moment::date_shown;
use crate::domain::product::{
    DOSAGE_FORMS, NewCustomer, NewPresentation, NewProduct, PERMEABILITIES, recommended_attributes,
};
use crate::domain::subject::{Kind, Subject};
use crate::domain::typed::NumberRule;
use crate::store;
use crate::store::product::{Hanging, Presentation};

pub const ROUTES: &[Route] = &[
    get("/customers", customers),
    get("/customers/new", new_customer_page),
    post("/customers/new", &[Act::AddCustomer], add_customer),
    get("/products", list),
    get("/products/new", new_page),
    post("/products/new", &[Act::AddProduct], add),
    get("/products/{id}", product),
    get("/presentations", presentations),
    get("/presentations/new", new_presentation_page),
    post("/presentations/new", &[Act::AddPresentation], add_presentation),
    get("/presentations/{id}", presentation),
];

fn customers(visit: &Visit) -> Outcome {
    let found = visit.read(store::product::customers)?;
    let lead = format!("{} for whom products are made.", show::counted(found.len(), "customer", "customers"));
    let empty = "No customer is recorded. A site that makes its own products needs none.";
    let table =
        Table::new("By code", &["Customer", "Name", "Products#"], empty).rows(found.iter().map(|one| {
            vec![Cell::text(&one.code), Cell::text(&one.name), Cell::number(one.products.to_string())]
        }));
    Record::new(Shell::of(visit, "Customers").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddCustomer), "/customers/new", "Add a customer")
        .table("", table)
        .show()
}

fn new_customer_form(visit: &Visit) -> Result<Form, Failure> {
    Ok(Form::new(visit, "/customers/new", "Add the customer")?
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Never used twice."))
        .field(Field::new("name", "Name", Entry::Text)))
}

const CUSTOMER_LEAD: &str =
    "A contract maker names for whom a product is made; reports can be kept to one customer.";

fn new_customer_page(visit: &Visit) -> Outcome {
    form::show(visit, "Add a customer", CUSTOMER_LEAD, new_customer_form(visit)?)
}

fn add_customer(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a customer",
        CUSTOMER_LEAD,
        new_customer_form(visit)?,
        |typed| {
            let (code, name) = (typed.text("code", 40), typed.text("name", 120));
            Some(NewCustomer { code: code?, name: name? })
        },
        |actor, new| acts::product::add_customer(visit.db(), actor, &new),
        |_| "/customers".to_string(),
    )
}

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::product::all)?;
    let lead = format!("{}.", show::counted(found.len(), "product", "products"));
    let table = Table::new(
        "By code",
        &["Product", "Dosage form", "Customer", "Presentations#", "Formulations#"],
        "No product is recorded yet. A product carries presentations and formulations; add the first one.",
    )
    .rows(found.iter().map(|one| {
        vec![
            Cell::Link {
                path: format!("/products/{}", one.id),
                words: one.code.clone(),
                note: one.name.clone(),
            },
            Cell::text(&one.dosage_form),
            Cell::or_missing(one.customer.clone(), "own product"),
            Cell::number(one.presentations.to_string()),
            Cell::number(one.formulations.to_string()),
        ]
    }));
    Record::new(Shell::of(visit, "Products").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddProduct), "/products/new", "Add a product")
        .table("", table)
        .show()
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    let customers = visit.read(store::product::customers)?;
    let customers =
        customers.into_iter().map(|one| (one.id.to_string(), format!("{}, {}", one.code, one.name)));
    Ok(Form::new(visit, "/products/new", "Add the product")?
        .field(Field::new("code", "Code", Entry::Text).width(12).hint("Such as TW-104. Never used twice."))
        .field(Field::new("name", "Name", Entry::Text))
        .field(
            Field::new("dosage_form", "Dosage form", Entry::Select)
                .choices(DOSAGE_FORMS.map(|form| (form, form))),
        )
        .field(
            Field::new("customer", "Customer", Entry::Select)
                .hint("Leave it open for an own product.")
                .choices(customers),
        ))
}

const NEW_LEAD: &str = "A product has one dosage form; strengths and packs are its presentations.";

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "Add a product", NEW_LEAD, new_form(visit)?)
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a product",
        NEW_LEAD,
        new_form(visit)?,
        |typed| {
            let (code, name) = (typed.text("code", 40), typed.text("name", 120));
            let (form, customer) = (typed.choice("dosage_form"), typed.maybe_record("customer"));
            Some(NewProduct { code: code?, name: name?, dosage_form: form?, customer: customer? })
        },
        |actor, new| acts::product::add(visit.db(), actor, &new),
        |id| format!("/products/{id}"),
    )
}

fn presentation_row(one: &Presentation) -> Vec<Cell> {
    vec![
        Cell::Link {
            path: format!("/presentations/{}", one.id),
            words: one.code.clone(),
            note: one.product_name.clone(),
        },
        Cell::text(&one.strength),
        Cell::text(&one.pack),
        Cell::number_or_missing(one.fill_ml.map(|fill| fill.to_string()), "not stated"),
        Cell::text(&one.market),
        Cell::text(&one.permeability),
    ]
}

const PRESENTATION_HEADS: [&str; 6] =
    ["Presentation", "Strength", "Pack", "Fill, mL#", "Market", "Permeability"];

fn product(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (product, presentations, formulations, lines) = visit.read(|reader| {
        Ok((
            store::product::get(reader, id)?,
            store::product::presentations_of(reader, id)?,
            store::formulation::of_product(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Product, id))?,
        ))
    })?;
    let empty = "No presentation yet. Specification, shelf life and studies hang on a presentation; add one.";
    let packs = Table::new("Presentations, by code", &PRESENTATION_HEADS, empty)
        .rows(presentations.iter().map(presentation_row));
    let empty = "No formulation yet. A formulator adds one and writes its first version.";
    let recipes = Table::new(
        "Formulations, by code",
        &["Formulation", "Versions#", "Approved version", "Lots#"],
        empty,
    )
    .rows(formulations.iter().map(super::formulation::row));
    let attributes = recommended_attributes(&product.dosage_form).join(", ");
    let shell = Shell::of(visit, &product.code).crumb("/products", "Products");
    let formulation_path = format!("/formulations/new?product={id}");
    Record::new(shell, &product.name)
        .fact("Dosage form", &product.dosage_form)
        .fact("Customer", product.customer.unwrap_or_else(|| "own product".to_string()))
        .fact("Attributes recommended for stability", attributes)
        .fact("Source of the recommendation", "WHO TRS 953, appendix 2, with ASEAN and FDA lists")
        .link_if(
            visit.may(Act::AddPresentation),
            format!("/presentations/new?product={id}"),
            "Add a presentation",
        )
        .quiet_link_if(visit.may(Act::AddFormulation), formulation_path, "Add a formulation")
        .table("Presentations", packs)
        .table("Formulations", recipes)
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}

fn presentations(visit: &Visit) -> Outcome {
    let found = visit.read(store::product::presentations)?;
    let lead = format!("{} of all products.", show::counted(found.len(), "presentation", "presentations"));
    let empty = "No presentation is recorded yet. Add a product first, then its strengths and packs.";
    let table = Table::new("By code", &PRESENTATION_HEADS, empty).rows(found.iter().map(presentation_row));
    Record::new(Shell::of(visit, "Presentations").crumb("/definitions", "Definitions"), lead)
        .link_if(visit.may(Act::AddPresentation), "/presentations/new", "Add a presentation")
        .table("", table)
        .show()
}

fn new_presentation_form(visit: &Visit) -> Result<Form, Failure> {
    let products = visit.read(store::product::all)?;
    let products =
        products.into_iter().map(|one| (one.id.to_string(), format!("{}, {}", one.code, one.name)));
    Ok(Form::new(visit, "/presentations/new", "Add the presentation")?
        .field(
            Field::new("product", "Product", Entry::Select)
                .choices(products)
                .value(visit.query.get("product").unwrap_or_default()),
        )
        .field(
            Field::new("code", "Code", Entry::Text).width(20).hint("Such as TW-104-200. Never used twice."),
        )
        .field(Field::new("strength", "Strength", Entry::Text).width(20).hint("Such as 400 mg/5 mL."))
        .field(Field::new("pack", "Pack", Entry::Text).hint("Material, nominal volume, closure, liner."))
        .field(
            Field::new("container_word", "What one container is called", Entry::Text)
                .width(12)
                .hint("Bottle, sachet, tube: pages and labels use this word."),
        )
        .field(
            Field::new("fill_ml", "Fill of one container, mL", Entry::Decimal)
                .width(8)
                .hint("May be left empty."),
        )
        .field(Field::new("market", "Market", Entry::Text).width(20))
        .field(
            Field::new("permeability", "Pack and water vapour", Entry::Radios)
                .choices(PERMEABILITIES.map(|one| (one, one)))
                .hint("Decides which storage conditions hold for it."),
        ))
}

const PRESENTATION_LEAD: &str =
    "A strength in a pack for a market: what specification, shelf life and studies hang on.";

fn new_presentation_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["product"])?;
    form::show(visit, "Add a presentation", PRESENTATION_LEAD, new_presentation_form(visit)?)
}

fn add_presentation(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "Add a presentation",
        PRESENTATION_LEAD,
        new_presentation_form(visit)?,
        |typed| {
            let (product, code) = (typed.record("product"), typed.text("code", 40));
            let (strength, pack) = (typed.text("strength", 80), typed.text("pack", 200));
            let word = typed.text("container_word", 20).map(|word| word.to_lowercase());
            let rule = NumberRule::between("Fill of one container", 0, 100_000).unit("mL");
            let fill_ml = typed.maybe_decimal("fill_ml", &rule);
            let (market, permeability) = (typed.text("market", 80), typed.choice("permeability"));
            Some(NewPresentation {
                product: product?,
                code: code?,
                strength: strength?,
                pack: pack?,
                container_word: word?,
                fill_ml: fill_ml?.map(|number| number.value),
                market: market?,
                permeability: permeability?,
            })
        },
        |actor, new| acts::product::add_presentation(visit.db(), actor, &new),
        |id| format!("/presentations/{id}"),
    )
}

fn hanging_table(hanging: &[Hanging]) -> Table {
    let empty =
        "Nothing yet. QA writes a specification for it, the lab manager a protocol; lots are recorded on it.";
    let rows = hanging.iter().map(|one| {
        vec![
            Cell::link(format!("/{}s/{}", one.kind, one.id), &one.number),
            Cell::text(&one.kind),
            if one.about.is_empty() { Cell::text("its limits") } else { Cell::text(&one.about) },
        ]
    });
    Table::new("Specifications, protocols, and the newest lots", &["Number", "Kind", "What"], empty)
        .rows(rows)
}

fn presentation(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (one, hanging, lives, lines) = visit.read(|reader| {
        Ok((
            store::product::presentation(reader, id)?,
            store::product::hanging_on(reader, id)?,
            store::shelf_life::of_presentation(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Presentation, id))?,
        ))
    })?;
    let today = visit.at.date();
    let current = lives.iter().find(|life| life.assigned.effective_from <= today).map(|life| {
        let new = &life.assigned;
        format!("{} months, {}, from {}", new.months, new.storage_statement, date_shown(new.effective_from))
    });
    let shell = Shell::of(visit, &one.code)
        .crumb("/products", "Products")
        .crumb(format!("/products/{}", one.product), one.product_code.as_str());
    Record::new(shell, format!("{}, {}, {}", one.product_name, one.strength, one.pack))
        .fact("Container", &one.container_word)
        .fact("Fill, mL", one.fill_ml.map_or("not stated".to_string(), |fill| fill.to_string()))
        .fact("Market", &one.market)
        .fact("Permeability", &one.permeability)
        .fact("Shelf life", current.unwrap_or_else(|| "none assigned yet".to_string()))
        .link_if(visit.may(Act::MakeLot), format!("/lots/new?presentation={id}"), "Record a lot")
        .link_if(true, format!("/presentations/{id}/shelf-life"), "Shelf life")
        .table("What hangs on it", hanging_table(&hanging))
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}
