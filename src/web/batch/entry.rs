//! Recording in a step: each form is read, done, and leads back; a refused one comes back in its place.

use super::super::form::{self, Form, Typed};
use super::super::reply::Outcome;
use super::super::visit::Visit;
use super::forms;
use super::late::LateWords;
use super::step::{load, step_page};
use crate::acts;
use crate::acts::batch::Loaded;
use crate::acts::batch::step::{How, Read};
use crate::acts::batch::weighing::NewWeighing;
use crate::domain::actor::Actor;
use crate::domain::batch::Entry;
use crate::domain::batch::state::slots;
use crate::domain::batch::weighing::TypedWeight;
use crate::domain::failure::Failure;
use crate::domain::typed::NumberRule;

/// What every form of a step carries: which step, what was shown, and an earlier time.
fn typed_how(typed: &mut Typed<'_>, loaded: &Loaded, step: usize) -> Option<How> {
    let late = LateWords::of(typed.visit);
    match late.read(typed.visit.at) {
        Ok(late) => Some(How {
            record: loaded.record.id,
            step,
            seen: typed.raw("seen").parse().unwrap_or_default(),
            late,
        }),
        Err(sentence) => {
            typed.fault("late_on", sentence);
            None
        }
    }
}

/// Reads and does one entry of a step. `after` is where it leads.
fn submit<N>(
    visit: &Visit,
    form: impl FnOnce(&Loaded, usize) -> Result<Form, Failure>,
    read: impl FnOnce(&mut Typed<'_>) -> Option<N>,
    act: impl FnOnce(&Actor, &How, N) -> Result<i64, Failure>,
    words: Option<&str>,
    leaves: bool,
) -> Outcome {
    let (loaded, step) = load(visit)?;
    let form = form(&loaded, step)?;
    let back = match leaves {
        true => format!("/batches/{}", loaded.record.id),
        false => format!("/batches/{}/steps/{step}", loaded.record.id),
    };
    form::submit(
        visit,
        form,
        |typed| {
            let (how, new) = (typed_how(typed, &loaded, step), read(typed));
            Some((how?, new?))
        },
        |actor, (how, new)| act(actor, &how, new),
        |_| back,
        |status, form| {
            let form = match words {
                Some(name) if status == 409 => forms::with_words(form, name),
                _ => form,
            };
            step_page(status, visit, &loaded, step, Some(form))
        },
    )
}

pub fn start(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::start(visit, loaded, step),
        |typed| {
            let has = visit.form.get("equipment").is_some();
            let equipment = if has { typed.maybe_record("equipment") } else { Some(None) };
            Some((equipment?, typed.tick("agitation")))
        },
        |actor, how, (equipment, is_on)| acts::batch::step::start(visit.db(), actor, how, equipment, is_on),
        None,
        false,
    )
}

/// Gross, tare and net of a weighing; `end` is the end of their names.
pub fn typed_weight(typed: &mut Typed<'_>, end: &str) -> Option<TypedWeight> {
    let rule = |label: &str| NumberRule::between(label, -1_000_000, 1_000_000);
    let gross = typed.maybe_decimal(&format!("gross{end}"), &rule("Gross"));
    let tare = typed.maybe_decimal(&format!("tare{end}"), &rule("Tare"));
    let net = typed.maybe_decimal(&format!("net{end}"), &rule("Net"));
    Some(TypedWeight { gross: gross?, tare: tare?, net: net? })
}

fn words_in(typed: &Typed<'_>, name: &str) -> Option<String> {
    Some(typed.raw(name)).filter(|text| !text.is_empty())
}

pub fn weigh(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::weighing(visit, loaded, step),
        |typed| {
            let material_lot = typed.text("material_lot", 60);
            let balance = typed.maybe_record("balance");
            let weight = typed_weight(typed, "");
            let described = words_in(typed, "weigh_deviation");
            Some(NewWeighing { material_lot: material_lot?, balance: balance?, typed: weight?, described })
        },
        |actor, how, new| acts::batch::weighing::weigh(visit.db(), actor, how, &new),
        Some("weigh_deviation"),
        false,
    )
}

/// A value as it was typed: a number in its unit, or one of the two words.
pub fn typed_read(
    typed: &mut Typed<'_>,
    name: &str,
    label: &str,
    unit: &str,
    is_words: bool,
) -> Option<Read> {
    if is_words {
        let chosen = typed.choice(name)?;
        return forms::WORDS.into_iter().find(|word| *word == chosen).map(Read::Words);
    }
    typed.decimal(name, &NumberRule::any(label).unit(unit)).map(Read::Number)
}

pub fn value(visit: &Visit) -> Outcome {
    let at = usize::try_from(visit.id("value")? - 1).unwrap_or(usize::MAX);
    let (loaded, step) = load(visit)?;
    let facts = loaded.facts(step)?;
    let found = slots(&facts.planned, facts.entries).get(at).and_then(|slot| forms::asked(&facts, slot));
    let (asked, label) = found.ok_or_else(|| Failure::missing("value of this step with this number"))?;
    submit(
        visit,
        |loaded, step| forms::value(visit, loaded, step, at),
        |typed| typed_read(typed, &format!("reading.{}", at + 1), &label, &asked.unit, asked.is_words),
        |actor, how, read| acts::batch::step::value(visit.db(), actor, how, at, &read),
        None,
        false,
    )
}

pub fn stop(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::stop(visit, loaded, step),
        |typed| typed.text("stop_why", 200),
        |actor, how, why| acts::batch::step::stop(visit.db(), actor, how, &why),
        None,
        false,
    )
}

pub fn resume(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::resume(visit, loaded, step),
        |_| Some(()),
        |actor, how, ()| acts::batch::step::resume(visit.db(), actor, how),
        None,
        false,
    )
}

pub fn note(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::note(visit, loaded, step),
        |typed| typed.text("note", 1000),
        |actor, how, text| acts::batch::step::note(visit.db(), actor, how, &text),
        None,
        false,
    )
}

/// The entry of the address, of this step.
fn entry_of(visit: &Visit, loaded: &Loaded, step: usize) -> Result<Entry, Failure> {
    let id = visit.id("entry")?;
    let found = loaded.entries.iter().find(|one| one.id == id && one.step == step);
    found.cloned().ok_or_else(|| Failure::missing("entry of this step with this number"))
}

pub fn answer(visit: &Visit) -> Outcome {
    let (loaded, step) = load(visit)?;
    let entry = entry_of(visit, &loaded, step)?;
    submit(
        visit,
        |loaded, step| forms::answer(visit, loaded, step, &entry),
        |typed| typed.text(&format!("described.{}", entry.id), 2000),
        |actor, how, words| acts::batch::step::answer(visit.db(), actor, how, entry.id, &words),
        None,
        false,
    )
}

pub fn end(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::end(visit, loaded, step),
        |typed| Some(words_in(typed, "end_deviation")),
        |actor, how, words| acts::batch::step::end(visit.db(), actor, how, words.as_deref()),
        Some("end_deviation"),
        true,
    )
}

pub fn skip(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::skip(visit, loaded, step),
        |typed| {
            let (why, number) =
                (typed.reason("skip_reason"), typed.maybe_count("skip_deviation", 1, 1_000_000));
            Some((why?, number?))
        },
        |actor, how, (why, number)| acts::batch::step::skip(visit.db(), actor, how, &why, number),
        None,
        true,
    )
}

pub fn repeat(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::repeat(visit, loaded, step),
        |typed| {
            let why = typed.reason("repeat_reason");
            let number = typed.maybe_count("repeat_deviation", 1, 1_000_000);
            Some((why?, number?))
        },
        |actor, how, (why, number)| acts::batch::step::repeat(visit.db(), actor, how, &why, number),
        None,
        false,
    )
}

pub fn check(visit: &Visit) -> Outcome {
    submit(
        visit,
        |loaded, step| forms::check(visit, loaded, step),
        |_| Some(()),
        |actor, how, ()| acts::batch::check::check(visit.db(), actor, how),
        None,
        true,
    )
}

pub fn weigh_again(visit: &Visit) -> Outcome {
    let (loaded, step) = load(visit)?;
    let first = entry_of(visit, &loaded, step)?;
    let end = format!(".{}", first.id);
    submit(
        visit,
        |loaded, step| forms::second(visit, loaded, step, &first),
        |typed| {
            let balance = typed.maybe_record(&format!("balance{end}"));
            let weight = typed_weight(typed, &end);
            Some((balance?, weight?))
        },
        |actor, how, (balance, weight)| {
            let done = acts::batch::check::weigh_again(visit.db(), actor, how, first.id, balance, &weight);
            done.map_err(|failure| match failure {
                Failure::Refused(mut refusal) => {
                    refusal.field = refusal.field.map(|field| format!("{field}{end}"));
                    Failure::Refused(refusal)
                }
                other => other,
            })
        },
        None,
        false,
    )
}
