//! The page of one test: identity, instrument, boxes, questions, and recording with and without the script.

pub mod boxes;
pub mod counter;
pub mod load;
pub mod page;
pub mod take;

use self::load::Loaded;
use self::page::{query, test_page};
use self::take::{Taken, how, take};
use super::reply::{Outcome, Reply, see};
use super::route::{Route, get, post};
use super::visit::Visit;
use crate::acts;
use crate::domain::act::Act;
use crate::domain::failure::{Failure, Stale};
use crate::domain::reason::Reason;
use boxes::Said;

pub const ROUTES: &[Route] = &[
    get("/tests/{id}", test).at_bench(),
    post("/tests/{id}", &[Act::RecordReadings, Act::CorrectReading, Act::CompleteTest], record).at_bench(),
    post("/tests/{id}/label", &[Act::RecordReadings], label).at_bench(),
    post("/tests/{id}/questions", &[Act::RecordReadings], answer).at_bench(),
    post("/tests/{id}/inversions", &[Act::RecordReadings], counter::record).at_bench(),
];

fn test(visit: &Visit) -> Outcome {
    visit.knows_query(&[
        "label",
        "instrument",
        "session",
        "late_on",
        "late_at",
        "late_why",
        "container",
        "cylinder",
    ])?;
    let loaded = load::load(visit, visit.id("id")?)?;
    let is_wrong = !loaded.label.is_empty() && !loaded.is_label_right;
    test_page(if is_wrong { 409 } else { 200 }, visit, &loaded, &Said::default(), None)
}

/// "This is the one": a right label opens the boxes; a wrong one is noted, and nothing opens.
fn label(visit: &Visit) -> Outcome {
    let loaded = load::load(visit, visit.id("id")?)?;
    knows(visit, &["form_token", "submission", "label", "session"])?;
    match acts::reading::check_label(visit.db(), visit.actor()?, loaded.sample.id, &loaded.label) {
        Ok(()) => see(format!("/tests/{}{}", loaded.test.id, query(visit, &loaded))),
        Err(Failure::Refused(_)) => test_page(409, visit, &loaded, &Said::default(), None),
        Err(other) => Err(other),
    }
}

/// A field that the form does not have is refused (sec_S53).
pub(super) fn knows(visit: &Visit, names: &[&str]) -> Result<(), Failure> {
    match visit.form.iter().find(|(name, _)| !names.contains(name)) {
        Some((name, _)) => Err(Failure::BadRequest(format!("This form has no field “{name}”."))),
        None => Ok(()),
    }
}

/// Records what the form says: corrections first, each with its own reason, then the new values in one act.
fn record(visit: &Visit) -> Outcome {
    let loaded = load::load(visit, visit.id("id")?)?;
    let how = match how(&loaded, &visit.form) {
        Ok(how) => how,
        Err(sentence) => {
            return refused(visit, &loaded, &Taken::default(), 422, vec![(String::new(), sentence)]);
        }
    };
    let taken = take(&loaded, &visit.form, how.seen)?;
    if !taken.errors.is_empty() {
        let errors = taken.errors.clone();
        return refused(visit, &loaded, &taken, 422, errors);
    }
    match put(visit, &how, &taken).and_then(|()| then_complete(visit, loaded.test.id)) {
        Ok(done) => recorded(visit, &loaded, &taken, done),
        Err(Failure::Refused(refusal)) => {
            let at = refusal.field.clone().or_else(|| taken.names().first().cloned()).unwrap_or_default();
            refused(visit, &loaded, &taken, 409, vec![(at, refusal.sentence)])
        }
        Err(Failure::Stale(stale)) => conflict(visit, &loaded, &taken, stale),
        Err(other) => Err(other),
    }
}

fn put(visit: &Visit, how: &acts::reading::How, taken: &Taken) -> Result<(), Failure> {
    let (db, actor) = (visit.db(), visit.actor()?);
    for (entry, reason) in &taken.corrections {
        acts::reading::correct(db, actor, how, entry, reason)?;
    }
    if taken.entries.is_empty() {
        return Ok(());
    }
    let reason = match how.read_at {
        Some(_) => Reason::given(visit.form.get("late_why").unwrap_or_default())?,
        None => Reason::none(),
    };
    acts::reading::record(db, actor, how, &taken.entries, &reason)?;
    Ok(())
}

/// The second button: what was typed is recorded, then the test is completed.
fn then_complete(visit: &Visit, test: i64) -> Result<Option<i64>, Failure> {
    if visit.form.get("then") != Some("complete") {
        return Ok(None);
    }
    acts::result::complete(visit.db(), visit.actor()?, test).map(Some)
}

fn recorded(visit: &Visit, loaded: &Loaded, taken: &Taken, done: Option<i64>) -> Outcome {
    if visit.wants_json {
        return saved(visit, loaded.test.id, taken);
    }
    match done {
        Some(sample) => match visit.form.get("session").filter(|text| !text.is_empty()) {
            Some(session) => see(format!("/bench/session?method={session}")),
            None => see(format!("/samples/{sample}")),
        },
        None => see(format!("/tests/{}{}", loaded.test.id, query(visit, loaded))),
    }
}

/// The answer to the script: what was saved, the questions it drew, the next key and version.
fn saved(visit: &Visit, test: i64, taken: &Taken) -> Outcome {
    let loaded = load::load(visit, test)?;
    let names = taken.names();
    let standing = crate::domain::reading::standing(&loaded.readings);
    let hints: Vec<_> = standing
        .iter()
        .filter(|reading| names.contains(&reading.key.name()) && reading.has_open_question())
        .flat_map(|reading| {
            let name = reading.key.name();
            reading.questions.iter().map(move |one| serde_json::json!({ "name": name, "text": one.sentence }))
        })
        .collect();
    let fields: std::collections::BTreeSet<&str> =
        standing.iter().map(|reading| reading.key.field.as_str()).collect();
    let calculated: Vec<_> = fields
        .into_iter()
        .map(|field| (field, boxes::mean(&loaded, field)))
        .filter(|(_, text)| !text.is_empty())
        .map(|(field, text)| serde_json::json!({ "id": format!("mean.{field}"), "text": text }))
        .collect();
    let body = serde_json::json!({
        "saved": visit.at.clock_shown(),
        "hints": hints,
        "submission": acts::secret::token()?,
        "version": loaded.seen().to_string(),
        "calculated": calculated,
    });
    Ok(Reply::Json { status: 200, body })
}

/// Nothing was recorded, and why: at the boxes, all at once, with what was typed kept.
fn refused(
    visit: &Visit,
    loaded: &Loaded,
    taken: &Taken,
    status: u16,
    errors: Vec<(String, String)>,
) -> Outcome {
    if visit.wants_json {
        let errors: Vec<_> =
            errors.iter().map(|(name, text)| serde_json::json!({ "name": name, "text": text })).collect();
        let body = serde_json::json!({ "errors": errors, "submission": acts::secret::token()? });
        return Ok(Reply::Json { status, body });
    }
    let said = Said { errors, ..taken.said(&visit.form) };
    // What was recorded before the refusal must show as recorded.
    let fresh = load::load(visit, loaded.test.id)?;
    test_page(status, visit, &fresh, &said, None)
}

/// Another browser recorded something in between: both values, nothing lost, choose again.
fn conflict(visit: &Visit, loaded: &Loaded, taken: &Taken, stale: Stale) -> Outcome {
    let sentence = format!(
        "{}: {} is recorded by {}, {}. Yours, {}, is not recorded. Keep theirs, or change it with a reason.",
        stale.what, stale.theirs, stale.changed_by, stale.changed_at, stale.yours
    );
    let name = taken.names().first().cloned().unwrap_or_default();
    let fresh = load::load(visit, loaded.test.id)?;
    if visit.wants_json {
        let body = serde_json::json!({
            "errors": [{ "name": name, "text": sentence }],
            "submission": acts::secret::token()?,
            "version": fresh.seen().to_string(),
        });
        return Ok(Reply::Json { status: 409, body });
    }
    let said =
        Said { errors: vec![(name.clone(), sentence)], wants_reason: vec![name], ..taken.said(&visit.form) };
    test_page(409, visit, &fresh, &said, Some(stale))
}

/// "It is right": the value stands, and the answer is kept for the reviewer.
fn answer(visit: &Visit) -> Outcome {
    let id = visit.id("id")?;
    let loaded = load::load(visit, id)?;
    knows(visit, &["form_token", "submission", "label", "session", "answer"])?;
    let reading = visit.form.get("answer").and_then(|text| text.parse().ok());
    let Some(reading) = reading else { return Err(Failure::missing("question with this number")) };
    match acts::reading::keep(visit.db(), visit.actor()?, id, reading) {
        Ok(()) => see(format!("/tests/{id}{}", query(visit, &loaded))),
        Err(Failure::Refused(refusal)) => {
            refused(visit, &loaded, &Taken::default(), 409, vec![(String::new(), refusal.sentence)])
        }
        Err(other) => Err(other),
    }
}
