//! My signing list, the signing of it, and the receipt.

use askama::Template;

use crate::acts;
use crate::acts::signature::Review;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::review::SHORTEST_STATEMENT;
use crate::domain::role::Role;
use crate::domain::signature::Meaning;
use crate::store;
use crate::store::review::decision::{Agreed, ReceiptLine};
use crate::store::review::facts::ReviewSample;
use crate::web::field::{Entry, Field};
use crate::web::form::{self, Form};
use crate::web::page::Shell;
use crate::web::reply::{Outcome, page, page_with};
use crate::web::show;
use crate::web::visit::Visit;

#[derive(Template)]
#[template(path = "review/sign.html")]
struct SignPage {
    shell: Shell,
    lead: String,
    changed: Vec<Listed>,
    lists: Vec<SigningList>,
}

/// What is signed in one act: all samples without exceptions, or one with.
struct SigningList {
    heading: String,
    rows: Vec<Listed>,
    form: Form,
}

#[derive(Clone)]
struct Listed {
    sample: i64,
    title: String,
    number: String,
    significant: String,
    agreed_at: String,
    digest: String,
}

/// A sample on the list with whether it is still as agreed.
struct OnList {
    agreed: Agreed,
    sample: ReviewSample,
    significant: String,
    is_same: bool,
}

fn entries(visit: &Visit) -> Result<Vec<OnList>, Failure> {
    let account = visit.needs_role(&[Role::QaReviewer], Act::SignPulls)?.account;
    visit.read(|reader| {
        let agreed = store::review::decision::agreed_by(reader, account)?;
        let ids: Vec<i64> = agreed.iter().map(|one| one.sample).collect();
        let samples = store::review::facts::many(reader, &ids)?;
        let mut entries = Vec::new();
        for one in agreed {
            let Some(sample) = samples.iter().find(|sample| sample.head.sample == one.sample).cloned() else {
                continue;
            };
            let is_same = store::review::digest(reader, one.sample)? == one.content_digest;
            let results = store::review::page::results(reader, one.sample)?;
            let latest = results.iter().filter(|result| result.is_latest && !result.shown.is_empty());
            let words: Vec<String> =
                latest.map(|result| format!("{} {}", result.title, result.shown)).collect();
            entries.push(OnList { agreed: one, sample, significant: words.join(", "), is_same });
        }
        Ok(entries)
    })
}

fn listed(visit: &Visit, entry: &OnList) -> Listed {
    Listed {
        sample: entry.sample.head.sample,
        title: entry.sample.head.title(),
        number: entry.sample.head.number.clone(),
        significant: entry.significant.clone(),
        agreed_at: show::instant(&entry.agreed.at, visit.at.zone),
        digest: entry.agreed.content_digest.chars().take(12).collect(),
    }
}

pub fn list(visit: &Visit) -> Outcome {
    list_page(200, visit, None)
}

fn list_page(status: u16, visit: &Visit, failed: Option<Form>) -> Outcome {
    let entries = entries(visit)?;
    let (same, changed): (Vec<&OnList>, Vec<&OnList>) = entries.iter().partition(|entry| entry.is_same);
    let (alone, together): (Vec<&OnList>, Vec<&OnList>) =
        same.into_iter().partition(|entry| !entry.sample.facts.exceptions.is_empty());
    let mut shell = Shell::of(visit, "My signing list").crumb("/review", "Review");
    let mut lists = Vec::new();
    for group in together.chunks(crate::domain::review::MOST_SIGNED) {
        lists.push(signing_list(visit, group, false)?);
    }
    for entry in alone {
        lists.push(signing_list(visit, &[entry], true)?);
    }
    // One page has one place to type a password: the first list that waits.
    lists.truncate(1);
    if let Some(failed) = failed {
        shell = shell.with_errors(&failed);
        match lists.first_mut() {
            Some(first) => first.form = failed,
            None => shell.notice = Some("Nothing is left on the list.".to_string()),
        }
    }
    let lead = lead(entries.len(), changed.len());
    let changed = changed.into_iter().map(|entry| listed(visit, entry)).collect();
    page_with(status, &SignPage { shell, lead, changed, lists })
}

fn lead(all: usize, changed: usize) -> String {
    match all {
        0 => "You have agreed to nothing that waits for your signature.".to_string(),
        _ if changed > 0 => format!(
            "{} agreed to. Changed since you looked: {changed}. What changed drops out until you look again.",
            show::counted(all, "sample", "samples")
        ),
        _ => format!("{} agreed to, not signed yet.", show::counted(all, "sample", "samples")),
    }
}

fn signing_list(visit: &Visit, group: &[&OnList], is_alone: bool) -> Result<SigningList, Failure> {
    let samples: Vec<(i64, String)> =
        group.iter().map(|entry| (entry.sample.head.sample, entry.agreed.content_digest.clone())).collect();
    let heading = if is_alone {
        "One sample with exceptions, signed alone".to_string()
    } else {
        show::counted(group.len(), "sample without exceptions", "samples without exceptions")
    };
    let rows = group.iter().map(|entry| listed(visit, entry)).collect();
    Ok(SigningList { heading, rows, form: sign_form(visit, &samples, is_alone)? })
}

fn sign_form(visit: &Visit, samples: &[(i64, String)], is_alone: bool) -> Result<Form, Failure> {
    let button = format!("Sign {}", show::counted(samples.len(), "sample", "samples"));
    let mut form = Form::new(visit, "/review/sign", &button)?;
    for (sample, digest) in samples {
        form = form.hide(&format!("sample.{sample}"), digest.clone());
    }
    if is_alone {
        form = form.field(
            Field::new("statement", "Acceptable with its exceptions, because …", Entry::Long)
                .hint(&format!("At least {SHORTEST_STATEMENT} characters; it stands beside the signature.")),
        );
    }
    Ok(form.signature(Meaning::Review.words()))
}

/// The samples the person saw on the page, as they were sent.
fn sent(visit: &Visit) -> Vec<(i64, String)> {
    visit
        .form
        .iter()
        .filter_map(|(name, digest)| {
            let sample = name.strip_prefix("sample.")?.parse().ok()?;
            Some((sample, digest.to_string()))
        })
        .collect()
}

pub fn sign(visit: &Visit) -> Outcome {
    visit.needs_role(&[Role::QaReviewer], Act::SignPulls)?;
    let samples = sent(visit);
    let is_alone = visit.form.get("statement").is_some();
    let (db, secrets) = (visit.db(), &visit.app.secrets);
    form::submit(
        visit,
        sign_form(visit, &samples, is_alone)?,
        |typed| {
            let password = typed.visit.form.get("password")?.to_string();
            Some((typed.raw("statement"), typed.raw("user_name"), password))
        },
        |actor, (statement, user_name, password)| {
            let signed = acts::signature::authenticate::<Review>(db, secrets, actor, &user_name, &password)?;
            let signed = if is_alone { signed.stating(&statement) } else { signed };
            acts::review::sign(db, actor, &samples, &signed)
        },
        |receipt| format!("/review/receipts/{}", receipt.act),
        |status, form| list_page(status, visit, Some(form)),
    )
}

#[derive(Template)]
#[template(path = "review/receipt.html")]
struct ReceiptPage {
    shell: Shell,
    meaning: &'static str,
    rows: Vec<ReceiptRow>,
    dropped: Vec<Listed>,
}

struct ReceiptRow {
    sample: i64,
    number: String,
    lot: String,
    signer: String,
    at: String,
    digest: String,
    statement: String,
}

pub fn receipt(visit: &Visit) -> Outcome {
    let act = visit.id("act")?;
    let lines = visit.read(|reader| store::review::decision::receipt(reader, act))?;
    if lines.is_empty() {
        return Err(Failure::missing("receipt with this number"));
    }
    let changed = if visit.may(Act::SignPulls) { entries(visit)? } else { Vec::new() };
    let dropped = changed.iter().filter(|entry| !entry.is_same).map(|entry| listed(visit, entry)).collect();
    let title = format!("Signed: {}", show::counted(lines.len(), "sample", "samples"));
    let shell = Shell::of(visit, &title).crumb("/review", "Review").print("Signed", &lines[0].digest);
    let rows = lines.into_iter().map(|line| receipt_row(visit, line)).collect();
    page(&ReceiptPage { shell, meaning: Meaning::Review.words(), rows, dropped })
}

fn receipt_row(visit: &Visit, line: ReceiptLine) -> ReceiptRow {
    ReceiptRow {
        sample: line.sample,
        number: line.number,
        lot: line.lot_number,
        signer: line.signer,
        at: show::instant(&line.at, visit.at.zone),
        digest: show::digest(&line.digest),
        statement: line.statement.unwrap_or_default(),
    }
}
