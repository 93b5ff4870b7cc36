//! Methods and their versions: the list, a new method of a kind, drafts, signing.

mod compare;
pub(super) mod facts;
mod form;
mod grid;
mod photo;
mod settings;

use super::form::{self as forms, Form};
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
use crate::acts::method::NewMethod;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::method::{MethodContent, TestKind, preset};
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::method::{Method, MethodVersion};
use crate::store::version::Version;

pub const ROUTES: &[Route] = &[
    get("/methods", list),
    get("/methods/new", new_page),
    post("/methods/new", &[Act::AddMethod], add),
    get("/methods/{id}", method),
    get("/methods/{id}/compare", compare::compare),
    get("/methods/{id}/draft", draft_page),
    post("/methods/{id}/draft", &[Act::DraftMethodVersion], draft),
    get("/method-versions/{id}", version),
    get("/method-versions/{id}/edit", edit_page),
    post("/method-versions/{id}/edit", &[Act::DraftMethodVersion], edit),
    get("/method-versions/{id}/photos", photo::page),
    post("/method-versions/{id}/photos", &[Act::DraftMethodVersion], photo::put),
    post("/method-versions/{id}/sign", &[Act::DraftMethodVersion, Act::ApproveMethodVersion], sign),
];

fn shell(visit: &Visit, title: &str) -> Shell {
    Shell::of(visit, title).crumb("/definitions", "Definitions")
}

fn list(visit: &Visit) -> Outcome {
    let (methods, approved) =
        visit.read(|reader| Ok((store::method::all(reader)?, store::method::approved_versions(reader)?)))?;
    let newest = |method: &Method| approved.iter().find(|version| version.method == method.id);
    let lead = format!(
        "{}: how each test is done, what is read, and what is reported.",
        show::counted(methods.len(), "method", "methods")
    );
    let table = Table::new(
        "By code",
        &["Method", "Kind of test", "Approved version", "Reported in"],
        "No method is written yet. A specification limits what methods report, so methods come first.",
    )
    .rows(methods.iter().map(|method| {
        let path = format!("/methods/{}", method.id);
        let found = newest(method);
        let unit = found.map(|version| version.content.unit.clone()).filter(|unit| !unit.is_empty());
        vec![
            Cell::Link { path, words: method.code.clone(), note: method.name.clone() },
            Cell::text(method.kind.words()),
            Cell::or_missing(found.map(|version| version.number.to_string()), "none yet"),
            Cell::or_missing(unit, "no unit"),
        ]
    }));
    Record::new(shell(visit, "Methods"), lead)
        .link_if(visit.may(Act::AddMethod), "/methods/new", "Write a method")
        .table("", table)
        .show()
}

/// A method of which kind: each kind has its own form.
fn kinds_page(visit: &Visit) -> Outcome {
    let table = Table::new("Kinds of test", &["Kind", "Read at the bench"], "").rows(
        TestKind::ALL.into_iter().map(|kind| {
            let path = format!("/methods/new?kind={}", kind.code());
            vec![Cell::link(path, kind.words()), Cell::text(read_words(kind))]
        }),
    );
    Record::new(
        shell(visit, "Write a method").crumb("/methods", "Methods"),
        "Choose the kind of test first: the form asks what belongs to it.",
    )
    .table("", table)
    .show()
}

fn read_words(kind: TestKind) -> &'static str {
    match kind {
        TestKind::Appearance => "grades with anchor sentences, per attribute",
        TestKind::AsStoredSediment => "base, top of the bed and fill line, before anything moves",
        TestKind::Redispersibility => "inversions to uniform, counted to a beat, per container",
        TestKind::Ph => "replicates with temperature, on a meter checked that day",
        TestKind::Viscosity => "replicates at one spindle, speed, temperature and rest time",
        TestKind::Sedimentation => "sediment volumes in a cylinder at planned times after shaking",
        TestKind::Numeric => "a number, inputs of a formula, or several components",
    }
}

fn kind_asked(visit: &Visit) -> Option<TestKind> {
    let code = visit.form.get("kind").or_else(|| visit.query.get("kind"))?;
    TestKind::from_code(code)
}

fn new_title(kind: TestKind) -> String {
    format!("New method: {}", kind.words())
}

const NEW_LEAD: &str = "Figures already filled in are common practice; change what is different here. \
    It becomes version 1, a draft, until its author signs and a second person approves.";

fn new_form(visit: &Visit, kind: TestKind) -> Result<Form, Failure> {
    visit.needs_role(&[crate::domain::role::Role::LabManager], Act::AddMethod)?;
    let form = form::identity(Form::new(visit, "/methods/new", "Write version 1")?);
    Ok(form::content(visit, form, &preset::of(kind)).hide("kind", kind.code()))
}

fn new_page(visit: &Visit) -> Outcome {
    visit.knows_query(&["kind"])?;
    match kind_asked(visit) {
        Some(kind) => forms::show(visit, &new_title(kind), NEW_LEAD, new_form(visit, kind)?),
        None => kinds_page(visit),
    }
}

fn add(visit: &Visit) -> Outcome {
    let kind = kind_asked(visit).ok_or_else(|| Failure::missing("kind of test with this name"))?;
    forms::submit_page(
        visit,
        &new_title(kind),
        NEW_LEAD,
        new_form(visit, kind)?,
        |typed| {
            let (code, name) = (typed.text("code", 40), typed.text("name", 120));
            let content = form::read(typed, kind);
            Some(NewMethod { code: code?, name: name?, content: content? })
        },
        |actor, new| acts::method::add(visit.db(), actor, &new),
        |id| format!("/method-versions/{id}"),
    )
}

fn method(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (method, found, lines) = visit.read(|reader| {
        Ok((
            store::method::get(reader, id)?,
            store::version::of_parent(reader, Versioned::Method, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Method, id))?,
        ))
    })?;
    let is_open = found
        .iter()
        .any(|version| matches!(version.state, VersionState::Draft | VersionState::SignedByAuthor));
    let lead = format!("{}: {}.", method.name, method.kind.words());
    Record::new(shell(visit, &method.code).crumb("/methods", "Methods"), lead)
        .link_if(
            visit.may(Act::DraftMethodVersion) && !is_open,
            format!("/methods/{id}/draft"),
            "Write a new version",
        )
        .quiet_link_if(
            found.len() > 1,
            found.get(1).map_or(String::new(), |before| compare::path(id, before, &found[0])),
            "Compare the newest two",
        )
        .table("", version_table(visit, &found, "/method-versions"))
        .trail(Trail::of(&lines, visit.at.zone))
        .show()
}

/// Versions newest first, as methods and specifications list them.
pub(super) fn version_table(visit: &Visit, found: &[Version], path: &str) -> Table {
    Table::new("Versions, newest first", &["Version", "State", "Why", "Written by", "Written at"], "").rows(
        found.iter().map(|version| {
            vec![
                Cell::link(format!("{path}/{}", version.id), format!("Version {}", version.number)),
                Cell::text(version.state.words()),
                Cell::text(&version.reason),
                Cell::text(&version.author_name),
                Cell::text(show::instant(&version.written_at, visit.at.zone)),
            ]
        }),
    )
}

fn draft_form(visit: &Visit, id: i64) -> Result<(Method, MethodContent, Form), Failure> {
    visit.needs_role(&[crate::domain::role::Role::LabManager], Act::DraftMethodVersion)?;
    let (method, found) = visit.read(|reader| {
        Ok((store::method::get(reader, id)?, store::version::of_parent(reader, Versioned::Method, id)?))
    })?;
    let start: MethodContent = match found.first() {
        Some(newest) => newest.read()?,
        None => preset::of(method.kind),
    };
    let form = Form::new(visit, &format!("/methods/{id}/draft"), "Write the draft")?;
    let form = form::content(visit, form::reason(form, ""), &start);
    Ok((method, start, form))
}

const DRAFT_LEAD: &str = "Filled from the newest version. Results done by earlier versions keep their rules.";

fn draft_page(visit: &Visit) -> Outcome {
    let (method, _, form) = draft_form(visit, visit.id("id")?)?;
    forms::show(visit, &format!("{}: new version", method.code), DRAFT_LEAD, form)
}

fn draft(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (method, start, form) = draft_form(visit, id)?;
    forms::submit_page(
        visit,
        &format!("{}: new version", method.code),
        DRAFT_LEAD,
        form,
        |typed| {
            let reason = typed.text("reason", 400);
            let content = form::read(typed, method.kind);
            Some((reason?, content?.with_photos_of(&start)))
        },
        |actor, (reason, content)| acts::method::draft(visit.db(), actor, id, &reason, &content),
        |id| format!("/method-versions/{id}"),
    )
}

fn loaded(visit: &Visit, id: i64) -> Result<(MethodVersion, Version), Failure> {
    visit.read(|reader| {
        Ok((store::method::version(reader, id)?, store::version::get(reader, Versioned::Method, id)?))
    })
}

fn edit_form(visit: &Visit, id: i64) -> Result<(MethodVersion, Form), Failure> {
    visit.needs_role(&[crate::domain::role::Role::LabManager], Act::DraftMethodVersion)?;
    let (method, version) = loaded(visit, id)?;
    if version.state != VersionState::Draft {
        return Err(crate::domain::version::VersionRefusal::VersionFrozen.into());
    }
    let form = Form::new(visit, &format!("/method-versions/{id}/edit"), "Rewrite the draft")?
        .hide("seen", version.digest());
    Ok((method.clone(), form::content(visit, form::reason(form, &version.reason), &method.content)))
}

fn edit_title(method: &MethodVersion) -> String {
    format!("{}, version {}: rewrite the draft", method.code, method.number)
}

const EDIT_LEAD: &str = "A draft may be rewritten until its author signs it.";

fn edit_page(visit: &Visit) -> Outcome {
    let (method, form) = edit_form(visit, visit.id("id")?)?;
    forms::show(visit, &edit_title(&method), EDIT_LEAD, form)
}

fn edit(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (method, form) = edit_form(visit, id)?;
    forms::submit_page(
        visit,
        &edit_title(&method),
        EDIT_LEAD,
        form,
        |typed| {
            let reason = typed.text("reason", 400);
            let content = form::read(typed, method.kind);
            Some((reason?, content?.with_photos_of(&method.content), typed.raw("seen")))
        },
        |actor, (reason, content, seen)| {
            acts::method::rewrite(visit.db(), actor, id, &reason, &content, &seen)
        },
        |()| format!("/method-versions/{id}"),
    )
}

fn version(visit: &Visit) -> Outcome {
    version_page(200, visit, visit.id("id")?, None)
}

fn version_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (method, version) = loaded(visit, id)?;
    let (lines, all, photos) = visit.read(|reader| {
        let lines = store::trail::of_subject(reader, Subject::new(Kind::MethodVersion, id))?;
        let photos = store::attachment::of_subject(reader, Subject::new(Kind::Method, version.parent))?;
        Ok((lines, store::version::of_parent(reader, Versioned::Method, version.parent)?, photos))
    })?;
    let before = all.iter().find(|other| other.number < version.number);
    let title = format!("{}, version {}", method.code, method.number);
    let mut shell = shell(visit, &title)
        .crumb("/methods", "Methods")
        .crumb(format!("/methods/{}", method.method), &method.code)
        .print(version.state.words(), &version.digest());
    if let Some(failed) = &failed {
        shell = shell.with_errors(failed);
    }
    let path = format!("/method-versions/{id}");
    let next = match failed {
        Some(failed) => Some(failed),
        None => versions::next_form(visit, Versioned::Method, &version, &path)?,
    };
    let lead = format!("{}: {}. {}.", method.name, method.kind.words(), facts::state_words(&version));
    let may_edit = visit.may(Act::DraftMethodVersion) && version.state == VersionState::Draft;
    let page = Record::new(shell, lead)
        .fact("Why this version", &version.reason)
        .fact("Written by", &version.author_name)
        .quiet_link_if(
            before.is_some(),
            before.map_or(String::new(), |before| compare::path(method.method, before, &version)),
            "Compare with the version before",
        )
        .quiet_link_if(may_edit, format!("{path}/edit"), "Rewrite the draft")
        .quiet_link_if(
            may_edit && method.kind == TestKind::Appearance,
            format!("{path}/photos"),
            "Add a reference photograph",
        );
    facts::show(page, &method.content, &photos)
        .signatures(versions::signatures(visit, Versioned::Method, &version)?)
        .form("Sign", facts::sign_note(&version), next)
        .trail(Trail::of(&lines, visit.at.zone))
        .show_with(status)
}

fn sign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let path = format!("/method-versions/{id}");
    versions::sign(visit, Versioned::Method, id, &path, &acts::method::check, |status, form| {
        version_page(status, visit, id, Some(form))
    })
}
