//! Taking the containers of a pull: each is named by scan or by its last four characters.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::visit::Visit;
use super::pull_page;
use crate::acts;
use crate::acts::pull::Taking;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::store;
use crate::store::pull::Pull;

/// Boxes offered for a pull that needs no container, and for taking more.
const MORE_BOXES: usize = 2;

fn boxes(form: Form, pull: &Pull, count: usize, prefix: &str) -> Form {
    (1..=count).fold(form, |form, place| {
        let label = format!("Scan {} {place}, or type its last four characters", pull.container_word);
        form.field(Field::new(&format!("{prefix}.{place}"), &label, Entry::Text).width(20))
    })
}

fn needed(pull: &Pull) -> usize {
    if pull.facts.containers_needed == 0 { MORE_BOXES } else { pull.facts.containers_needed }
}

pub(super) fn take_form(visit: &Visit, pull: &Pull) -> Result<Form, Failure> {
    let form = Form::new(visit, &format!("/pulls/{}/take", pull.id), "Take the pull")?;
    Ok(boxes(form, pull, needed(pull), "container")
        .field(
            Field::new("taken_on", "They left the chamber on", Entry::Date)
                .width(12)
                .value(date_shown(visit.at.date())),
        )
        .field(
            Field::new("why", "Why early, late, partial or entered later", Entry::Text)
                .hint("Leave it empty when it is none of these."),
        ))
}

pub(super) fn more_form(visit: &Visit, pull: &Pull) -> Result<Form, Failure> {
    let form = Form::new(visit, &format!("/pulls/{}/more", pull.id), "Take more containers")?;
    Ok(boxes(form, pull, MORE_BOXES, "more")
        .field(Field::new("why_more", "Why more are taken", Entry::Text).hint("At least ten characters."))
        .quiet())
}

fn labels(typed: &Typed<'_>, count: usize, prefix: &str) -> Vec<String> {
    (1..=count)
        .map(|place| typed.raw(&format!("{prefix}.{place}")))
        .filter(|label| !label.is_empty())
        .collect()
}

pub(super) fn take(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let pull = visit.read(|reader| store::pull::get(reader, id))?;
    form::submit(
        visit,
        take_form(visit, &pull)?,
        |typed| {
            let labels = labels(typed, needed(&pull), "container");
            let taken_on = typed.date("taken_on");
            let why = typed.maybe_text("why", 300);
            Some(Taking { labels, taken_on: taken_on?, why: why?.unwrap_or_default() })
        },
        |actor, taking| acts::pull::take(visit.db(), actor, id, &taking),
        |()| format!("/pulls/{id}"),
        |status, form| pull_page(status, visit, id, Some(form)),
    )
}

pub(super) fn take_more(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let pull = visit.read(|reader| store::pull::get(reader, id))?;
    form::submit(
        visit,
        more_form(visit, &pull)?,
        |typed| {
            let labels = labels(typed, MORE_BOXES, "more");
            let why = typed.text("why_more", 300);
            Some(Taking { labels, taken_on: typed.visit.at.date(), why: why? })
        },
        |actor, taking| acts::pull::take_more(visit.db(), actor, id, &taking),
        |()| format!("/pulls/{id}"),
        |status, form| pull_page(status, visit, id, Some(form)),
    )
}
