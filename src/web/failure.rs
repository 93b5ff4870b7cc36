//! What did not happen, as a page.

use askama::Template;

use super::page::Shell;
use super::reply::{Reply, page_with};
use super::visit::Visit;
use crate::domain::failure::{Failure, OwnWork};
use crate::store;

#[derive(Template)]
#[template(path = "failure.html")]
struct FailurePage {
    shell: Shell,
    sentence: String,
    help: String,
    reference: Option<String>,
}

/// The page of a failure. A fault's full chain goes to the log once, under the reference number of the page.
pub fn reply(visit: &Visit, failure: Failure) -> Reply {
    let (status, title, sentence, mut help) = words(&failure);
    if let Failure::OwnWork(own) = &failure {
        help = who_could(visit, own);
        tracing::warn!(path = %visit.path, act = own.act.code(), "own work refused");
    }
    let reference = match &failure {
        Failure::Fault(fault) => Some(logged(visit, fault)),
        _ => None,
    };
    if visit.wants_json {
        return Reply::Json {
            status,
            body: serde_json::json!({ "refused": sentence, "reference": reference }),
        };
    }
    let page = FailurePage { shell: Shell::of(visit, title), sentence, help, reference };
    page_with(status, &page).unwrap_or_else(|_| Reply::Page { status: 500, html: sentence_only() })
}

fn sentence_only() -> String {
    "<!doctype html><title>Not shown</title><p>The page could not be shown. What was recorded is kept."
        .to_string()
}

fn words(failure: &Failure) -> (u16, &'static str, String, String) {
    let recorded = "Nothing was changed by this. Go back to the page you came from and read it again.";
    match failure {
        Failure::Refused(refusal) => (409, "Not possible now", refusal.sentence.clone(), recorded.to_string()),
        Failure::Stale(_) => (409, "Changed by someone else", failure.to_string(), recorded.to_string()),
        Failure::Denied(act) => (
            403,
            "Your roles do not permit this",
            format!("“{}” needs one of these roles: {}.", capital(act.words()), act.who_may()),
            "The attempt is noted in the history. An administrator can change roles.".to_string(),
        ),
        Failure::OwnWork(own) => (403, "This is your own work", own.sentence.clone(), String::new()),
        Failure::Missing(what) => (
            404,
            "Not found",
            format!("There is no {what}, or it is not yours to see."),
            "Check the address, or look for it with the search on top.".to_string(),
        ),
        Failure::Repeated => (409, "Already recorded", failure.to_string(), String::new()),
        Failure::RepeatedOtherwise => (
            409,
            "Sent twice with different content",
            "This form was already recorded once, with other content. The first stands; this one was not recorded."
                .to_string(),
            "Open the page again to see what is recorded, then correct it there.".to_string(),
        ),
        Failure::BadRequest(what) => (400, "Request not understood", what.clone(), recorded.to_string()),
        Failure::NoSession => (401, "Signed out", "Sign in again to go on.".to_string(), String::new()),
        Failure::Held(why) => (503, "Writing is held", why.clone(), "Reading goes on.".to_string()),
        Failure::Fault(_) => (
            500,
            "Something broke",
            "What you sent was not recorded. All that was recorded before is kept.".to_string(),
            "Tell the administrator the reference below; with it the log says what happened.".to_string(),
        ),
    }
}

/// Who holds a role for the act and took no part (screen_U76).
fn who_could(visit: &Visit, own: &OwnWork) -> String {
    let people = visit.read(store::account::people).unwrap_or_default();
    let could = |person: &&store::account::Account| {
        person.is_enabled
            && own.act.role_for(&person.roles).is_some()
            && !own.took_part.contains(&person.id)
            && visit.actor().is_ok_and(|actor| actor.account != person.id)
    };
    let names: Vec<&str> = people.iter().filter(could).map(|person| person.full_name.as_str()).collect();
    let who = match names.is_empty() {
        true => format!("Nobody else holds one of these roles: {}.", own.act.who_may()),
        false => format!("With a role for it and no part in the work: {}.", names.join(", ")),
    };
    format!("{who} Nothing was changed; the attempt is noted in the history.")
}

fn logged(visit: &Visit, fault: &crate::domain::failure::Fault) -> String {
    let reference = uuid::Uuid::new_v4().simple().to_string()[..10].to_string();
    tracing::error!(reference, path = %visit.path, error = ?fault.0, "fault");
    reference
}

/// The first letter in upper case.
pub fn capital(words: &str) -> String {
    let mut letters = words.chars();
    letters.next().map(|first| first.to_uppercase().chain(letters).collect()).unwrap_or_default()
}
