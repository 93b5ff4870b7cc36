//! Whether the record of a lot is complete: the thirteen items, one by one, with the pages that show them.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::completeness::statement::{NewAnswer, NewElsewhere};
use crate::domain::completeness::{AnswerKind, Evidence, ITEMS, Item, ItemState, Proof, judge};
use crate::domain::failure::Failure;
use crate::store;

pub const ROUTES: &[Route] = &[
    get("/lots/{id}/completeness", one),
    post("/lots/{id}/completeness", &[Act::StateCompleteness], answer),
    post("/lots/{id}/record-elsewhere", &[Act::StateRecordElsewhere], refer),
];

/// An item as the page lists it.
#[derive(Clone, Debug)]
pub struct Row {
    pub number: u8,
    pub title: &'static str,
    pub state: &'static str,
    pub is_missing: bool,
    pub sentence: String,
    pub proofs: Vec<Proof>,
}

/// The items of a lot as a table: on its own page and on the page of the decision.
#[derive(Clone, Debug, Template)]
#[template(path = "completeness/items.html")]
pub struct Items {
    pub rows: Vec<Row>,
}

impl askama::filters::HtmlSafe for Items {}

impl Items {
    pub fn of(items: &[Item]) -> Items {
        Items { rows: items.iter().map(row).collect() }
    }
}

fn row(item: &Item) -> Row {
    let (state, sentence, proofs) = match &item.state {
        ItemState::Present(proofs) => ("present", String::new(), proofs.clone()),
        ItemState::NotApplicable(why) => ("not applicable", why.clone(), Vec::new()),
        ItemState::Missing { why, proofs, .. } => ("missing", why.clone(), proofs.clone()),
    };
    Row { number: item.number, title: item.title, state, is_missing: item.is_missing(), sentence, proofs }
}

#[derive(Template)]
#[template(path = "completeness/completeness.html")]
struct CompletenessPage {
    shell: Shell,
    lead: String,
    elsewhere: String,
    items: Items,
    answer: Option<Form>,
    refer: Option<Form>,
}

fn one(visit: &Visit) -> Outcome {
    completeness_page(200, visit, None)
}

fn lead(evidence: &Evidence, items: &[Item]) -> String {
    let open = items.iter().filter(|item| item.is_missing()).count();
    match open {
        0 => format!(
            "The record of {} is complete: every item is present or does not apply.",
            evidence.lot_number
        ),
        1 => format!("1 of the thirteen items of {} is missing. It blocks the release.", evidence.lot_number),
        open => format!(
            "{open} of the thirteen items of {} are missing. They block the release.",
            evidence.lot_number
        ),
    }
}

fn completeness_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let evidence = visit.read(|reader| store::completeness::evidence(reader, id))?;
    let items = judge(&evidence);
    let mut shell = Shell::of(visit, &format!("Completeness of {}", evidence.lot_number))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{id}"), &evidence.lot_number);
    let is_open = !evidence.is_decided && !evidence.is_imported;
    let may_refer = is_open && evidence.record.is_none() && visit.may(Act::StateRecordElsewhere);
    let mut answer =
        if is_open && visit.may(Act::StateCompleteness) { Some(answer_form(visit, id)?) } else { None };
    let mut refer = if may_refer { Some(refer_form(visit, id)?) } else { None };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        let place = if failed.action.ends_with("/record-elsewhere") { &mut refer } else { &mut answer };
        *place = Some(failed);
    }
    let elsewhere = evidence.elsewhere.as_ref().map(|one| {
        format!(
            "Its executed record is kept elsewhere: {}, {} ({}; stated by {}).",
            one.reference, one.place, one.why, one.by
        )
    });
    let page = CompletenessPage {
        shell,
        lead: lead(&evidence, &items),
        elsewhere: elsewhere.unwrap_or_default(),
        items: Items::of(&items),
        answer,
        refer,
    };
    page_with(status, &page)
}

fn answer_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let items = (1..)
        .zip(ITEMS)
        .map(|(number, title): (i64, &str)| (number.to_string(), format!("({number}) {title}")));
    let answers = [
        (AnswerKind::NotApplicable, "It does not apply to this lot"),
        (AnswerKind::Present, "It is present, where I say"),
        (AnswerKind::Withdrawn, "I take back what was stated"),
    ];
    Ok(Form::new(visit, &format!("/lots/{id}/completeness"), "State it")?
        .field(Field::new("item", "Item", Entry::Select).choices(items))
        .field(
            Field::new("answer", "Statement", Entry::Radios)
                .choices(answers.map(|(kind, words)| (kind.words(), words))),
        )
        .field(
            Field::new("text", "Where it stands, or why it does not apply", Entry::Long)
                .hint("At least ten characters. It stands beside the item, with your name."),
        )
        .quiet())
}

fn refer_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/lots/{id}/record-elsewhere"), "State where it is kept")?
        .field(Field::new("reference", "Number of the executed record", Entry::Text).width(20))
        .field(Field::new("place", "Where it is kept", Entry::Text))
        .field(
            Field::new("why", "Why it was not carried out here", Entry::Text)
                .hint("At least ten characters."),
        )
        .quiet())
}

fn answer(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        answer_form(visit, id)?,
        |typed| {
            let (item, kind, text) = (typed.record("item"), typed.choice("answer"), typed.text("text", 1000));
            let kind = AnswerKind::from_words(&kind?)?;
            Some(NewAnswer { item: u8::try_from(item?).ok()?, kind, text: text? })
        },
        |actor, new| acts::completeness::answer(visit.db(), actor, id, &new),
        |()| format!("/lots/{id}/completeness"),
        |status, form| completeness_page(status, visit, Some(form)),
    )
}

fn refer(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    form::submit(
        visit,
        refer_form(visit, id)?,
        |typed| {
            let (reference, place) = (typed.text("reference", 80), typed.text("place", 200));
            let why = typed.reason("why");
            let why = why?.text().unwrap_or_default().to_string();
            Some(NewElsewhere { reference: reference?, place: place?, why })
        },
        |actor, new| acts::completeness::refer(visit.db(), actor, id, &new),
        |()| format!("/lots/{id}/completeness"),
        |status, form| completeness_page(status, visit, Some(form)),
    )
}
