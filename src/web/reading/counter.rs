//! Counting inversions: a beat that counts itself, or a typed number; "more than N" stays censored.

use super::boxes::{Said, beside};
use super::load::{Loaded, load};
use super::page::{query, test_page};
use super::take::how;
use crate::acts;
use crate::domain::failure::Failure;
use crate::domain::method::Settings;
use crate::domain::reading::{Entry, Said as Value, in_slot};
use crate::domain::reason::Reason;
use crate::domain::slot::Slot;
use crate::web::reply::{Outcome, see};
use crate::web::visit::Visit;

/// The counter of one container.
pub struct Counter {
    pub cap: u32,
    pub beat_per_minute: u32,
    pub instruction: String,
    pub inspected: String,
    pub column: String,
    pub container: i64,
    pub replicate: u32,
    /// Other containers that wait: address and words.
    pub others: Vec<(String, String)>,
    pub typed: String,
    pub seconds: String,
    pub residue: String,
    /// Field and sentence.
    pub errors: Vec<(String, String)>,
}

impl Counter {
    pub fn error(&self, field: &str) -> Option<&str> {
        self.errors.iter().find(|(at, _)| at == field).map(|(_, sentence)| sentence.as_str())
    }
}

/// The counter of the chosen container, or of the first that waits; none where nothing waits.
pub fn counter(visit: &Visit, loaded: &Loaded, said: &Said) -> Result<Option<Counter>, Failure> {
    let Settings::Redispersibility { cap, beat_per_minute, inspect_every, instruction } =
        &loaded.test.content.settings
    else {
        return Ok(None);
    };
    let waiting: Vec<&Slot> = waiting(loaded);
    let asked = visit.form.get("container").or_else(|| visit.query.get("container")).unwrap_or_default();
    let chosen = waiting
        .iter()
        .find(|slot| slot.key.container.unwrap_or(i64::from(slot.key.replicate)).to_string() == asked)
        .or(waiting.first());
    let Some(slot) = chosen else { return Ok(None) };
    let path = |other: &&&Slot| {
        let number = other.key.container.unwrap_or(i64::from(other.key.replicate));
        let label = crate::web::pairs::encoded(&loaded.label);
        (format!("/tests/{}?label={label}&container={number}", loaded.test.id), other.column.clone())
    };
    let get = |name: &str| said.form.get(name).unwrap_or_default().to_string();
    Ok(Some(Counter {
        cap: *cap,
        beat_per_minute: (*beat_per_minute).max(1),
        instruction: instruction.clone(),
        inspected: match inspect_every {
            0 | 1 => String::new(),
            every => format!(
                "Looked at after each {every}: a count of {} means uniform after more than {} and at most {}.",
                every * 3,
                every * 2,
                every * 3
            ),
        },
        column: slot.column.clone(),
        container: slot.key.container.unwrap_or(0),
        replicate: slot.key.replicate,
        others: waiting.iter().filter(|other| other.key != slot.key).map(|other| path(&other)).collect(),
        typed: get("inversions"),
        seconds: get("seconds"),
        residue: get("residue"),
        errors: said.errors.clone(),
    }))
}

fn waiting(loaded: &Loaded) -> Vec<&Slot> {
    loaded
        .slots
        .iter()
        .filter(|slot| slot.key.field == "inversions")
        .filter(|slot| in_slot(&loaded.readings, &slot.key).is_none() && loaded.closed(slot).is_none())
        .collect()
}

const KNOWN: [&str; 12] = [
    "form_token",
    "submission",
    "version",
    "label",
    "session",
    "instrument",
    "container",
    "replicate",
    "inversions",
    "seconds",
    "residue",
    "end",
];

/// Records the count of one container as a total.
pub fn record(visit: &Visit) -> Outcome {
    let loaded = load(visit, visit.id("id")?)?;
    if let Some((name, _)) = visit.form.iter().find(|(name, _)| !KNOWN.contains(name)) {
        return Err(Failure::BadRequest(format!("This form has no field “{name}”.")));
    }
    let how = how(&loaded, &visit.form).map_err(Failure::BadRequest)?;
    let (entries, errors) = entries(visit, &loaded)?;
    if !errors.is_empty() {
        return back(visit, &loaded, 422, errors);
    }
    match acts::reading::record(visit.db(), visit.actor()?, &how, &entries, &Reason::none()) {
        Ok(_) => {
            let rest = waiting(&load(visit, loaded.test.id)?).len();
            let query = query(visit, &loaded);
            let query = if rest > 0 { strip_container(&query) } else { query };
            see(format!("/tests/{}{query}", loaded.test.id))
        }
        Err(Failure::Refused(refusal)) => {
            back(visit, &loaded, 409, vec![("inversions".to_string(), refusal.sentence)])
        }
        Err(Failure::Stale(stale)) => {
            let fresh = load(visit, loaded.test.id)?;
            let said = Said { form: visit.form.clone(), ..Said::default() };
            test_page(409, visit, &fresh, &said, Some(stale))
        }
        Err(other) => Err(other),
    }
}

fn strip_container(query: &str) -> String {
    query.split('&').filter(|part| !part.starts_with("container=")).collect::<Vec<_>>().join("&")
}

fn back(visit: &Visit, loaded: &Loaded, status: u16, errors: Vec<(String, String)>) -> Outcome {
    let said = Said { form: visit.form.clone(), errors, ..Said::default() };
    test_page(status, visit, loaded, &said, None)
}

type Entries = (Vec<Entry>, Vec<(String, String)>);

fn entries(visit: &Visit, loaded: &Loaded) -> Result<Entries, Failure> {
    let get = |name: &str| visit.form.get(name).unwrap_or_default().trim().to_string();
    let (container, replicate) = (get("container"), get("replicate"));
    let container: Option<i64> = container.parse().ok().filter(|id| *id != 0);
    let find = |slot: &&Slot| {
        slot.key.field == "inversions"
            && slot.key.container == container
            && slot.key.replicate.to_string() == replicate
    };
    let Some(slot) = loaded.slots.iter().find(find) else {
        return Err(Failure::BadRequest("The count is of no container of this test.".to_string()));
    };
    let Settings::Redispersibility { cap, .. } = &loaded.test.content.settings else {
        return Err(Failure::missing("counter"));
    };
    let (mut entries, mut errors) = (Vec::new(), Vec::new());
    let count = match get("end").as_str() {
        "capped" => Ok(Value::MoreThan(*cap)),
        _ => slot.read(&get("inversions")),
    };
    match count {
        Ok(said) => entries.push(Entry { slot: slot.clone(), said }),
        Err(sentence) => errors.push(("inversions".to_string(), sentence)),
    }
    for field in ["seconds", "residue"] {
        let (text, slot) = (get(field), beside(&loaded.slots, &slot.key, field));
        let Some(slot) = slot.filter(|_| !text.is_empty()) else { continue };
        match slot.read(&text) {
            Ok(said) => entries.push(Entry { slot, said }),
            Err(sentence) => errors.push((field.to_string(), sentence)),
        }
    }
    Ok((entries, errors))
}
