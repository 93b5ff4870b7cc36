//! The review page of one sample: exceptions, what was checked, charts, corrections, readings, the decision.

use askama::Template;

use super::card::{self, Card, answer_field};
use super::content::{self, Correction, TestBlock};
use super::load::{Loaded, load};
use super::queue::status;
use crate::acts;
use crate::acts::review::Opened;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::review::checked::{Rule, rules, summary};
use crate::domain::review::exception::{AnswerBy, AnswerRefusal, NewAnswer};
use crate::domain::review::{Part, SampleState, may_agree};
use crate::domain::subject::{Kind, Subject};
use crate::report::chart::Drawn;
use crate::report::cylinder::Strip;
use crate::web::field::{Entry, Field};
use crate::web::form::{self, Form, Typed};
use crate::web::page::Shell;
use crate::web::part::{Signatures, StatusMark, Trail};
use crate::web::photo::Photos;
use crate::web::reply::{Outcome, page_with};
use crate::web::show;
use crate::web::suggestion::Suggestions;
use crate::web::trend::TrendPart;
use crate::web::visit::Visit;

#[derive(Template)]
#[template(path = "review/sample.html")]
struct SamplePage {
    shell: Shell,
    lead: String,
    status: StatusMark,
    facts: Vec<(String, String)>,
    cards: Vec<Card>,
    suggestions: Option<Suggestions>,
    rules: Vec<Rule>,
    charts: Vec<Drawn>,
    no_charts: &'static str,
    strip: Option<Strip>,
    photos: Photos,
    corrections: Vec<Correction>,
    tests: Vec<TestBlock>,
    signatures: Signatures,
    signature_note: String,
    /// Why this person cannot agree now; empty where they can.
    why_not: String,
    agree: Option<Form>,
    send_back: Option<Form>,
    trail: Trail,
}

pub fn sample(visit: &Visit) -> Outcome {
    sample_page(200, visit, None)
}

fn sample_page(status_code: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| load(reader, id))?;
    let mut view = view(visit, &loaded)?;
    if let Some(failed) = failed {
        view.shell = view.shell.with_errors(&failed);
        put_back(&mut view, failed);
    }
    page_with(status_code, &view)
}

/// Shows a refused form at its own place, with what was typed.
fn put_back(view: &mut SamplePage, failed: Form) {
    if failed.action.ends_with("/agree") {
        view.agree = Some(failed);
    } else if failed.action.ends_with("/send-back") {
        view.send_back = Some(failed);
    } else {
        let about = |form: &Form| form.hidden.iter().find(|(name, _)| name == "about").cloned();
        let wanted = about(&failed);
        let place = view.cards.iter_mut().find(|card| card.form.as_ref().and_then(about) == wanted);
        if let Some(card) = place {
            card.form = Some(failed);
        }
    }
}

fn view(visit: &Visit, loaded: &Loaded) -> Result<SamplePage, Failure> {
    let (facts, head, zone) = (&loaded.sample.facts, &loaded.sample.head, visit.at.zone);
    let limit = |test: &str, component: &str| {
        content::limit_words(loaded.specification.as_ref(), loaded.set, test, component)
    };
    let mut tests = content::tests(&loaded.results, &loaded.readings, &loaded.checks, &limit, zone);
    for block in &mut tests {
        let own: Vec<_> = loaded.verdicts.iter().filter(|one| one.sample_test == block.id).cloned().collect();
        block.trend = TrendPart::of(&own);
    }
    let rules = rules(&loaded.checked);
    let account = visit.actor()?.account;
    let refusal = may_agree(facts, account).err();
    let cylinders = loaded.cylinders();
    let part = match facts.part() {
        Some(Part::WithExceptions) => "With exceptions",
        Some(Part::WithoutExceptions) => "Without exceptions",
        Some(Part::WaitingForOthers) => "Waiting for others",
        None => "Signed",
    };
    let is_signed = facts.state() == SampleState::Signed;
    let shell = Shell::of(visit, &head.title())
        .crumb("/review", "Review")
        .crumb("/review", part)
        .print(if is_signed { "Signed" } else { "Draft — not signed" }, &loaded.digest);
    let is_reviewer = visit.may(Act::DecideReview);
    Ok(SamplePage {
        shell,
        lead: lead(loaded, &rules),
        status: StatusMark::of(status(&loaded.sample)),
        facts: facts_of(loaded),
        cards: card::cards(visit, loaded, &tests, card::may_answer(visit, loaded))?,
        suggestions: loaded.suggestions.clone(),
        rules,
        charts: loaded.charts("", true).into_iter().map(|(_, chart)| chart.drawn()).collect(),
        no_charts: no_charts(loaded),
        strip: (!cylinders.is_empty()).then(|| Strip::of(&cylinders)),
        photos: Photos::of(visit, Subject::new(Kind::Sample, head.sample))?,
        corrections: content::corrections(&loaded.results, &loaded.readings, zone),
        tests,
        signatures: signatures(loaded, visit),
        signature_note: signature_note(facts.state(), loaded.signatures.is_empty()),
        why_not: refusal.as_ref().map(ToString::to_string).unwrap_or_default(),
        agree: if is_reviewer && !is_signed {
            Some(agree_form(visit, loaded, refusal.is_none())?)
        } else {
            None
        },
        send_back: if is_reviewer { Some(send_back_form(visit, loaded)?) } else { None },
        trail: Trail::of(&loaded.trail, zone),
    })
}

fn no_charts(loaded: &Loaded) -> &'static str {
    match loaded.sample.head.pull {
        None => "A sample without a pull has no ages, so there is no trend to draw.",
        Some(_) => "No test of this lot and condition has a number yet.",
    }
}

/// "1 exception is open, 1 answered. 9 of 11 checks raised nothing."
fn lead(loaded: &Loaded, rules: &[Rule]) -> String {
    let exceptions = &loaded.sample.facts.exceptions;
    let outside = exceptions.iter().filter(|one| one.by == AnswerBy::Investigation).count();
    let trend = exceptions.iter().filter(|one| one.kind == "out of trend").count();
    let open = exceptions.iter().filter(|one| one.answer.is_none()).count();
    let mut parts = Vec::new();
    if outside > 0 {
        parts.push(format!("{} outside the limit", show::counted(outside, "result", "results")));
    }
    if trend > 0 {
        parts.push(format!("{trend} out of trend"));
    }
    if exceptions.len() > outside + trend {
        let rest = exceptions.len() - outside - trend;
        let other = if parts.is_empty() { "" } else { "other " };
        parts.push(show::counted(rest, &format!("{other}exception"), &format!("{other}exceptions")));
    }
    let found = if parts.is_empty() { "No exception".to_string() } else { parts.join(", ") };
    let waiting = if open > 0 { format!(" {open} not answered yet.") } else { String::new() };
    format!("{found}.{waiting} {}", summary(rules))
}

fn facts_of(loaded: &Loaded) -> Vec<(String, String)> {
    use crate::domain::moment::date_shown;
    let head = &loaded.sample.head;
    let mut facts =
        vec![("Sample".to_string(), head.number.clone()), ("Purpose".to_string(), head.purpose.clone())];
    if !head.study_number.is_empty() {
        facts.push(("Study".to_string(), head.study_number.clone()));
    }
    let dates = [
        ("Taken on", head.taken_on),
        ("Window began", head.earliest_on),
        ("Window ends", head.latest_on),
        ("Received on", head.received_on),
    ];
    for (words, day) in dates {
        facts.extend(day.map(|day| (words.to_string(), date_shown(day))));
    }
    facts.push(("Judged by".to_string(), format!("{} limits", head.limit_set)));
    facts
}

/// Each signature is held against the content as it was when it was given.
fn signatures(loaded: &Loaded, visit: &Visit) -> Signatures {
    let mut signed = Vec::new();
    for (signature, digest) in &loaded.signatures {
        signed.extend(Signatures::of(std::slice::from_ref(signature), digest, visit.at.zone).signed);
    }
    Signatures { signed }
}

fn signature_note(state: SampleState, is_empty: bool) -> String {
    match (state, is_empty) {
        (_, true) => "Nobody has signed this sample yet.".to_string(),
        (SampleState::Signed, _) => String::new(),
        _ => "Changed after signing: the signature stands over the content as it was; what is recorded now needs a \
              new review and a new signature."
            .to_string(),
    }
}

fn hidden_opened(visit: &Visit, loaded: &Loaded, form: Form) -> Result<Form, Failure> {
    let sample = loaded.sample.head.sample;
    let opened = acts::review::opened(&visit.app.secrets, visit.actor()?, sample, &loaded.digest)?;
    Ok(form.hide("content", opened.content_digest).hide("opened", opened.token))
}

fn agree_form(visit: &Visit, loaded: &Loaded, may: bool) -> Result<Form, Failure> {
    let action = format!("/review/{}/agree", loaded.sample.head.sample);
    let form = hidden_opened(visit, loaded, Form::new(visit, &action, "Agree, on my signing list")?)?;
    let form = form.other_button("decision", "not yet", "Not yet");
    Ok(if may { form } else { form.quiet() })
}

fn send_back_form(visit: &Visit, loaded: &Loaded) -> Result<Form, Failure> {
    let action = format!("/review/{}/send-back", loaded.sample.head.sample);
    let mut form = hidden_opened(visit, loaded, Form::new(visit, &action, "Send back")?.quiet())?;
    for test in loaded.sample.facts.tests.iter().filter(|test| test.version.is_some()) {
        form = form.field(Field::new(&format!("test.{}", test.sample_test), &test.title, Entry::Tick));
    }
    let why = Field::new("why", "Send back, because …", Entry::Long);
    Ok(form.field(why.hint("At least 10 characters; the analyst reads it beside the test.")))
}

fn opened(typed: &Typed<'_>) -> Opened {
    Opened { content_digest: typed.raw("content"), token: typed.raw("opened") }
}

/// What the page handed out is taken as it was sent, not as it would be handed out now.
fn sent_back_again(visit: &Visit, mut form: Form) -> Form {
    for (name, value) in &mut form.hidden {
        if let ("content" | "opened", Some(sent)) = (name.as_str(), visit.form.get(name)) {
            *value = sent.to_string();
        }
    }
    form
}

pub fn decide(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| load(reader, id))?;
    let form = sent_back_again(visit, agree_form(visit, &loaded, true)?);
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    let is_agreed = visit.form.get("decision").is_none();
    form::submit(
        visit,
        form,
        |typed| Some(opened(typed)),
        |actor, opened| match is_agreed {
            true => acts::review::agree(db, secrets, actor, id, &opened),
            false => acts::review::not_yet(db, secrets, actor, id, &opened),
        },
        |()| "/review".to_string(),
        |status, form| sample_page(status, visit, Some(form)),
    )
}

pub fn send_back(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| load(reader, id))?;
    let form = sent_back_again(visit, send_back_form(visit, &loaded)?);
    let ids: Vec<i64> = loaded.sample.facts.tests.iter().map(|test| test.sample_test).collect();
    form::submit(
        visit,
        form,
        |typed| {
            let named: Vec<i64> =
                ids.iter().copied().filter(|id| typed.tick(&format!("test.{id}"))).collect();
            Some((opened(typed), named, typed.raw("why")))
        },
        |actor, (opened, named, why)| {
            let (db, secrets) = (visit.db(), &visit.app.secrets);
            acts::review::send_back(db, secrets, actor, id, &opened, &named, &why)
        },
        |()| "/review".to_string(),
        |status, form| sample_page(status, visit, Some(form)),
    )
}

pub fn answer(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let loaded = visit.read(|reader| load(reader, id))?;
    let about = visit.form.get("about").unwrap_or_default().to_string();
    let found = loaded.sample.facts.exceptions.iter().find(|one| one.about == about);
    let Some(one) = found else { return Err(AnswerRefusal::NoSuchException.into()) };
    let field = answer_field(&about);
    form::submit(
        visit,
        card::form(visit, id, one)?,
        |typed| {
            Some(match one.by {
                AnswerBy::Investigation => NewAnswer::ReadingVerified,
                AnswerBy::Acceptance => NewAnswer::Acceptable(typed.raw(&field)),
            })
        },
        |actor, new| {
            acts::review::answer(visit.db(), actor, id, &about, &new).map_err(|failure| match failure {
                Failure::Refused(mut refusal) => {
                    refusal.field = Some(field.clone());
                    Failure::Refused(refusal)
                }
                other => other,
            })
        },
        |()| format!("/review/{id}"),
        |status, form| sample_page(status, visit, Some(form)),
    )
}
