//! Release or rejection of a lot: what it rests on, then the decision by signature.

use askama::Template;

use super::completeness::Items;
use super::field::{Entry, Field};
use super::form::{self, Form};
use super::lot_parts::deviations_table;
use super::page::Shell;
use super::part::{Signatures, Trail};
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::table::Table;
use super::visit::Visit;
use crate::acts;
use crate::acts::lot_decision::{Grounds, grounds};
use crate::acts::signature::{Rejection, Release};
use crate::domain::act::Act;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot_decision::{Decision, Looked, SHORTEST_REASON, may_release};
use crate::domain::moment::date_shown;
use crate::domain::retain::records_kept_until;
use crate::domain::role::Role;
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::lot_review::Correction;

pub const ROUTES: &[Route] = &[
    get("/lots/{id}/decision", decision),
    post("/lots/{id}/release", &[Act::DecideLot], release),
    get("/lots/{id}/reject", reject_page),
    post("/lots/{id}/reject", &[Act::DecideLot], reject),
];

#[derive(Template)]
#[template(path = "lot/decision.html")]
struct DecisionPage {
    shell: Shell,
    lead: String,
    facts: Vec<(&'static str, String)>,
    results: Vec<ResultRow>,
    items: Items,
    /// Nobody has decided yet.
    is_open: bool,
    deviations: Table,
    corrections: Vec<(Correction, String)>,
    /// Why the lot cannot be released now; empty where it can.
    why_not: String,
    release: Option<Form>,
    may_reject: bool,
    lot: i64,
    signatures: Signatures,
    trail: Trail,
}

struct ResultRow {
    sample: i64,
    number: String,
    test: String,
    shown: String,
    verdict: String,
    is_out: bool,
}

fn decision(visit: &Visit) -> Outcome {
    decision_page(200, visit, None)
}

fn decision_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let (found, signatures, lines) = visit.read(|reader| {
        Ok((
            grounds(reader, id, visit.at.date())?,
            signatures(reader, id, visit)?,
            store::trail::of_subject(reader, Subject::new(Kind::Lot, id))?,
        ))
    })?;
    let refusal = may_release(&found.facts).err();
    let title = format!("Decision on {}", found.lot.number);
    let mut shell =
        Shell::of(visit, &title).crumb("/lots", "Lots").crumb(format!("/lots/{id}"), &found.lot.number);
    let may_decide = visit.may(Act::DecideLot) && !found.facts.is_imported;
    let mut release =
        if may_decide && refusal.is_none() { Some(release_form(visit, id, found.newest_act)?) } else { None };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        release = Some(failed);
    }
    let view = DecisionPage {
        lead: lead(&found),
        facts: facts(&found),
        results: rows(&found),
        items: Items::of(&found.items),
        is_open: found.facts.decided.is_none(),
        deviations: deviations_table(&found.deviations),
        corrections: corrections(&found, visit),
        why_not: refusal.map(|refusal| refusal.to_string()).unwrap_or_default(),
        release,
        may_reject: may_decide && found.facts.decided != Some(Decision::Rejected),
        lot: id,
        signatures,
        trail: Trail::of(&lines, visit.at.zone),
        shell,
    };
    page_with(status, &view)
}

/// Each signature is held against the text of its own decision.
fn signatures(reader: &store::Reader<'_>, lot: i64, visit: &Visit) -> Result<Signatures, Failure> {
    let mut signed = Vec::new();
    for signature in store::signature::of(reader, Kind::Lot, lot)? {
        let text = store::lot_decision::canonical_of_signature(reader, signature.id)?.unwrap_or_default();
        let digest = sha256_hex(text.as_bytes());
        signed.extend(Signatures::of(&[signature], &digest, visit.at.zone).signed);
    }
    Ok(Signatures { signed })
}

fn lead(found: &Grounds) -> String {
    match found.facts.decided {
        Some(decided) => format!("{} is {}.", found.lot.number, decided.words()),
        None => format!("{} is not decided on.", found.lot.number),
    }
}

fn facts(found: &Grounds) -> Vec<(&'static str, String)> {
    let made = found.lot.made_on.map_or("not stated".to_string(), date_shown);
    let mut facts = vec![
        ("Product", format!("{}, {}", found.lot.product_name, found.lot.presentation_words)),
        ("Made on", made),
        (
            "Formulation",
            format!(
                "{} version {}, {}",
                found.lot.formulation_code,
                found.lot.formulation_number,
                found.facts.formulation_state.words()
            ),
        ),
    ];
    if let Some(life) = &found.shelf_life {
        let assigned = &life.assigned;
        facts.push((
            "Shelf life",
            format!(
                "{} months, {}, {}, in force from {}",
                assigned.months,
                assigned.basis,
                assigned.reference,
                date_shown(assigned.effective_from)
            ),
        ));
        facts.push(("Storage", assigned.storage_statement.clone()));
        let expiry = found.facts.expires_on.map_or("not computed".to_string(), date_shown);
        let rule = assigned.expiry_format.words();
        let start = found.life_start.as_ref().map(|start| start.rule.as_str()).unwrap_or_default();
        facts.push(("Expiry", format!("{expiry} ({} months {start}; {rule})", assigned.months)));
        let released = found.facts.decided == Some(Decision::Released);
        let kept = records_kept_until(found.facts.expires_on, found.released_on());
        if let Some(kept) = kept.filter(|_| released) {
            let rule = "the later of expiry + 1 year and release + 5 years";
            facts.push(("Records kept until", format!("{} ({rule})", date_shown(kept))));
        }
    }
    let open: Vec<String> = found.facts.open_investigations.iter().map(i64::to_string).collect();
    facts.push(("Open investigations", if open.is_empty() { "none".to_string() } else { open.join(", ") }));
    let open: Vec<String> = found.facts.open_deviations.iter().map(i64::to_string).collect();
    facts.push(("Open deviations", if open.is_empty() { "none".to_string() } else { open.join(", ") }));
    facts
}

fn rows(found: &Grounds) -> Vec<ResultRow> {
    let row = |result: &store::lot_decision::ReleaseResult| ResultRow {
        sample: result.sample,
        number: result.number.clone(),
        test: if result.component.is_empty() {
            result.title.clone()
        } else {
            format!("{}, {}", result.title, result.component)
        },
        shown: show::with_unit(&result.shown, &result.unit),
        verdict: result.verdict.clone(),
        is_out: result.verdict == "out of specification",
    };
    found.results.iter().map(row).collect()
}

fn corrections(found: &Grounds, visit: &Visit) -> Vec<(Correction, String)> {
    let shown = |one: &Correction| (one.clone(), show::instant(&one.at, visit.at.zone));
    found.corrections.iter().map(shown).collect()
}

fn release_form(visit: &Visit, id: i64, newest_act: i64) -> Result<Form, Failure> {
    Ok(Form::new(visit, &format!("/lots/{id}/release"), "Release this lot")?
        .hide("up_to_act", newest_act.to_string())
        .field(
            Field::new("is_reviewed", "I looked through the corrections and the history below", Entry::Tick)
                .hint("Both are part of what is signed, up to the newest entry that is shown."),
        )
        .signature(Meaning::Release.words()))
}

fn reject_form(visit: &Visit, id: i64) -> Result<Form, Failure> {
    let hint = format!("At least {SHORTEST_REASON} characters; it stands beside the signature.");
    Ok(Form::new(visit, &format!("/lots/{id}/reject"), "Reject this lot")?
        .field(Field::new("reason", "Reject, because …", Entry::Long).hint(&hint))
        .signature(Meaning::Rejection.words()))
}

const REJECT_LEAD: &str =
    "A rejected lot is never released afterwards. The reason stands beside the signature.";

fn reject_title(visit: &Visit, id: i64) -> Result<String, Failure> {
    Ok(format!("Reject {}", visit.read(|reader| store::lot::get(reader, id))?.number))
}

fn reject_page(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    visit.needs_role(&[Role::QaReviewer], Act::DecideLot)?;
    form::show(visit, &reject_title(visit, id)?, REJECT_LEAD, reject_form(visit, id)?)
}

fn release(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    let newest_act = visit.read(|reader| store::lot_review::newest_act(reader, id))?;
    form::submit(
        visit,
        release_form(visit, id, newest_act)?,
        |typed| {
            let up_to_act = typed.raw("up_to_act").parse().unwrap_or_default();
            let looked = Looked { up_to_act, is_reviewed: typed.tick("is_reviewed") };
            Some((looked, typed.raw("user_name"), typed.visit.form.get("password")?.to_string()))
        },
        |actor, (looked, user_name, password)| {
            let signed = acts::signature::authenticate::<Release>(db, secrets, actor, &user_name, &password)?;
            acts::lot_decision::release(db, actor, id, looked, &signed)
        },
        |()| format!("/lots/{id}/decision"),
        |status, form| decision_page(status, visit, Some(form)),
    )
}

fn reject(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit_page(
        visit,
        &reject_title(visit, id)?,
        REJECT_LEAD,
        reject_form(visit, id)?,
        |typed| {
            let password = typed.visit.form.get("password")?.to_string();
            Some((typed.raw("reason"), typed.raw("user_name"), password))
        },
        |actor, (reason, user_name, password)| {
            let signed =
                acts::signature::authenticate::<Rejection>(db, secrets, actor, &user_name, &password)?;
            acts::lot_decision::reject(db, actor, id, &signed.stating(&reason))
        },
        |()| format!("/lots/{id}/decision"),
    )
}
