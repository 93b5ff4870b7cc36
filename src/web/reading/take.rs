//! What a submit of readings says: new values, corrections with their reasons, and every fault at once.

use super::boxes::{Said, recorded_text};
use super::load::Loaded;
use crate::acts::reading::How;
use crate::domain::failure::Failure;
use crate::domain::method::Settings;
use crate::domain::reading::{Entry, ReadingRefusal, Said as Value, in_slot};
use crate::domain::reason::Reason;
use crate::domain::slot::{Accepts, Slot, unspecified};
use crate::web::pairs::Pairs;

/// Fields of the form that are no readings.
const OWN: [&str; 14] = [
    "cylinder",
    "form_token",
    "submission",
    "version",
    "label",
    "instrument",
    "late_on",
    "late_at",
    "late_why",
    "session",
    "pasted",
    "then",
    "unspecified_time",
    "unspecified_value",
];

/// What was read from the form.
#[derive(Default)]
pub struct Taken {
    pub entries: Vec<Entry>,
    pub corrections: Vec<(Entry, Reason)>,
    /// Box name and sentence.
    pub errors: Vec<(String, String)>,
    pub wants_reason: Vec<String>,
}

impl Taken {
    pub fn said(&self, form: &Pairs) -> Said {
        Said { form: form.clone(), errors: self.errors.clone(), wants_reason: self.wants_reason.clone() }
    }

    /// The names of the boxes that say something new.
    pub fn names(&self) -> Vec<String> {
        let corrected = self.corrections.iter().map(|(entry, _)| entry.slot.key.name());
        self.entries.iter().map(|entry| entry.slot.key.name()).chain(corrected).collect()
    }
}

/// How the values were read: label, instrument, stated time.
pub fn how(loaded: &Loaded, form: &Pairs) -> Result<How, String> {
    Ok(How {
        sample_test: loaded.test.id,
        label: loaded.label.clone(),
        instrument: loaded.instrument,
        read_at: loaded.late.moment(loaded.now)?,
        seen: form.get("version").and_then(|text| text.parse().ok()).unwrap_or_default(),
    })
}

/// Reads the form. A name it does not have is refused (sec_S53).
pub fn take(loaded: &Loaded, form: &Pairs, seen: i64) -> Result<Taken, Failure> {
    let slots = all_slots(loaded, form);
    for (name, _) in form.iter() {
        let is_of = |slot: &Slot| {
            belongs(name, &slot.key.name()) || setting_name(slot).is_some_and(|set| belongs(name, &set))
        };
        if !OWN.contains(&name) && !slots.iter().any(is_of) {
            return Err(Failure::BadRequest(format!("This form has no field “{name}”.")));
        }
    }
    let mut taken = Taken::default();
    for slot in &slots {
        take_slot(loaded, form, seen, slot, &mut taken);
    }
    take_settings(loaded, form, &slots, &mut taken);
    take_unspecified(loaded, form, &mut taken);
    Ok(taken)
}

/// The box of a setting, typed once for all readings of the test.
pub fn setting_name(slot: &Slot) -> Option<String> {
    matches!(slot.accepts, Accepts::Setting(_)).then(|| format!("setting.{}", slot.key.field))
}

/// What was set is of every reading: one text becomes a row of each that has none yet.
fn take_settings(loaded: &Loaded, form: &Pairs, slots: &[Slot], taken: &mut Taken) {
    for slot in slots {
        let Some(name) = setting_name(slot) else { continue };
        let text = form.get(&name).unwrap_or_default().trim();
        if text.is_empty() || in_slot(&loaded.readings, &slot.key).is_some() {
            continue;
        }
        match slot.read(text) {
            Ok(said) => taken.entries.push(Entry { slot: slot.clone(), said }),
            Err(_) if taken.errors.iter().any(|(known, _)| *known == name) => {}
            Err(sentence) => taken.errors.push((name, sentence)),
        }
    }
}

/// The slots of the page, and those of unspecified components that are recorded.
pub fn all_slots(loaded: &Loaded, form: &Pairs) -> Vec<Slot> {
    let mut slots = loaded.slots.clone();
    let recorded = loaded.readings.iter().map(|reading| (reading.key.field.clone(), reading.key.replicate));
    let sent = form.iter().filter_map(|(name, _)| {
        let mut parts = name.strip_prefix("reading.0.")?.splitn(2, '.');
        let replicate = parts.next()?.parse().ok()?;
        let field = parts.next()?.trim_end_matches("-why").trim_end_matches("-why-words");
        Some((field.trim_end_matches(".unread").to_string(), replicate))
    });
    for (field, replicate) in recorded.chain(sent) {
        let found = unspecified(&loaded.test.content, &field, replicate);
        if let Some(slot) = found.filter(|slot| !slots.iter().any(|known| known.key == slot.key)) {
            slots.push(slot);
        }
    }
    slots
}

fn belongs(name: &str, slot: &str) -> bool {
    let rest = name.strip_prefix(slot);
    matches!(rest, Some("" | ".unread" | "-why" | "-why-words"))
}

fn take_slot(loaded: &Loaded, form: &Pairs, seen: i64, slot: &Slot, taken: &mut Taken) {
    let name = slot.key.name();
    let there = in_slot(&loaded.readings, &slot.key);
    let unread = form.get(&format!("{name}.unread")).unwrap_or_default().trim();
    let was_unread = there.is_some_and(|one| one.qualifier == "not read" && one.typed == unread);
    if !unread.is_empty() && !was_unread {
        return take_unread(slot, unread, there.is_some(), taken);
    }
    let Some(text) = form.get(&name) else { return };
    let recorded = there.map(recorded_text).unwrap_or_default();
    if text.trim() == recorded {
        return;
    }
    if text.trim().is_empty() {
        if there.is_some_and(|one| one.id <= seen) {
            let sentence = format!(
                "{recorded} is recorded and stays. Type the right value, or say that it could not be read."
            );
            taken.errors.push((name, sentence));
        }
        return;
    }
    match slot.read(text) {
        Err(sentence) => taken.errors.push((name, sentence)),
        Ok(said) if there.is_some_and(|one| one.id <= seen) => {
            correction(form, slot, said, &recorded, taken);
        }
        Ok(said) => taken.entries.push(Entry { slot: slot.clone(), said }),
    }
}

fn take_unread(slot: &Slot, because: &str, is_recorded: bool, taken: &mut Taken) {
    let name = format!("{}.unread", slot.key.name());
    match Reason::given(because) {
        Err(fault) => taken.errors.push((name, fault.to_string())),
        Ok(reason) => {
            let entry = Entry { slot: slot.clone(), said: Value::NotRead(because.to_string()) };
            match is_recorded {
                true => taken.corrections.push((entry, reason)),
                false => taken.entries.push(entry),
            }
        }
    }
}

/// A changed value needs its reason: one press, or words.
fn correction(form: &Pairs, slot: &Slot, said: Value, recorded: &str, taken: &mut Taken) {
    let name = slot.key.name();
    let words = form.get(&format!("{name}-why-words")).unwrap_or_default().trim();
    let picked = form.get(&format!("{name}-why")).unwrap_or_default();
    let given = if words.is_empty() { picked } else { words };
    if given.is_empty() {
        let refusal = ReadingRefusal::ChangeNeedsReason {
            name: name.clone(),
            was: recorded.to_string(),
            becomes: said.shown(),
        };
        taken.errors.push((name.clone(), refusal.to_string()));
        taken.wants_reason.push(name);
        return;
    }
    match Reason::given(given) {
        Ok(reason) => taken.corrections.push((Entry { slot: slot.clone(), said }, reason)),
        Err(fault) => {
            taken.errors.push((name.clone(), fault.to_string()));
            taken.wants_reason.push(name);
        }
    }
}

/// A peak that no component of the method names: its relative retention time and its value.
fn take_unspecified(loaded: &Loaded, form: &Pairs, taken: &mut Taken) {
    let get = |name: &str| form.get(name).unwrap_or_default().trim().to_string();
    let (time, text) = (get("unspecified_time"), get("unspecified_value"));
    if time.is_empty() && text.is_empty() {
        return;
    }
    let field = format!("unspecified@{time}");
    let Some(slot) = unspecified(&loaded.test.content, &field, 1) else {
        let sentence = format!("“{time}” is no relative retention time. Type it such as 0.85.");
        taken.errors.push(("unspecified_time".to_string(), sentence));
        return;
    };
    if in_slot(&loaded.readings, &slot.key).is_some() {
        let sentence = format!("A peak at {time} is recorded already. Correct it in its own box.");
        taken.errors.push(("unspecified_time".to_string(), sentence));
        return;
    }
    match slot.read(&text) {
        Ok(said) => taken.entries.push(Entry { slot, said }),
        Err(sentence) => taken.errors.push(("unspecified_value".to_string(), sentence)),
    }
}

/// Whether the method has unnamed components.
pub fn takes_unspecified(settings: &Settings) -> bool {
    matches!(settings, Settings::Numeric { components, .. }
        if components.iter().any(|component| component.is_unspecified))
}
