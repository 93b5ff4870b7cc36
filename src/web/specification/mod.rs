//! Specifications: which limits hold for a presentation, in versions.

mod form;
mod parts;

use super::form::{self as forms, Form};
use super::method::{facts, version_table};
use super::page::Shell;
use super::part::Trail;
use super::record::Record;
use super::reply::Outcome;
use super::route::{Route, get, post};
use super::show;
use super::table::{Cell, Table};
use super::version as versions;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::judgement::limit::{limit_words, way_words};
use crate::domain::method::MethodContent;
use crate::domain::role::Role;
use crate::domain::specification::rule::notes;
use crate::domain::specification::{Limit, SpecificationContent};
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::method::MethodVersion;
use crate::store::specification::Specification;
use crate::store::version::Version;

pub const ROUTES: &[Route] = &[
    get("/specifications", list),
    get("/specifications/new", new_page),
    post("/specifications/new", &[Act::DraftSpecificationVersion], add),
    get("/specifications/{id}", specification),
    get("/specifications/{id}/draft", draft_page),
    post("/specifications/{id}/draft", &[Act::DraftSpecificationVersion], draft),
    get("/specification-versions/{id}", version),
    get("/specification-versions/{id}/edit", edit_page),
    post("/specification-versions/{id}/edit", &[Act::DraftSpecificationVersion], edit),
    post(
        "/specification-versions/{id}/sign",
        &[Act::DraftSpecificationVersion, Act::ApproveSpecificationVersion],
        sign,
    ),
];

const WRITERS: &[Role] = &[Role::LabManager, Role::QaReviewer];

fn shell(visit: &Visit, title: &str) -> Shell {
    Shell::of(visit, title).crumb("/definitions", "Definitions")
}

fn presentation_words(specification: &Specification) -> String {
    format!("{} {}, {}", specification.product_name, specification.strength, specification.pack)
}

fn list(visit: &Visit) -> Outcome {
    let found = visit.read(store::specification::all)?;
    let lead = format!(
        "{}: the limits a presentation is judged by, at release, over its shelf life and in use.",
        show::counted(found.len(), "specification", "specifications")
    );
    let table = Table::new(
        "By code",
        &["Specification", "Presentation", "Approved version"],
        "No specification is written yet. Its methods are approved first, and its presentation is added.",
    )
    .rows(found.iter().map(|one| {
        vec![
            Cell::link(format!("/specifications/{}", one.id), &one.code),
            Cell::noted(presentation_words(one), &one.presentation_code),
            Cell::or_missing(one.approved_number.map(|number| number.to_string()), "none yet"),
        ]
    }));
    Record::new(shell(visit, "Specifications"), lead)
        .link_if(visit.may(Act::DraftSpecificationVersion), "/specifications/new", "Write a specification")
        .table("", table)
        .show()
}

fn methods(visit: &Visit) -> Result<Vec<MethodVersion>, Failure> {
    visit.read(store::method::approved_versions)
}

const NEW_TITLE: &str = "Write a specification";
const NEW_LEAD: &str = "It becomes version 1, a draft, until its author signs and QA approves. \
    Limits keep their decimals: 7.50 is judged to two.";

fn new_form(visit: &Visit, methods: &[MethodVersion]) -> Result<Form, Failure> {
    visit.needs_role(WRITERS, Act::DraftSpecificationVersion)?;
    let presentations = visit.read(store::specification::presentations)?;
    let form = Form::new(visit, "/specifications/new", "Write version 1")?;
    let form = form::identity(form, presentations, visit.query.get("presentation").unwrap_or_default());
    Ok(form::content(visit, form, &SpecificationContent::default(), methods))
}

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["presentation"])?;
    let methods = methods(visit)?;
    forms::show(visit, NEW_TITLE, NEW_LEAD, new_form(visit, &methods)?)
}

fn add(visit: &Visit) -> Outcome {
    let methods = methods(visit)?;
    forms::submit_page(
        visit,
        NEW_TITLE,
        NEW_LEAD,
        new_form(visit, &methods)?,
        |typed| {
            let (presentation, code) = (typed.record("presentation"), typed.text("code", 40));
            let content = form::read(typed, &methods);
            Some((code?, presentation?, content?))
        },
        |actor, (code, presentation, read)| {
            acts::specification::add(visit.db(), actor, &code, presentation, &read.content)
                .map_err(|failure| read.at_its_row(failure))
        },
        |id| format!("/specification-versions/{id}"),
    )
}

fn specification(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (one, found, lines) = visit.read(|reader| {
        Ok((
            store::specification::get(reader, id)?,
            store::version::of_parent(reader, Versioned::Specification, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Specification, id))?,
        ))
    })?;
    let is_open = found
        .iter()
        .any(|version| matches!(version.state, VersionState::Draft | VersionState::SignedByAuthor));
    Record::new(
        shell(visit, &one.code).crumb("/specifications", "Specifications"),
        format!("The limits of {}.", presentation_words(&one)),
    )
    .link_if(
        visit.may(Act::DraftSpecificationVersion) && !is_open,
        format!("/specifications/{id}/draft"),
        "Write a new version",
    )
    .quiet_link_if(true, format!("/presentations/{}", one.presentation), "Its presentation")
    .table("", version_table(visit, &found, "/specification-versions"))
    .trail(Trail::of(&lines, visit.at.zone))
    .show()
}

fn draft_form(visit: &Visit, id: i64, methods: &[MethodVersion]) -> Result<(Specification, Form), Failure> {
    visit.needs_role(WRITERS, Act::DraftSpecificationVersion)?;
    let (one, found) = visit.read(|reader| {
        let found = store::version::of_parent(reader, Versioned::Specification, id)?;
        Ok((store::specification::get(reader, id)?, found))
    })?;
    let start = found.first().map(Version::read).transpose()?.unwrap_or_default();
    let form = Form::new(visit, &format!("/specifications/{id}/draft"), "Write the draft")?;
    Ok((one, form::content(visit, form::reason(form, ""), &start, methods)))
}

const DRAFT_LEAD: &str =
    "Filled from the newest version. Studies keep the version their protocol is bound to.";

fn draft_page(visit: &Visit) -> Outcome {
    let methods = methods(visit)?;
    let (one, form) = draft_form(visit, visit.id("id")?, &methods)?;
    forms::show(visit, &format!("{}: new version", one.code), DRAFT_LEAD, form)
}

fn draft(visit: &Visit) -> Outcome {
    let (id, methods) = (visit.id("id")?, methods(visit)?);
    let (one, form) = draft_form(visit, id, &methods)?;
    forms::submit_page(
        visit,
        &format!("{}: new version", one.code),
        DRAFT_LEAD,
        form,
        |typed| {
            let reason = typed.text("reason", 400);
            let content = form::read(typed, &methods);
            Some((reason?, content?))
        },
        |actor, (reason, read)| {
            acts::specification::draft(visit.db(), actor, id, &reason, &read.content)
                .map_err(|failure| read.at_its_row(failure))
        },
        |id| format!("/specification-versions/{id}"),
    )
}

fn edit_form(visit: &Visit, id: i64, methods: &[MethodVersion]) -> Result<(String, Form), Failure> {
    visit.needs_role(WRITERS, Act::DraftSpecificationVersion)?;
    let (one, version) = loaded(visit, id)?;
    if version.state != VersionState::Draft {
        return Err(crate::domain::version::VersionRefusal::VersionFrozen.into());
    }
    let form = Form::new(visit, &format!("/specification-versions/{id}/edit"), "Rewrite the draft")?
        .hide("seen", version.digest());
    let form = form::content(visit, form::reason(form, &version.reason), &version.read()?, methods);
    Ok((format!("{}, version {}: rewrite the draft", one.code, version.number), form))
}

const EDIT_LEAD: &str = "A draft may be rewritten until its author signs it.";

fn edit_page(visit: &Visit) -> Outcome {
    let methods = methods(visit)?;
    let (title, form) = edit_form(visit, visit.id("id")?, &methods)?;
    forms::show(visit, &title, EDIT_LEAD, form)
}

fn edit(visit: &Visit) -> Outcome {
    let (id, methods) = (visit.id("id")?, methods(visit)?);
    let (title, form) = edit_form(visit, id, &methods)?;
    forms::submit_page(
        visit,
        &title,
        EDIT_LEAD,
        form,
        |typed| {
            let reason = typed.text("reason", 400);
            let content = form::read(typed, &methods);
            Some((reason?, content?, typed.raw("seen")))
        },
        |actor, (reason, read, seen)| {
            acts::specification::rewrite(visit.db(), actor, id, &reason, &read.content, &seen)
                .map_err(|failure| read.at_its_row(failure))
        },
        |()| format!("/specification-versions/{id}"),
    )
}

fn loaded(visit: &Visit, id: i64) -> Result<(Specification, Version), Failure> {
    visit.read(|reader| {
        let version = store::version::get(reader, Versioned::Specification, id)?;
        Ok((store::specification::get(reader, version.parent)?, version))
    })
}

fn version(visit: &Visit) -> Outcome {
    version_page(200, visit, visit.id("id")?, None)
}

fn version_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (one, version) = loaded(visit, id)?;
    let (methods, lines) = visit.read(|reader| {
        let lines = store::trail::of_subject(reader, Subject::new(Kind::SpecificationVersion, id))?;
        Ok((store::method::approved_versions(reader)?, lines))
    })?;
    let content: SpecificationContent = version.read()?;
    let title = format!("{}, version {}", one.code, version.number);
    let mut shell = shell(visit, &title)
        .crumb("/specifications", "Specifications")
        .crumb(format!("/specifications/{}", one.id), &one.code)
        .print(version.state.words(), &version.digest());
    if let Some(failed) = &failed {
        shell = shell.with_errors(failed);
    }
    let path = format!("/specification-versions/{id}");
    let next = match failed {
        Some(failed) => Some(failed),
        None => versions::next_form(visit, Versioned::Specification, &version, &path)?,
    };
    let may_edit = visit.may(Act::DraftSpecificationVersion) && version.state == VersionState::Draft;
    let lead = format!("The limits of {}. {}.", presentation_words(&one), facts::state_words(&version));
    let page = Record::new(shell, lead)
        .fact("Why this version", &version.reason)
        .fact("Written by", &version.author_name)
        .quiet_link_if(may_edit, format!("{path}/edit"), "Rewrite the draft")
        .table("", limit_table(&content, &methods));
    let page = match notes(&content) {
        notes if notes.is_empty() => page,
        notes => page.sentences("Worth a look", notes),
    };
    page.signatures(versions::signatures(visit, Versioned::Specification, &version)?)
        .form("Sign", facts::sign_note(&version), next)
        .trail(Trail::of(&lines, visit.at.zone))
        .show_with(status)
}

fn limit_table(content: &SpecificationContent, methods: &[MethodVersion]) -> Table {
    let heads = ["Test", "Method", "At release", "Over the shelf life", "In use", "Compared"];
    let rows = content.tests.iter().map(|test| {
        let method = methods.iter().find(|version| version.method == test.method);
        let name = method.map_or("not approved any more".to_string(), |method| method.code.clone());
        let limit = |limit: &Limit| limit_cell(limit, method.map(|method| &method.content));
        let unit =
            if test.unit.is_empty() { test.test.clone() } else { format!("{}, {}", test.test, test.unit) };
        vec![
            Cell::noted(&test.title, unit),
            Cell::link(format!("/methods/{}", test.method), name),
            limit(&test.release),
            limit(&test.shelf_life),
            limit(&test.in_use),
            Cell::text(way_words(test.way)),
        ]
    });
    Table::new("Tests and limits, both ends included", &heads, "").rows(rows)
}

fn limit_cell(limit: &Limit, method: Option<&MethodContent>) -> Cell {
    match limit {
        Limit::None => Cell::Missing("no limit".to_string()),
        limit => Cell::text(limit_words(limit, method)),
    }
}

fn sign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let path = format!("/specification-versions/{id}");
    versions::sign(visit, Versioned::Specification, id, &path, &acts::specification::check, |status, form| {
        version_page(status, visit, id, Some(form))
    })
}
