//! Versions whose results count as one history: declared and withdrawn under a signature.

use crate::acts;
use crate::acts::signature::Approval;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::signature::Meaning;
use crate::domain::trend::declare::{AlikeKind, NewEquivalence};
use crate::store;
use crate::store::trend::alike::Equivalence;
use crate::web::field::{Entry, Field};
use crate::web::form::{self, Form, Typed};
use crate::web::page::Shell;
use crate::web::record::Record;
use crate::web::reply::Outcome;
use crate::web::show;
use crate::web::table::{Cell, Table};
use crate::web::visit::Visit;

const LEAD: &str = "A result is judged by earlier results of the same formulation version and the same method version. \
                    QA may declare two versions one history, with a reason and a signature; verdicts given before \
                    stay as they are.";

pub(super) fn list(visit: &Visit) -> Outcome {
    visit.knows_query(&[])?;
    let forms = if visit.may(Act::DeclareAlike) { Some(declare_form(visit)?) } else { None };
    alike_page(200, visit, forms)
}

fn alike_page(status: u16, visit: &Visit, form: Option<Form>) -> Outcome {
    let all = visit.read(store::trend::alike::all)?;
    let mut shell = Shell::of(visit, "Versions that are one history").crumb("/trend", "Trend");
    if let Some(form) = &form {
        shell = shell.with_errors(form);
    }
    Record::new(shell, LEAD)
        .table("Declarations", table(visit, &all))
        .form("Declare or withdraw", "Each pair is declared by itself: it makes no chain.", form)
        .show_with(status)
}

fn table(visit: &Visit, all: &[Equivalence]) -> Table {
    let heads = ["Versions", "Kind", "State", "Because", "Signed by"];
    let empty = "No two versions are declared one history: each version is judged by its own results alone.";
    Table::new("The newest first; the newest of a pair counts", &heads, empty).rows(all.iter().map(|one| {
        let state = match (one.state.as_str(), one.is_newest) {
            ("declared", true) => "one history",
            ("declared", false) => "replaced by a later line",
            (_, true) => "withdrawn",
            _ => "replaced by a later line",
        };
        vec![
            Cell::text(format!("{} and {}", one.one_words, one.other_words)),
            Cell::text(&one.kind),
            Cell::text(state),
            Cell::text(&one.why),
            Cell::noted(&one.by, show::instant(&one.at, visit.at.zone)),
        ]
    }))
}

fn declare_form(visit: &Visit) -> Result<Form, Failure> {
    let (formulations, methods) = visit.read(|reader| {
        Ok((
            store::trend::alike::choices(reader, AlikeKind::FormulationVersion)?,
            store::trend::alike::choices(reader, AlikeKind::MethodVersion)?,
        ))
    })?;
    let of = |kind: &'static str, found: Vec<(i64, String)>| {
        found.into_iter().map(move |(id, words)| (format!("{kind} {id}"), words)).collect::<Vec<_>>()
    };
    let mut choices = of("formulation", formulations);
    choices.extend(of("method", methods));
    Ok(Form::new(visit, "/trend/alike", "Sign")?
        .field(Field::new("one", "Version", Entry::Select).choices(choices.clone()))
        .field(Field::new("other", "And version", Entry::Select).choices(choices).hint(
            "Both of one product, or both methods of one kind and unit. Only approved ones are listed.",
        ))
        .field(
            Field::new("state", "They are", Entry::Radios)
                .choices([("declared", "one history from now on"), ("withdrawn", "no longer one history")])
                .value("declared"),
        )
        .field(Field::new("why", "Because", Entry::Text).hint("At least 20 characters; it is signed."))
        .signature(Meaning::Approval.words()))
}

struct Typing {
    new: NewEquivalence,
    user_name: String,
    password: String,
}

/// `formulation 12`.
fn version(text: &str) -> Option<(AlikeKind, i64)> {
    let (kind, id) = text.split_once(' ')?;
    let kind = match kind {
        "formulation" => AlikeKind::FormulationVersion,
        "method" => AlikeKind::MethodVersion,
        _ => return None,
    };
    Some((kind, id.parse().ok()?))
}

fn read(typed: &mut Typed<'_>) -> Option<Typing> {
    let one = typed.choice("one").and_then(|text| version(&text));
    let other = typed.choice("other").and_then(|text| version(&text));
    let state = typed.choice("state");
    let why = typed.text("why", 400);
    let password = typed.visit.form.get("password")?.to_string();
    let ((kind, one), (other_kind, other)) = (one?, other?);
    // A formulation and a method have no number in common that could be meant.
    let other = if kind == other_kind { other } else { 0 };
    let new = NewEquivalence { kind, one, other, is_declared: state? == "declared", why: why? };
    Some(Typing { new, user_name: typed.raw("user_name"), password })
}

pub(super) fn declare(visit: &Visit) -> Outcome {
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        declare_form(visit)?,
        read,
        |actor, typing| {
            let signed = acts::signature::authenticate::<Approval>(
                db,
                secrets,
                actor,
                &typing.user_name,
                &typing.password,
            )?;
            acts::trend::declare(db, actor, &typing.new, &signed)
        },
        |_| "/trend/alike".to_string(),
        |status, form| alike_page(status, visit, Some(form)),
    )
}
