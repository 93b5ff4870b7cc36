//! The working record of one deviation: its lines, what closing still asks for, and who decides.

use askama::Template;

use super::{class_words, state};
use crate::acts;
use crate::acts::signature::{Closure, Continuation, authenticate};
use crate::domain::act::Act;
use crate::domain::deviation::{DeviationClass, DeviationEntryKind, DeviationFacts, NewDeviationEntry};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::deviation::{Deviation, DeviationEntry};
use crate::store::signature::Signature;
use crate::web::attachment::Files;
use crate::web::failure::capital;
use crate::web::field::{Choice, Entry, Field};
use crate::web::form::{self, Form, Typed};
use crate::web::material_lot::typed_lot;
use crate::web::page::Shell;
use crate::web::part::{Signatures, Trail};
use crate::web::reply::{Outcome, page_with};
use crate::web::show;
use crate::web::visit::Visit;

struct Line {
    kind: String,
    text: String,
    by: String,
    at: String,
}

fn line(entry: &DeviationEntry, visit: &Visit) -> Line {
    let class = entry.class.as_ref().map(|class| format!("{class}: ")).unwrap_or_default();
    let lot = entry.other_lot.as_ref().map(|lot| format!(" (lot {lot})")).unwrap_or_default();
    let study = entry.study.as_ref().map(|study| format!(" (study {study})")).unwrap_or_default();
    Line {
        kind: entry.kind.clone(),
        text: format!("{class}{}{lot}{study}", entry.text),
        by: entry.by.clone(),
        at: show::instant(&entry.at, visit.at.zone),
    }
}

#[derive(Template)]
#[template(path = "deviation/deviation.html")]
struct DeviationPage {
    shell: Shell,
    found: Deviation,
    class: &'static str,
    state: &'static str,
    occurred_on: String,
    opened_at: String,
    /// What closing still asks for; empty once it may be closed.
    missing: String,
    lines: Vec<Line>,
    forms: Vec<(&'static str, Form)>,
    signatures: Signatures,
    files: Files,
    trail: Trail,
}

pub(super) fn one(visit: &Visit) -> Outcome {
    deviation_page(200, visit, visit.id("id")?, None)
}

fn deviation_page(status: u16, visit: &Visit, id: i64, failed: Option<Form>) -> Outcome {
    let subject = Subject::new(Kind::Deviation, id);
    let (found, entries, signed, trail) = visit.read(|reader| {
        Ok((
            store::deviation::get(reader, id)?,
            store::deviation::entries(reader, id)?,
            signatures(reader, id)?,
            store::trail::of_subject(reader, subject)?,
        ))
    })?;
    let title = format!("Deviation {}", found.facts.number);
    let mut shell = Shell::of(visit, &title).crumb("/deviations", "Deviations");
    let mut forms = if found.facts.is_closed { Vec::new() } else { forms(visit, id, &found)? };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        if let Some(place) = forms.iter_mut().find(|(_, form)| form.action == failed.action) {
            place.1 = failed;
        }
    }
    let page = DeviationPage {
        shell,
        class: class_words(&found.facts),
        state: state(&found.facts),
        occurred_on: date_shown(found.occurred_on),
        opened_at: show::instant(&found.opened_at, visit.at.zone),
        missing: missing(&found.facts),
        lines: entries.iter().map(|entry| line(entry, visit)).collect(),
        forms,
        signatures: Signatures::each(signed, visit.at.zone),
        files: Files::of(visit, subject)?,
        trail: Trail::of(&trail, visit.at.zone),
        found,
    };
    page_with(status, &page)
}

fn signatures(reader: &store::Reader<'_>, id: i64) -> Result<Vec<(Signature, String)>, Failure> {
    let signed = store::signature::of(reader, Kind::Deviation, id)?;
    let with_digest = signed.into_iter().map(|one| {
        let text = store::deviation::canonical_of_signature(reader, id, one.id)?;
        Ok((one, sha256_hex(text.unwrap_or_default().as_bytes())))
    });
    with_digest.collect()
}

fn missing(facts: &DeviationFacts) -> String {
    if facts.is_closed {
        return String::new();
    }
    let is_lot = facts.lot.is_some();
    let parts = [
        (facts.class.is_none(), "its class"),
        (!facts.has_cause, "the cause"),
        (!facts.are_other_lots_assessed, "the assessment of other lots"),
        (is_lot && !facts.is_stability_answered, "the answer on stability"),
    ];
    let open: Vec<&str> = parts.iter().filter(|(is_open, _)| *is_open).map(|(_, words)| *words).collect();
    match open.is_empty() {
        true => "Nothing is missing: QA can close it.".to_string(),
        false => format!("Before QA can close it: {}.", open.join(", ")),
    }
}

fn forms(visit: &Visit, id: i64, found: &Deviation) -> Result<Vec<(&'static str, Form)>, Failure> {
    let mut forms = Vec::new();
    if visit.may(Act::WriteDeviation) {
        forms.push(("Write in it", entry_form(visit, id, found)?));
    }
    if visit.may(Act::CloseDeviation) {
        if !found.facts.is_continued {
            forms.push(("Let work go on", decision_form(visit, id, "continuation")?));
        }
        forms.push(("Close it", decision_form(visit, id, "closure")?));
    }
    Ok(forms)
}

/// The lines a person writes; continuing and closing are signed by QA.
const WRITTEN: [(DeviationEntryKind, &str); 7] = [
    (DeviationEntryKind::Classified, "Class"),
    (DeviationEntryKind::Cause, "Cause, as far as it was found"),
    (DeviationEntryKind::Action, "Action taken or decided"),
    (DeviationEntryKind::OtherLotConsidered, "Another lot that was considered"),
    (DeviationEntryKind::OtherLotsAssessed, "Outcome of the assessment of other lots"),
    (DeviationEntryKind::AddedToStability, "Add this lot to stability? Yes, it is on a study"),
    (DeviationEntryKind::NotAddedToStability, "Add this lot to stability? No, because …"),
];

fn entry_form(visit: &Visit, id: i64, found: &Deviation) -> Result<Form, Failure> {
    let is_offered = |kind: DeviationEntryKind| {
        let is_on_stability =
            matches!(kind, DeviationEntryKind::AddedToStability | DeviationEntryKind::NotAddedToStability);
        found.facts.lot.is_some() || !is_on_stability
    };
    let kinds =
        WRITTEN.iter().filter(|(kind, _)| is_offered(*kind)).map(|(kind, words)| (kind.words(), *words));
    let classes = DeviationClass::ALL.map(|class| Choice {
        value: class.words().to_string(),
        label: capital(class.words()),
        anchor: class.anchor().to_string(),
        photo: None,
    });
    let mut form = Form::new(visit, &format!("/deviations/{id}/entries"), "Write it down")?
        .field(Field::new("kind", "Line", Entry::Radios).choices(kinds))
        .field(Field::new("class", "Class, for that line", Entry::Radios).grades(classes.to_vec()))
        .field(Field::new("text", "Words", Entry::Long))
        .field(
            Field::new("other_lot", "Other lot, for that line", Entry::Text)
                .width(20)
                .hint("Its number, as on the label."),
        );
    if let Some(lot) = found.facts.lot {
        let studies = visit.read(|reader| store::lot::studies(reader, lot))?;
        let choices = studies.into_iter().map(|study| (study.id.to_string(), study.number));
        form = form.field(Field::new("study", "Study, for that line", Entry::Select).choices(choices));
    }
    Ok(form.quiet())
}

fn typed_entry(typed: &mut Typed<'_>, has_lot: bool) -> Option<NewDeviationEntry> {
    let (kind, class) = (typed.choice("kind"), typed.maybe_choice("class"));
    let text = typed.text("text", 4000);
    let other_lot = typed_lot(typed, "other_lot");
    let study = if has_lot { typed.maybe_record("study") } else { Some(None) };
    let kind = DeviationEntryKind::from_words(&kind?)?;
    let class = class?.as_deref().and_then(DeviationClass::from_words);
    let of = |wanted: DeviationEntryKind| kind == wanted;
    Some(NewDeviationEntry {
        kind,
        class: class.filter(|_| of(DeviationEntryKind::Classified)),
        text: text?,
        other_lot: other_lot?.filter(|_| of(DeviationEntryKind::OtherLotConsidered)),
        study: study?.filter(|_| of(DeviationEntryKind::AddedToStability)),
    })
}

fn decision_form(visit: &Visit, id: i64, page: &str) -> Result<Form, Failure> {
    let (button, label, meaning) = match page {
        "continuation" => {
            ("Sign that work goes on", "Under which condition work goes on", Meaning::Continuation)
        }
        _ => ("Sign the closure", "Conclusion: what it means for this lot and for others", Meaning::Closure),
    };
    let form = Form::new(visit, &format!("/deviations/{id}/{page}"), button)?
        .field(Field::new("text", label, Entry::Long))
        .signature(meaning.words());
    Ok(if page == "continuation" { form.quiet() } else { form })
}

pub(super) fn write(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let found = visit.read(|reader| store::deviation::get(reader, id))?;
    form::submit(
        visit,
        entry_form(visit, id, &found)?,
        |typed| typed_entry(typed, found.facts.lot.is_some()),
        |actor, new| acts::deviation::write(visit.db(), actor, id, &new),
        |()| format!("/deviations/{id}"),
        |status, form| deviation_page(status, visit, id, Some(form)),
    )
}

fn typed_decision(typed: &mut Typed<'_>) -> Option<(String, String, String)> {
    let text = typed.text("text", 4000);
    let password = typed.visit.form.get("password").unwrap_or_default().to_string();
    Some((text?, typed.raw("user_name"), password))
}

pub(super) fn go_on(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        decision_form(visit, id, "continuation")?,
        typed_decision,
        |actor, (text, user_name, password)| {
            let signed = authenticate::<Continuation>(db, secrets, actor, &user_name, &password)?;
            acts::deviation::continue_under(db, actor, id, &text, &signed.stating(&text))
        },
        |()| format!("/deviations/{id}"),
        |status, form| deviation_page(status, visit, id, Some(form)),
    )
}

pub(super) fn close(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        decision_form(visit, id, "closure")?,
        typed_decision,
        |actor, (text, user_name, password)| {
            let signed = authenticate::<Closure>(db, secrets, actor, &user_name, &password)?;
            acts::deviation::close(db, actor, id, &text, &signed.stating(&text))
        },
        |()| format!("/deviations/{id}"),
        |status, form| deviation_page(status, visit, id, Some(form)),
    )
}
