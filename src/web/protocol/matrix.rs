//! Which test is done at which age: a matrix of check boxes with what each costs.

use askama::Template;

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::page::Shell;
use super::super::reply::{Outcome, page_with};
use super::super::visit::Visit;
use super::edit::editable;
use super::version::{ArmView, Loaded, path};
use crate::acts;
use crate::acts::version::Written;
use crate::domain::failure::Failure;
use crate::domain::protocol::ProtocolContent;
use crate::domain::version::Versioned;

#[derive(Template)]
#[template(path = "protocol/matrix.html")]
struct MatrixPage {
    shell: Shell,
    form: Form,
    tests: Vec<String>,
    arms: Vec<ArmView>,
    container_word: String,
}

fn matrix_form(visit: &Visit, id: i64, loaded: &Loaded) -> Result<Form, Failure> {
    let form = Form::new(visit, &format!("{}/matrix", path(id)), "Save the matrix")?
        .hide("seen", loaded.version.digest());
    let cells = loaded.arms().into_iter().flat_map(|arm| arm.rows).flat_map(|row| row.cells);
    Ok(cells.fold(form, |form, cell| {
        let value = if cell.is_ticked { "yes" } else { "" };
        form.field(Field::new(&cell.name, &cell.label, Entry::Tick).value(value))
    }))
}

fn show(status: u16, visit: &Visit, id: i64, loaded: &Loaded, form: Form) -> Outcome {
    let mut arms = loaded.arms();
    for cell in arms.iter_mut().flat_map(|arm| &mut arm.rows).flat_map(|row| &mut row.cells) {
        let typed = form.fields().find(|field| field.name == cell.name);
        cell.is_ticked = typed.is_some_and(|field| field.value == "yes");
    }
    let shell = Shell::of(visit, "Tests at each age")
        .crumb(path(id), format!("{} version {}", loaded.protocol.code, loaded.version.number))
        .with_errors(&form);
    let tests = loaded.content.tests.iter().map(|test| test.title.clone()).collect();
    let container_word = loaded.protocol.container_word.clone();
    page_with(status, &MatrixPage { shell, form, tests, arms, container_word })
}

pub(super) fn matrix_page(visit: &Visit) -> Outcome {
    let (id, loaded) = editable(visit)?;
    let form = matrix_form(visit, id, &loaded)?;
    show(200, visit, id, &loaded, form)
}

pub(super) fn write_matrix(visit: &Visit) -> Outcome {
    let (id, loaded) = editable(visit)?;
    form::submit(
        visit,
        matrix_form(visit, id, &loaded)?,
        |typed| Some((read(typed, &loaded.content), typed.raw("seen"))),
        |actor, (content, seen)| {
            let reason = loaded.version.reason.clone();
            let written = Written { reason, content: acts::protocol::written(&content)? };
            acts::version::rewrite(visit.db(), actor, Versioned::Protocol, id, &written, &seen)
        },
        |()| path(id),
        |status, form| show(status, visit, id, &loaded, form),
    )
}

fn read(typed: &Typed<'_>, old: &ProtocolContent) -> ProtocolContent {
    let mut content = old.clone();
    for (place, arm) in content.arms.iter_mut().enumerate() {
        for (at, planned) in arm.ages.iter_mut().enumerate() {
            let is_ticked =
                |column: usize| typed.tick(&format!("tick.{}.{}.{}", place + 1, at + 1, column + 1));
            let ticked = old.tests.iter().enumerate().filter(|(column, _)| is_ticked(*column));
            planned.tests = ticked.map(|(_, test)| test.test.clone()).collect();
        }
    }
    content
}
