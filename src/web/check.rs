//! The laboratory check by a second person: the queue, and one test with all that was read.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::part::StatusMark;
use super::reply::{Outcome, page, page_with};
use super::review::content::{self, Correction, TestBlock};
use super::review::load::{Loaded, load};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::check::{SHORTEST_WHY, TestFacts, TestState, may_check, state};
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::qualification;
use crate::domain::status::Status;
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/checks", list),
    get("/checks/{id}", test),
    post("/checks/{id}", &[Act::CheckResult], check),
    post("/checks/{id}/send-back", &[Act::SendBackResult], send_back),
];

#[derive(Template)]
#[template(path = "check/list.html")]
struct ListPage {
    shell: Shell,
    lead: String,
    rows: Vec<Row>,
}

struct Row {
    path: String,
    test: String,
    sample: String,
    number: String,
    window: String,
    note: &'static str,
    status: StatusMark,
}

fn list(visit: &Visit) -> Outcome {
    let account = visit.actor()?.account;
    let mut samples = visit.read(|reader| {
        let ids = store::review::facts::ids_to_check(reader)?;
        store::review::facts::many(reader, &ids)
    })?;
    samples.sort_by_key(|sample| (sample.head.window_end().is_none(), sample.head.window_end()));
    let mut rows = Vec::new();
    for sample in &samples {
        for test in sample.facts.tests.iter().filter(|test| state(test) == TestState::WaitingForCheck) {
            let is_own = test.performers.contains(&account);
            rows.push(Row {
                path: format!("/checks/{}", test.sample_test),
                test: test.title.clone(),
                sample: sample.head.title(),
                number: sample.head.number.clone(),
                window: sample.head.window_end().map(date_shown).unwrap_or_default(),
                note: if is_own { "your own readings: a second person checks" } else { "" },
                status: StatusMark::of(Status::WaitingForCheck),
            });
        }
    }
    let own = rows.iter().filter(|row| !row.note.is_empty()).count();
    let lead = match rows.len() {
        0 => "No test waits for its check.".to_string(),
        all => format!(
            "{} for a second qualified person; {} of them you read yourself.",
            show::counted(all, "test waits", "tests wait"),
            if own == 0 { "none".to_string() } else { own.to_string() }
        ),
    };
    page(&ListPage { shell: Shell::of(visit, "Laboratory checks"), lead, rows })
}

#[derive(Template)]
#[template(path = "check/test.html")]
struct TestPage {
    shell: Shell,
    lead: String,
    status: StatusMark,
    flags: Vec<String>,
    test: TestBlock,
    corrections: Vec<Correction>,
    /// Why this person cannot check it; empty where they can.
    why_not: String,
    check: Option<Form>,
    send_back: Option<Form>,
}

fn test(visit: &Visit) -> Outcome {
    test_page(200, visit, None)
}

/// The sample of a test, and the test's own facts.
fn loaded(visit: &Visit) -> Result<(Loaded, TestFacts), Failure> {
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| {
        let sample = store::review::sample_of_test(reader, id)?;
        load(reader, sample)
    })?;
    let facts = loaded.sample.facts.tests.iter().find(|test| test.sample_test == id).cloned();
    let facts = facts.ok_or_else(|| Failure::missing("test with this number"))?;
    Ok((loaded, facts))
}

/// The first reason why this person cannot check the test, in the order the act would refuse.
fn why_not(visit: &Visit, facts: &TestFacts) -> Result<String, Failure> {
    let actor = visit.actor()?;
    if let Err(refusal) = may_check(facts, actor.account, facts.version.unwrap_or_default()) {
        return Ok(refusal.to_string());
    }
    let today = visit.at.date();
    let found = visit.read(|reader| {
        let method_version = store::check::method_version(reader, facts.sample_test)?;
        store::qualification::facts(reader, actor.account, method_version, today)
    })?;
    Ok(qualification::may_test(&found, today).err().map(|refusal| refusal.to_string()).unwrap_or_default())
}

fn test_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let (loaded, facts) = loaded(visit)?;
    let zone = visit.at.zone;
    let limit = |test: &str, component: &str| {
        content::limit_words(loaded.specification.as_ref(), loaded.set, test, component)
    };
    let blocks = content::tests(&loaded.results, &loaded.readings, &loaded.checks, &limit, zone);
    let block = blocks.into_iter().find(|block| block.id == facts.sample_test);
    let block = block.ok_or_else(|| Failure::missing("completed test with this number"))?;
    let corrections = content::corrections(&loaded.results, &loaded.readings, zone);
    let own = |one: &&crate::domain::review::exception::Exception| one.sample_test == Some(facts.sample_test);
    let title = format!("Check {}", facts.title);
    let mut view = TestPage {
        shell: Shell::of(visit, &title).crumb("/checks", "Laboratory checks"),
        lead: format!("{}, {}", loaded.sample.head.title(), loaded.sample.head.number),
        status: StatusMark::of(status_of(&facts)),
        flags: loaded.sample.facts.exceptions.iter().filter(own).map(|one| one.sentence.clone()).collect(),
        corrections: corrections.into_iter().filter(|one| one.test == facts.title).collect(),
        test: block,
        why_not: why_not(visit, &facts)?,
        check: None,
        send_back: None,
    };
    if visit.may(Act::CheckResult) && view.why_not.is_empty() {
        view.check = Some(check_form(visit, &facts)?);
        view.send_back = Some(send_back_form(visit, &facts)?);
    }
    if let Some(failed) = failed {
        view.shell = view.shell.with_errors(&failed);
        let place = if failed.action.ends_with("/send-back") { &mut view.send_back } else { &mut view.check };
        *place = Some(failed);
    }
    page_with(status, &view)
}

fn status_of(facts: &TestFacts) -> Status {
    match state(facts) {
        TestState::Open => Status::InProgress,
        TestState::SentBack => Status::SentBack,
        TestState::WaitingForCheck => Status::WaitingForCheck,
        TestState::Ready => Status::WaitingForReview,
    }
}

fn check_form(visit: &Visit, facts: &TestFacts) -> Result<Form, Failure> {
    let version = facts.version.unwrap_or_default().to_string();
    Ok(Form::new(visit, &format!("/checks/{}", facts.sample_test), "Checked")?.hide("version", version))
}

fn send_back_form(visit: &Visit, facts: &TestFacts) -> Result<Form, Failure> {
    let action = format!("/checks/{}/send-back", facts.sample_test);
    let hint = format!("At least {SHORTEST_WHY} characters; the analyst reads it beside the test.");
    Ok(Form::new(visit, &action, "Send back")?
        .field(Field::new("why", "Send back, because …", Entry::Long).hint(&hint))
        .hide("version", facts.version.unwrap_or_default().to_string())
        .quiet())
}

/// The version the person looked at, as it was sent.
fn seen(visit: &Visit) -> Result<i64, Failure> {
    let sent = visit.form.get("version").and_then(|text| text.parse().ok());
    sent.ok_or_else(|| Failure::BadRequest("The version of the result is missing.".to_string()))
}

fn check(visit: &Visit) -> Outcome {
    let (_, facts) = loaded(visit)?;
    let version = seen(visit)?;
    form::submit(
        visit,
        check_form(visit, &facts)?,
        |_| Some(()),
        |actor, ()| acts::check::check(visit.db(), actor, facts.sample_test, version),
        |()| "/checks".to_string(),
        |status, form| test_page(status, visit, Some(form)),
    )
}

fn send_back(visit: &Visit) -> Outcome {
    let (_, facts) = loaded(visit)?;
    let version = seen(visit)?;
    form::submit(
        visit,
        send_back_form(visit, &facts)?,
        |typed| Some(typed.raw("why")),
        |actor, why| acts::check::send_back(visit.db(), actor, facts.sample_test, version, &why),
        |()| "/checks".to_string(),
        |status, form| test_page(status, visit, Some(form)),
    )
}
