//! Exception cards: value, limit, chart with the point marked, readings, and the question.

use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::review::exception::{AnswerBy, Exception};
use crate::domain::status::Status;
use crate::report::chart::Drawn;
use crate::web::field::{Entry, Field};
use crate::web::form::Form;
use crate::web::part::StatusMark;
use crate::web::show;
use crate::web::visit::Visit;

use super::content::TestBlock;
use super::load::Loaded;

/// One exception as its card shows it.
pub struct Card {
    pub class: &'static str,
    pub status: Option<StatusMark>,
    pub kind: String,
    pub heading: String,
    pub sentence: String,
    pub value: String,
    pub limit: String,
    pub facts: Vec<(String, String)>,
    /// Number and page of the investigation.
    pub investigation: Option<(i64, String)>,
    pub chart: Option<Drawn>,
    pub answer: String,
    pub form: Option<Form>,
}

/// The field that holds the answer to an exception: unique on the page.
pub fn answer_field(about: &str) -> String {
    format!("because.{}", about.replace(' ', "-"))
}

pub fn cards(visit: &Visit, loaded: &Loaded, blocks: &[TestBlock], may: bool) -> Result<Vec<Card>, Failure> {
    let exceptions = &loaded.sample.facts.exceptions;
    exceptions.iter().enumerate().map(|(place, one)| card(visit, loaded, blocks, one, place, may)).collect()
}

fn card(
    visit: &Visit,
    loaded: &Loaded,
    blocks: &[TestBlock],
    one: &Exception,
    place: usize,
    may: bool,
) -> Result<Card, Failure> {
    let block = blocks.iter().find(|block| Some(block.id) == one.sample_test);
    let result =
        block.and_then(|block| block.results.iter().find(|row| row.is_out).or(block.results.first()));
    let form =
        if may && one.answer.is_none() { Some(form(visit, loaded.sample.head.sample, one)?) } else { None };
    Ok(Card {
        class: class(one),
        status: (one.by == AnswerBy::Investigation).then(|| StatusMark::of(Status::OutOfSpecification)),
        kind: one.kind.clone(),
        heading: block.map_or_else(|| crate::web::failure::capital(&one.kind), |block| block.title.clone()),
        sentence: one.sentence.clone(),
        value: result.map(|row| row.shown.clone()).unwrap_or_default(),
        limit: result.map(|row| row.limit.clone()).unwrap_or_default(),
        facts: block.map(facts).unwrap_or_default(),
        investigation: investigation(loaded, one),
        chart: chart(loaded, one, place),
        answer: answer(visit, loaded, one),
        form,
    })
}

fn class(one: &Exception) -> &'static str {
    match (one.kind.as_str(), one.is_action) {
        ("out of trend" | "trend of the lot" | "early warning", _) => "exception trend",
        (_, true) => "exception",
        _ => "exception side",
    }
}

fn facts(block: &TestBlock) -> Vec<(String, String)> {
    let standing = block.readings.iter().filter(|row| !row.note.contains("replaced"));
    let values: Vec<String> =
        standing.map(|row| format!("{} ({}, {})", row.shown, row.field, row.place)).collect();
    let mut facts = vec![("Readings".to_string(), values.join("; "))];
    facts.extend(block.steps.iter().map(|step| ("Work".to_string(), step.clone())));
    facts
}

fn investigation(loaded: &Loaded, one: &Exception) -> Option<(i64, String)> {
    let number = one.investigation?;
    let found = loaded.investigations.iter().find(|(known, _)| *known == number)?;
    Some((number, format!("/investigations/{}", found.1)))
}

fn chart(loaded: &Loaded, one: &Exception, place: usize) -> Option<Drawn> {
    let id = one.sample_test?;
    let test = loaded.results.iter().find(|result| result.sample_test == id)?;
    let charts = loaded.charts(&format!("exception-{place}-"), true);
    charts.into_iter().find(|(name, _)| *name == test.test).map(|(_, chart)| chart.drawn())
}

fn answer(visit: &Visit, loaded: &Loaded, one: &Exception) -> String {
    let found = loaded.answers.iter().rev().find(|line| line.about == one.about);
    found.map_or_else(String::new, |line| {
        format!("{} — {}, {}", line.answer, line.by, show::instant(&line.at, visit.at.zone))
    })
}

/// The form that answers one exception.
pub fn form(visit: &Visit, sample: i64, one: &Exception) -> Result<Form, Failure> {
    let action = format!("/review/{sample}/answers");
    let form = match one.by {
        AnswerBy::Investigation => {
            let words = match one.investigation {
                Some(number) => format!("Reading verified, investigation {number} open"),
                None => "Reading verified".to_string(),
            };
            Form::new(visit, &action, &words)?
        }
        AnswerBy::Acceptance => Form::new(visit, &action, "Acceptable")?.field(
            Field::new(&answer_field(&one.about), "Acceptable, because …", Entry::Text)
                .hint("At least 20 characters; it stands in the lot file."),
        ),
    };
    Ok(form.hide("about", one.about.clone()).quiet())
}

/// Whether the person may answer here at all.
pub fn may_answer(visit: &Visit, loaded: &Loaded) -> bool {
    let account = visit.actor().map(|actor| actor.account).unwrap_or_default();
    visit.may(Act::AnswerException) && !loaded.sample.facts.is_own_work_of(account)
}
