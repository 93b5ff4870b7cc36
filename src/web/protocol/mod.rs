//! Protocols: the list, adding one, and its versions.

mod edit;
mod matrix;
mod version;

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form, Typed};
use super::page::Shell;
use super::part::Trail;
use super::reply::{Outcome, page, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::acts::protocol::NewProtocol;
use crate::acts::version::Written;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::protocol::Programme;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionState, Versioned};
use crate::store;
use crate::store::Reader;
use crate::store::protocol::Protocol;

pub const ROUTES: &[Route] = &[
    get("/protocols", list),
    get("/protocols/new", new_page),
    post("/protocols/new", &[Act::DraftProtocolVersion], add),
    get("/protocols/{id}", one),
    post("/protocols/{id}/draft", &[Act::DraftProtocolVersion], draft),
    get("/protocol-versions/{id}", version::one),
    post(
        "/protocol-versions/{id}/sign",
        &[Act::DraftProtocolVersion, Act::ApproveProtocolVersion],
        version::sign,
    ),
    get("/protocol-versions/{id}/arms", edit::arms_page),
    post("/protocol-versions/{id}/arms", &[Act::DraftProtocolVersion], edit::write_arms),
    get("/protocol-versions/{id}/matrix", matrix::matrix_page),
    post("/protocol-versions/{id}/matrix", &[Act::DraftProtocolVersion], matrix::write_matrix),
];

#[derive(Template)]
#[template(path = "protocol/list.html")]
struct ProtocolsPage {
    shell: Shell,
    rows: Vec<Protocol>,
    may_add: bool,
}

fn list(visit: &Visit) -> Outcome {
    let rows = visit.read(store::protocol::all)?;
    let shell = Shell::of(visit, "Protocols").crumb("/definitions", "Definitions");
    page(&ProtocolsPage { shell, rows, may_add: visit.may(Act::DraftProtocolVersion) })
}

const LEAD: &str = "A protocol starts from the usual arms of its programme and every test of the specification. \
                    Arms, ages and tests are changed on the next pages.";

/// The approved specification versions as choices: `TW-104-S version 2`.
fn specification_choices(
    reader: &Reader<'_>,
    presentation: Option<i64>,
) -> Result<Vec<(String, String)>, Failure> {
    let mut choices = Vec::new();
    for found in store::specification::all(reader)? {
        if presentation.is_some_and(|presentation| presentation != found.presentation) {
            continue;
        }
        if let Some(version) = store::version::approved(reader, Versioned::Specification, found.id)? {
            choices.push((version.id.to_string(), format!("{} version {}", found.code, version.number)));
        }
    }
    Ok(choices)
}

fn new_form(visit: &Visit) -> Result<Form, Failure> {
    visit.needs_role(&[Role::LabManager], Act::DraftProtocolVersion)?;
    let (presentations, specifications) = visit
        .read(|reader| Ok((store::lot::presentations(reader)?, specification_choices(reader, None)?)))?;
    let presentations = presentations.into_iter().map(|(id, words)| (id.to_string(), words));
    let programmes = Programme::ALL.map(|programme| (programme.words(), programme.words()));
    Ok(Form::new(visit, "/protocols/new", "Add the protocol")?
        .field(Field::new("code", "Code", Entry::Text).width(20).hint("Never used twice."))
        .field(Field::new("title", "Title", Entry::Text))
        .field(Field::new("presentation", "Presentation", Entry::Select).choices(presentations))
        .field(Field::new("programme", "Programme", Entry::Select).choices(programmes))
        .field(
            Field::new("specification_version", "Specification version", Entry::Select)
                .choices(specifications)
                .hint("The newest approved version of each specification."),
        ))
}

fn new_page(visit: &Visit) -> Outcome {
    form::show(visit, "New protocol", LEAD, new_form(visit)?)
}

fn read(typed: &mut Typed<'_>) -> Option<NewProtocol> {
    let code = typed.text("code", 20);
    let title = typed.text("title", 120);
    let presentation = typed.record("presentation");
    let programme = typed.choice("programme").and_then(|words| Programme::from_words(&words));
    let specification_version = typed.record("specification_version");
    Some(NewProtocol {
        code: code?,
        title: title?,
        presentation: presentation?,
        programme: programme?,
        specification_version: specification_version?,
    })
}

fn add(visit: &Visit) -> Outcome {
    form::submit_page(
        visit,
        "New protocol",
        LEAD,
        new_form(visit)?,
        read,
        |actor, new| acts::protocol::add(visit.db(), actor, &new),
        |draft| format!("/protocol-versions/{draft}"),
    )
}

#[derive(Template)]
#[template(path = "protocol/protocol.html")]
struct ProtocolPage {
    shell: Shell,
    protocol: Protocol,
    versions: Vec<VersionLine>,
    draft: Option<Form>,
    trail: Trail,
}

struct VersionLine {
    id: i64,
    number: i64,
    reason: String,
    state: &'static str,
    author: String,
    written_at: String,
}

fn one(visit: &Visit) -> Outcome {
    protocol_page(200, visit, visit.id("id")?, None)
}

fn protocol_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (protocol, versions, lines) = visit.read(|reader| {
        Ok((
            store::protocol::get(reader, id)?,
            store::version::of_parent(reader, Versioned::Protocol, id)?,
            store::trail::of_subject(reader, Subject::new(Kind::Protocol, id))?,
        ))
    })?;
    let is_open = versions
        .iter()
        .any(|version| matches!(version.state, VersionState::Draft | VersionState::SignedByAuthor));
    let draft = match failed {
        Some(failed) => Some(failed),
        None if visit.may(Act::DraftProtocolVersion) && !is_open => Some(draft_form(visit, id)?),
        None => None,
    };
    let mut shell = Shell::of(visit, &format!("Protocol {}", protocol.code)).crumb("/protocols", "Protocols");
    if let Some(form) = &draft {
        shell = shell.with_errors(form);
    }
    let versions = versions
        .into_iter()
        .map(|version| VersionLine {
            id: version.id,
            number: version.number,
            reason: version.reason,
            state: version.state.words(),
            author: version.author_name,
            written_at: show::instant(&version.written_at, visit.at.zone),
        })
        .collect();
    let trail = Trail::of(&lines, visit.at.zone);
    page_with(status, &ProtocolPage { shell, protocol, versions, draft, trail })
}

fn draft_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/protocols/{id}/draft"), "Write the next version")?
        .field(
            Field::new("reason", "Why a new version", Entry::Text)
                .hint("It starts as a copy of the newest. At least ten characters."),
        )
        .quiet())
}

fn draft(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let newest = visit.read(|reader| store::version::of_parent(reader, Versioned::Protocol, id))?;
    let content = newest.first().map(|version| version.content.clone()).ok_or(Failure::missing("version"))?;
    form::submit(
        visit,
        draft_form(visit, id)?,
        |typed| typed.reason("reason"),
        |actor, reason| {
            let written = Written { reason: reason.text().unwrap_or_default().to_string(), content };
            acts::version::draft(visit.db(), actor, Versioned::Protocol, id, &written)
        },
        |draft| format!("/protocol-versions/{draft}"),
        |status, form| protocol_page(status, visit, id, Some(form)),
    )
}
