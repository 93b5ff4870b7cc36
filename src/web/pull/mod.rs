//! One pull: its window, its containers, its tests, and the acts on it.

mod take;

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::part::{StatusMark, Trail};
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::study::one::mark;
use super::table::Table;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::moment::{date_shown, opens_shown, until_shown};
use crate::domain::protocol::cost::minutes_words;
use crate::domain::pull::{self, Event, PullFacts};
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::container::LedgerLine;
use crate::store::pull::{Pull, TestLine};

pub const ROUTES: &[Route] = &[
    get("/pulls/{id}", one),
    post("/pulls/{id}/take", &[Act::RecordPull], take::take),
    post("/pulls/{id}/more", &[Act::RecordPull], take::take_more),
    post("/pulls/{id}/miss", &[Act::MissPull], miss),
    post("/pulls/{id}/cancel", &[Act::CancelPull], cancel),
    post("/pulls/{id}/assign", &[Act::AssignPull], assign),
];

#[derive(Template)]
#[template(path = "pull/pull.html")]
struct PullPage {
    shell: Shell,
    pull: Pull,
    status: StatusMark,
    due: String,
    side: String,
    minutes: String,
    containers: Vec<(i64, String, String, String)>,
    tests: Vec<TestLine>,
    trend: Table,
    is_at_bench: bool,
    forms: Vec<PullForm>,
    /// Planned in its place, and the one in whose place it was planned, by an amendment.
    successor: Option<(i64, String)>,
    predecessor: Option<(i64, String)>,
    trail: Trail,
}

/// One thing that can be done with the pull; what is seldom done is folded.
struct PullForm {
    heading: &'static str,
    form: Form,
    is_folded: bool,
}

impl PullForm {
    fn open(heading: &'static str, form: Form) -> PullForm {
        PullForm { heading, form, is_folded: false }
    }

    fn folded(heading: &'static str, form: Form) -> PullForm {
        PullForm { heading, form, is_folded: true }
    }
}

fn one(visit: &Visit) -> Outcome {
    pull_page(200, visit, visit.id("id")?, None)
}

/// `6 months, due 3 Mar 2027, window 3–10 Mar 2027, closes in 4 days` (screen_U97, screen_U98).
pub(in crate::web) fn due_words(facts: &PullFacts, today: chrono::NaiveDate) -> String {
    let (Some(due_on), Some(window)) = (facts.due_on, facts.window()) else {
        return "imported, without a due date".to_string();
    };
    let dates = format!("due {}, window {}", date_shown(due_on), window.words());
    format!("{dates}, {}", left_words(facts, today))
}

/// What happened to a pull and when, or how long its window is still closed or open.
pub(in crate::web) fn left_words(facts: &PullFacts, today: chrono::NaiveDate) -> String {
    let Some(window) = facts.window() else { return "imported, without a due date".to_string() };
    match (facts.event, facts.happened_on) {
        (Some(event), Some(on)) => format!("{} on {}", event.words(), date_shown(on)),
        _ if today < window.earliest_on => opens_shown(today, window.earliest_on),
        _ => until_shown(today, window.latest_on),
    }
}

fn container_row(visit: &Visit, line: LedgerLine) -> (i64, String, String, String) {
    let at = format!("{}, {}", show::instant(&line.at, visit.at.zone), line.who);
    (line.container, line.label, line.kind, at)
}

fn pull_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let (pull, containers, tests, verdicts, lines) = visit.read(|reader| {
        let pull = store::pull::get(reader, id)?;
        let containers = store::container::of_pull(reader, id)?;
        let tests = store::pull::tests(reader, pull.sample)?;
        let lines = store::trail::of_subject(reader, Subject::new(Kind::Pull, id))?;
        let verdicts = store::trend::verdict::of_sample(reader, pull.sample)?;
        Ok((pull, containers, tests, verdicts, lines))
    })?;
    let (successor, predecessor) = visit.read(|reader| {
        Ok((store::amendment::successor(reader, id)?, store::amendment::predecessor(reader, id)?))
    })?;
    let today = visit.at.date();
    let mut forms = forms(visit, &pull)?;
    let mut shell = Shell::of(visit, &format!("Pull {}", pull.number))
        .crumb("/week", "Week")
        .crumb(format!("/studies/{}", pull.study), pull.study_number.clone());
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        match forms.iter_mut().find(|one| one.form.action == failed.action) {
            Some(place) => *place = PullForm::open(place.heading, failed),
            None => forms.insert(0, PullForm::open("What could not be recorded", failed)),
        }
    }
    let page = PullPage {
        shell,
        status: mark(&pull.facts, today),
        due: due_words(&pull.facts, today),
        side: pull::side_fact(&pull.facts, today),
        minutes: minutes_words(pull.minutes),
        containers: containers.into_iter().map(|line| container_row(visit, line)).collect(),
        tests,
        trend: super::trend::table(&verdicts),
        is_at_bench: pull.facts.event == Some(Event::Pulled) || pull.facts.is_imported,
        forms,
        successor,
        predecessor,
        trail: Trail::of(&lines, visit.at.zone),
        pull,
    };
    page_with(status, &page)
}

/// What this person can do with the pull as it stands.
fn forms(visit: &Visit, pull: &Pull) -> Result<Vec<PullForm>, Failure> {
    let mut forms = Vec::new();
    let is_open = pull::is_open(&pull.facts).is_ok();
    if is_open && visit.may(Act::RecordPull) {
        forms.push(PullForm::open("Take the pull", take::take_form(visit, pull)?));
    }
    let may_be_given = pull::may_assign(&pull.facts, true).is_ok();
    if may_be_given && visit.may(Act::AssignPull) {
        forms.push(PullForm::open("Give it to a person", assign_form(visit, pull)?));
    }
    let is_taken = pull.facts.event == Some(Event::Pulled) && !pull.facts.is_signed;
    if is_taken && pull.containers_left > 0 && visit.may(Act::RecordPull) {
        forms.push(PullForm::folded("Take more containers", take::more_form(visit, pull)?));
    }
    if pull::may_miss(&pull.facts, visit.at.date()).is_ok() && visit.may(Act::MissPull) {
        forms.push(PullForm::folded("Record it as missed", miss_form(visit, pull.id)?));
    }
    if is_open && visit.may(Act::CancelPull) {
        forms.push(PullForm::folded("Cancel it", cancel_form(visit, pull.id)?));
    }
    Ok(forms)
}

/// The people a pull can be given to.
pub(in crate::web) fn people_at_bench(visit: &Visit) -> Result<Vec<(String, String)>, Failure> {
    let people = visit.read(store::account::people)?;
    let at_bench = people.into_iter().filter(|person| {
        person.is_enabled && [Role::Analyst, Role::LabManager].iter().any(|role| person.roles.contains(role))
    });
    Ok(at_bench.map(|person| (person.id.to_string(), person.full_name)).collect())
}

fn assign_form(visit: &Visit, pull: &Pull) -> Result<Form, Failure> {
    let choices = people_at_bench(visit)?;
    let now = pull.assigned.map(|account| account.to_string()).unwrap_or_default();
    Ok(Form::new(visit, &format!("/pulls/{}/assign", pull.id), "Assign")?
        .field(Field::new("account", "Who does it", Entry::Select).choices(choices).value(now))
        .quiet())
}

fn assign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let pull = visit.read(|reader| store::pull::get(reader, id))?;
    form::submit(
        visit,
        assign_form(visit, &pull)?,
        |typed| typed.record("account"),
        |actor, account| acts::pull::assign(visit.db(), actor, id, account),
        |()| format!("/pulls/{id}"),
        |status, form| pull_page(status, visit, id, Some(form)),
    )
}

fn reason_form(visit: &Visit, action: &str, name: &str, label: &str, button: &str) -> Result<Form, Failure> {
    Ok(Form::new(visit, action, button)?
        .field(
            Field::new(name, label, Entry::Text).hint("At least ten characters; it stands in the history."),
        )
        .quiet())
}

fn miss_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let action = format!("/pulls/{id}/miss");
    reason_form(visit, &action, "because", "It was missed, because", "Record it as missed")
}

fn cancel_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let action = format!("/pulls/{id}/cancel");
    reason_form(visit, &action, "cancelled_because", "It is cancelled, because", "Cancel the pull")
}

fn miss(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        miss_form(visit, id)?,
        |typed| typed.reason("because"),
        |actor, reason| acts::pull::miss(visit.db(), actor, id, &reason),
        |()| format!("/pulls/{id}"),
        |status, form| pull_page(status, visit, id, Some(form)),
    )
}

fn cancel(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        cancel_form(visit, id)?,
        |typed| typed.reason("cancelled_because"),
        |actor, reason| acts::pull::cancel(visit.db(), actor, id, &reason),
        |()| format!("/pulls/{id}"),
        |status, form| pull_page(status, visit, id, Some(form)),
    )
}
