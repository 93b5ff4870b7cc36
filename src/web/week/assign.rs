//! Giving several pulls of the week to one person: check boxes, one form.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form, Typed};
use super::super::pull::{due_words, people_at_bench};
use super::super::reply::Outcome;
use super::super::visit::Visit;

use crate::acts;
use crate::domain::failure::Failure;
use crate::store;
use crate::store::open_pull::{Line, Show};

/// Late ones, and of the week.
const MOST_ROWS: i64 = 100;
const TITLE: &str = "Give pulls to a person";
const LEAD: &str = "The late pulls and those of the next seven days, the last day that comes first on top. Who has \
     one already stands behind it.";

/// Late pulls, then those of the week.
fn offered(visit: &Visit) -> Result<Vec<Line>, Failure> {
    let today = visit.at.date();
    visit.read(|reader| {
        let mut found = store::open_pull::list(reader, Show::Late, today, None, MOST_ROWS)?;
        found.extend(store::open_pull::list(reader, Show::Week, today, None, MOST_ROWS)?);
        Ok(found)
    })
}

fn name(pull: i64) -> String {
    format!("pull.{pull}")
}

fn assign_form(visit: &Visit, pulls: &[Line]) -> Result<Form, Failure> {
    let today = visit.at.date();
    let form = Form::new(visit, "/week/assign", "Give them")?
        .field(Field::new("account", "Who does them", Entry::Select).choices(people_at_bench(visit)?));
    Ok(pulls.iter().fold(form, |form, pull| {
        let with = pull.assigned_name.as_deref().unwrap_or("nobody");
        let label = format!(
            "{}, {}, {}: {}. With {with}.",
            pull.lot_number(),
            pull.condition(),
            pull.age_text(),
            due_words(&pull.facts, today)
        );
        form.field(Field::new(&name(pull.pull), &label, Entry::Tick))
    }))
}

pub(super) fn show(visit: &Visit) -> Outcome {
    form::show(visit, TITLE, LEAD, assign_form(visit, &offered(visit)?)?)
}

fn chosen(typed: &mut Typed<'_>, pulls: &[Line]) -> Option<(i64, Vec<i64>)> {
    let account = typed.record("account");
    let ids: Vec<i64> = pulls.iter().map(|pull| pull.pull).filter(|id| typed.tick(&name(*id))).collect();
    Some((account?, ids))
}

pub(super) fn assign(visit: &Visit) -> Outcome {
    let pulls = offered(visit)?;
    form::submit_page(
        visit,
        TITLE,
        LEAD,
        assign_form(visit, &pulls)?,
        |typed| chosen(typed, &pulls),
        |actor, (account, ids)| acts::pull::assign_several(visit.db(), actor, &ids, account),
        |()| "/week".to_string(),
    )
}
