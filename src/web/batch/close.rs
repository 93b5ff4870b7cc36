//! Closing a record by signature, and opening it again.

use super::super::field::{Entry, Field};
use super::super::form::{self, Form};
use super::super::reply::Outcome;
use super::super::visit::Visit;
use super::record::record_page;
use crate::acts;
use crate::acts::batch::Loaded;
use crate::acts::signature::Authorship;
use crate::domain::act::Act;
use crate::domain::batch::rule::may_close;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::signature::Meaning;
use crate::store;

/// The state of a record, as its printed sheets say it.
pub fn state_words(loaded: &Loaded) -> String {
    match (&loaded.record.lot_decision, loaded.record.is_closed) {
        (Some(decision), _) => format!("Lot {decision}"),
        (None, true) => "Closed — lot not decided on".to_string(),
        (None, false) => "In the making — not closed".to_string(),
    }
}

/// The forms for closing and opening again, with the note over the first; a failed one takes the place of its like.
pub fn forms(
    visit: &Visit,
    loaded: &Loaded,
    failed: Option<Form>,
) -> Result<(Option<Form>, String, Option<Form>), Failure> {
    let record = &loaded.record;
    let failed_at = |end: &str| failed.as_ref().filter(|form| form.action.ends_with(end)).cloned();
    let is_open = record.lot_decision.is_none();
    let can_close =
        may_close((&record.content, &loaded.entries, &loaded.yields), record.is_closed, &record.number);
    let close = match failed_at("/close") {
        Some(failed) => Some(failed),
        None if is_open && can_close.is_ok() && visit.may(Act::CloseBatchRecord) => {
            Some(close_form(visit, record.id)?)
        }
        None => None,
    };
    let reopen = match failed_at("/reopen") {
        Some(failed) => Some(failed),
        None if is_open && record.is_closed && visit.may(Act::ReopenBatchRecord) => {
            Some(reopen_form(visit, record.id)?)
        }
        None => None,
    };
    Ok((
        close,
        "Your signature states that everything was carried out as it is recorded.".to_string(),
        reopen,
    ))
}

fn close_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let canonical = visit.read(|reader| store::batch::canonical(reader, id, None))?;
    let seen = visit.form.get("seen").map(str::to_string);
    Ok(Form::new(visit, &format!("/batches/{id}/close"), "Close the record")?
        .signature(Meaning::Authorship.words())
        .hide("seen", seen.unwrap_or_else(|| sha256_hex(canonical.as_bytes()))))
}

fn reopen_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/batches/{id}/reopen"), "Open the record again")?
        .field(Field::new("reason", "Why it is opened again", Entry::Text).hint("At least ten characters."))
        .quiet())
}

pub fn close(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        close_form(visit, id)?,
        |typed| {
            let password = typed.visit.form.get("password")?.to_string();
            Some((typed.raw("seen"), typed.raw("user_name"), password))
        },
        |actor, (seen, user_name, password)| {
            let signed =
                acts::signature::authenticate::<Authorship>(db, secrets, actor, &user_name, &password)?;
            acts::batch::close(db, actor, id, &seen, &signed)
        },
        |()| format!("/batches/{id}"),
        |status, form| record_page(status, visit, id, Some(form)),
    )
}

pub fn reopen(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        reopen_form(visit, id)?,
        |typed| typed.reason("reason"),
        |actor, reason| acts::batch::reopen(visit.db(), actor, id, &reason),
        |()| format!("/batches/{id}"),
        |status, form| record_page(status, visit, id, Some(form)),
    )
}
