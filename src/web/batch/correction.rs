//! Correcting one entry of a step: was → is, with a reason.

use super::super::field::{Entry as Kind, Field};
use super::super::form::{self, Form, FormPage, Typed};
use super::super::page::Shell;
use super::super::reply::{Outcome, page_with};
use super::super::visit::Visit;
use super::entry::{typed_read, typed_weight};
use super::forms::{WORDS, bare};
use super::step::load;
use crate::acts;
use crate::acts::batch::Loaded;
use crate::acts::batch::correction::Corrected;
use crate::acts::batch::step::How;
use crate::domain::batch::{Entry, EntryKind};
use crate::domain::failure::Failure;
use crate::domain::master::StepValue;
use crate::domain::reason::PICKED;

fn entry(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Entry, Failure> {
    let id = visit.id("entry")?;
    let found = loaded.entries.iter().find(|one| one.id == id && one.step == step);
    found.cloned().ok_or_else(|| Failure::missing("entry of this step with this number"))
}

fn asked(loaded: &Loaded, step: usize, was: &Entry) -> Result<StepValue, Failure> {
    let facts = loaded.facts(step)?;
    let found = facts.planned.step.values.iter().find(|one| one.name == was.name);
    Ok(found.cloned().unwrap_or_default())
}

fn correct_form(visit: &Visit, loaded: &Loaded, step: usize, was: &Entry) -> Result<Form, Failure> {
    let form = bare(visit, loaded, step, &format!("/entries/{}", was.id), "Correct it")?;
    let number = |name: &str, label: &str, value: &str| {
        Field::new(name, &format!("{label}, {}", was.unit), Kind::Decimal).width(12).value(value)
    };
    let form = match was.kind {
        EntryKind::Weighing | EntryKind::SecondWeighing => form
            .field(number("gross", "Gross", &was.weighed.gross))
            .field(number("tare", "Tare", &was.weighed.tare))
            .field(number("net", "Net", &was.typed)),
        EntryKind::Value if asked(loaded, step, was)?.is_words => form.field(
            Field::new("is", &was.label(), Kind::Radios)
                .choices(WORDS.map(|one| (one, one)))
                .value(was.typed.as_str()),
        ),
        EntryKind::Value => form.field(number("is", &was.label(), &was.typed).hint(&was.limits)),
        _ => form.field(Field::new("is", "Note", Kind::Long).value(was.typed.as_str())),
    };
    let form = form
        .field(
            Field::new("picked", "Why", Kind::Radios)
                .choices(PICKED[..2].iter().map(|one| (*one, *one)))
                .hint("One press for the usual reasons; else write it."),
        )
        .field(Field::new("reason", "Why, in words", Kind::Text));
    Ok(Form { is_primary: true, ..form })
}

fn correction_page(status: u16, visit: &Visit, loaded: &Loaded, step: usize, form: Form) -> Outcome {
    let was = entry(visit, loaded, step)?;
    let words = loaded.facts(step)?.planned.words();
    let shell = Shell::of(visit, &format!("Correct {}", was.label()))
        .crumb(format!("/batches/{}", loaded.record.id), loaded.record.number.as_str())
        .crumb(format!("/batches/{}/steps/{step}", loaded.record.id), words)
        .bench()
        .with_errors(&form);
    let lead = format!(
        "Recorded is {} by {}. It stays readable beside what you correct it to.",
        was.shown(),
        was.by
    );
    page_with(status, &FormPage { shell, lead, note: String::new(), form })
}

pub fn page(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let (loaded, step) = load(visit)?;
    let was = entry(visit, &loaded, step)?;
    let account = visit.actor()?.account;
    if super::step::is_hidden(&loaded.facts(step)?, account) && was.kind == EntryKind::Weighing {
        return Err(Failure::missing("entry that you may see before you have weighed"));
    }
    let form = correct_form(visit, &loaded, step, &was)?;
    correction_page(200, visit, &loaded, step, form)
}

fn typed_correction(typed: &mut Typed<'_>, was: &Entry, asked: &StepValue) -> Option<Corrected> {
    match was.kind {
        EntryKind::Weighing | EntryKind::SecondWeighing => typed_weight(typed, "").map(Corrected::Weight),
        EntryKind::Value => {
            typed_read(typed, "is", &was.label(), &asked.unit, asked.is_words).map(Corrected::Read)
        }
        _ => typed.text("is", 1000).map(Corrected::Words),
    }
}

pub fn correct(visit: &Visit) -> Outcome {
    let (loaded, step) = load(visit)?;
    let was = entry(visit, &loaded, step)?;
    let asked = asked(&loaded, step, &was)?;
    form::submit(
        visit,
        correct_form(visit, &loaded, step, &was)?,
        |typed| {
            let becomes = typed_correction(typed, &was, &asked);
            let name = if typed.raw("reason").is_empty() { "picked" } else { "reason" };
            let reason = typed.reason(name);
            let seen = typed.raw("seen").parse().unwrap_or_default();
            let how = How { record: loaded.record.id, step, seen, ..How::default() };
            Some((how, becomes?, reason?))
        },
        |actor, (how, becomes, reason)| {
            acts::batch::correction::correct(visit.db(), actor, &how, was.id, &becomes, &reason)
        },
        |_| format!("/batches/{}/steps/{step}", loaded.record.id),
        |status, form| correction_page(status, visit, &loaded, step, form),
    )
}
