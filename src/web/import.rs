//! Importing results: the list, a file's preview, and what an import brought.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::pairs::encoded;
use super::part::Trail;
use super::reply::{Outcome, page, page_with, see};
use super::route::{Route, get, post};
use super::show;
use super::visit::{Upload, Visit};
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::import::plan::Plan;
use crate::domain::import::{CellFault, Row};
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::import::{Import, ImportedLot};

pub const ROUTES: &[Route] = &[
    get("/imports", list),
    post("/imports", &[Act::ImportResults], upload),
    get("/imports/held/{digest}", preview),
    post("/imports/held/{digest}", &[Act::ImportResults], accept),
    get("/imports/{id}", one),
];

/// Faults and rows shown on a page; the rest is counted.
const SHOWN: usize = 100;
const ROWS_SHOWN: usize = 12;

#[derive(Template)]
#[template(path = "import/list.html")]
struct ImportsPage {
    shell: Shell,
    imports: Vec<(Import, String)>,
    form: Option<Form>,
}

fn list(visit: &Visit) -> Outcome {
    let form = if visit.may(Act::ImportResults) { Some(upload_form(visit)?) } else { None };
    list_page(200, visit, form, &[])
}

fn list_page(status: u16, visit: &Visit, form: Option<Form>, faults: &[CellFault]) -> Outcome {
    let imports = visit.read(store::import::all)?;
    let imports = imports.into_iter().map(|one| (show::instant(&one.at, visit.at.zone), one));
    let mut shell = Shell::of(visit, "Imports");
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    shell.has_errors |= !faults.is_empty();
    shell.errors.extend(faults.iter().take(SHOWN).map(|fault| (String::new(), fault.to_string())));
    if faults.len() > SHOWN {
        shell.errors.push((String::new(), format!("and {} more", faults.len() - SHOWN)));
    }
    let imports = imports.map(|(at, one)| (one, at)).collect();
    page_with(status, &ImportsPage { shell, imports, form })
}

fn upload_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::LabManager], Act::ImportResults)?;
    Ok(Form::new(visit, "/imports", "Preview the file")?.field(
        Field::new("file", "Result file, CSV in UTF-8", Entry::File).hint(
            "Columns in any order: study, formulation, condition, container, time, time_unit, test, value, sd, n, \
             unit, flag. At most 10 MiB and 50,000 rows.",
        ),
    ))
}

fn upload(visit: &Visit) -> Outcome {
    let mut form = upload_form(visit)?;
    form.fill(visit)?;
    let Some(Upload { file_name, bytes, .. }) = visit.uploads.first() else {
        form.refuse(Some("file"), "No file came with the form, or it is empty. Choose the CSV file.");
        return list_page(422, visit, Some(form), &[]);
    };
    if let Err(faults) = acts::import::preview(bytes) {
        return list_page(422, visit, Some(form), &faults);
    }
    let digest = acts::import::hold(&visit.app.folder, bytes)?;
    see(format!("/imports/held/{digest}?name={}", encoded(file_name)))
}

#[derive(Template)]
#[template(path = "import/preview.html")]
struct PreviewPage {
    shell: Shell,
    name: String,
    digest: String,
    plan: Plan,
    rows: Vec<Row>,
    form: Form,
}

/// The held file of the address, with what it would bring.
fn held(visit: &Visit) -> Result<(String, Vec<u8>, Plan), Failure> {
    visit.needs_role(&[Role::LabManager], Act::ImportResults)?;
    let digest = visit.param("digest")?.to_string();
    let gone = || Failure::missing("file waiting to be imported at this address");
    let bytes = acts::import::held(&visit.app.folder, &digest).ok_or_else(gone)?;
    let plan = acts::import::preview(&bytes).map_err(|_| gone())?;
    Ok((digest, bytes, plan))
}

fn accept_form(visit: &Visit, digest: &str, plan: &Plan, name: &str) -> Result<Form, Failure> {
    let button = format!("Import {}", show::counted(plan.counts.results, "result", "results"));
    Ok(Form::new(visit, &format!("/imports/held/{digest}"), &button)?.hide("name", name))
}

fn preview(visit: &Visit) -> Outcome {
    visit.knows_query(&["name"])?;
    let (digest, _, plan) = held(visit)?;
    let name = visit.query.get("name").unwrap_or("file").to_string();
    let form = accept_form(visit, &digest, &plan, &name)?;
    preview_page(200, visit, &digest, plan, &name, form)
}

fn preview_page(status: u16, visit: &Visit, digest: &str, plan: Plan, name: &str, form: Form) -> Outcome {
    let pulls =
        plan.products.iter().flat_map(|(_, lots)| lots).flat_map(|lot| &lot.arms).flat_map(|arm| &arm.2);
    let rows = pulls.flat_map(|pull| &pull.points).take(ROWS_SHOWN).cloned().collect();
    let shell = Shell::of(visit, "Preview").crumb("/imports", "Imports").with_errors(&form);
    let (name, digest) = (name.to_string(), show::digest(digest));
    page_with(status, &PreviewPage { shell, name, digest, plan, rows, form })
}

fn accept(visit: &Visit) -> Outcome {
    let (digest, bytes, plan) = held(visit)?;
    let name = visit.form.get("name").unwrap_or("file").to_string();
    let done = form::submit(
        visit,
        accept_form(visit, &digest, &plan, &name)?,
        |_| Some(()),
        |actor, ()| acts::import::import(visit.db(), actor, &name, &bytes),
        |(id, _)| format!("/imports/{id}"),
        |status, form| preview_page(status, visit, &digest, plan, &name, form),
    )?;
    if matches!(done, super::reply::Reply::See(_)) {
        acts::import::let_go(&visit.app.folder, &digest);
    }
    Ok(done)
}

#[derive(Template)]
#[template(path = "import/import.html")]
struct ImportPage {
    shell: Shell,
    import: Import,
    counts: String,
    at: String,
    digest: String,
    lots: Vec<ImportedLot>,
    trail: Trail,
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (import, counts, lots, lines) = visit.read(|reader| {
        Ok((
            store::import::get(reader, id)?,
            store::import::counts(reader, id)?,
            store::import::lots(reader, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Import, id))?,
        ))
    })?;
    page(&ImportPage {
        shell: Shell::of(visit, &format!("Import {id}")).crumb("/imports", "Imports"),
        counts: counts.words(),
        at: show::instant(&import.at, visit.at.zone),
        digest: show::digest(&import.sha256),
        import,
        lots,
        trail: Trail::of(&lines, visit.at.zone),
    })
}
