//! Certificates of analysis: what would be certified now, the signed versions, and one to print.

use askama::Template;

use super::field::{Entry, Field};
use super::form::{self, Form};
use super::page::Shell;
use super::part::Signatures;
use super::reply::{Outcome, page_with};
use super::route::{Route, get, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::acts::certificate::digest;
use crate::acts::signature::{Certification, authenticate};
use crate::domain::act::Act;
use crate::domain::certificate::CertificateContent;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot_decision::results_stand;
use crate::domain::signature::Meaning;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::certificate::Certificate;

pub const ROUTES: &[Route] = &[
    get("/lots/{id}/certificate", draft),
    post("/lots/{id}/certificate", &[Act::SignCertificate], sign),
    get("/certificates/{id}", one),
];

#[derive(Template)]
#[template(path = "certificate/certificate.html")]
struct CertificatePage {
    shell: Shell,
    lead: String,
    content: CertificateContent,
    why: String,
    /// The other versions of the lot: number, version, by whom, at.
    versions: Vec<(i64, i64, String, String)>,
    why_not: String,
    form: Option<Form>,
    signatures: Signatures,
}

fn versions(found: &[Certificate], visit: &Visit) -> Vec<(i64, i64, String, String)> {
    let line =
        |one: &Certificate| (one.id, one.version, one.by.clone(), show::instant(&one.at, visit.at.zone));
    found.iter().map(line).collect()
}

fn sign_form(visit: &Visit, id: i64, content: &str, is_first: bool) -> Result<Form, Failure> {
    let mut form = Form::new(visit, &format!("/lots/{id}/certificate"), "Sign this version")?
        .hide("seen", digest(content));
    if !is_first {
        let hint = "At least ten characters; it stands on the certificate.";
        form = form.field(Field::new("why", "What is new in this version", Entry::Text).hint(hint));
    }
    Ok(form.signature(Meaning::Certification.words()))
}

fn draft(visit: &Visit) -> Outcome {
    draft_page(200, visit, None)
}

fn draft_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let id = visit.id("id")?;
    let (grounds, content, earlier) = visit.read(|reader| {
        Ok((
            acts::lot_decision::grounds(reader, id, visit.at.date())?,
            acts::certificate::draft(reader, id, visit.at)?,
            store::certificate::of_lot(reader, id)?,
        ))
    })?;
    let text = serde_json::to_string(&content)?;
    let mut shell = Shell::of(visit, &format!("Certificate of analysis of {}", content.lot))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{id}"), &content.lot)
        .print("Draft — not signed", &digest(&text));
    let refusal = results_stand(&grounds.facts).err().map(|refusal| refusal.to_string());
    let is_stated = earlier.first().is_some_and(|one| one.content == text);
    let may_sign =
        visit.may(Act::SignCertificate) && refusal.is_none() && !is_stated && !grounds.facts.is_imported;
    let mut form = if may_sign { Some(sign_form(visit, id, &text, earlier.is_empty())?) } else { None };
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        form = Some(failed);
    }
    let lead = match (is_stated, earlier.first()) {
        (true, Some(newest)) => format!("Version {} states exactly this.", newest.version),
        _ => "What a certificate would state now. It is a draft until QA signs it.".to_string(),
    };
    let page = CertificatePage {
        lead,
        content,
        why: String::new(),
        versions: versions(&earlier, visit),
        why_not: refusal.unwrap_or_default(),
        form,
        signatures: Signatures { signed: Vec::new() },
        shell,
    };
    page_with(status, &page)
}

fn sign(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    let (content, earlier) = visit.read(|reader| {
        Ok((acts::certificate::draft(reader, id, visit.at)?, store::certificate::of_lot(reader, id)?))
    })?;
    let (text, is_first) = (serde_json::to_string(&content)?, earlier.is_empty());
    form::submit(
        visit,
        sign_form(visit, id, &text, is_first)?,
        |typed| {
            let seen = typed.raw("seen");
            let why = if is_first { String::new() } else { typed.raw("why") };
            let password = typed.visit.form.get("password").unwrap_or_default().to_string();
            Some((seen, why, typed.raw("user_name"), password))
        },
        |actor, (seen, why, user_name, password)| {
            let signed = authenticate::<Certification>(db, secrets, actor, &user_name, &password)?;
            acts::certificate::sign(db, actor, id, &seen, &why, &signed)
        },
        |certificate| format!("/certificates/{certificate}"),
        |status, form| draft_page(status, visit, Some(form)),
    )
}

fn one(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let (found, all, signed) = visit.read(|reader| {
        let found = store::certificate::get(reader, id)?;
        let all = store::certificate::of_lot(reader, found.lot)?;
        let signed = store::signature::of(reader, Kind::Lot, found.lot)?;
        Ok((found, all, signed))
    })?;
    let content: CertificateContent = serde_json::from_str(&found.content)?;
    let text = store::certificate::canonical(found.version, &found.why, &found.content);
    let signed: Vec<_> = signed.into_iter().filter(|one| one.id == found.signature).collect();
    let state = match found.version == found.newest {
        true => format!("Version {}, signed", found.version),
        false => format!("Version {}, replaced by version {}", found.version, found.newest),
    };
    let shell = Shell::of(visit, &format!("Certificate of analysis of {}", content.lot))
        .crumb("/lots", "Lots")
        .crumb(format!("/lots/{}", found.lot), &content.lot)
        .crumb(format!("/lots/{}/certificate", found.lot), "Certificates")
        .print(&state, &digest(&found.content));
    let others: Vec<Certificate> = all.into_iter().filter(|one| one.id != id).collect();
    let page = CertificatePage {
        shell,
        lead: format!("{state}."),
        content,
        why: found.why.clone(),
        versions: versions(&others, visit),
        why_not: String::new(),
        form: None,
        signatures: Signatures::of(&signed, &sha256_hex(text.as_bytes()), visit.at.zone),
    };
    page_with(200, &page)
}
