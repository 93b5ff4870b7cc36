//! The boxes of a test page: one per slot, with what is recorded, what was typed and what was said about it.

use askama::Template;

use super::load::Loaded;
use super::take::setting_name;
use crate::domain::judgement::limit::limit_words;
use crate::domain::judgement::spread::Spread;
use crate::domain::method::{Attribute, Level, Settings, Stage};
use crate::domain::reading::{Reading, in_slot, interval_words, shown};
use crate::domain::rounding::to_decimals;
use crate::domain::slot::{Accepts, Slot, SlotKey};
use crate::domain::stage::part_words;
use crate::web::failure::capital;
use crate::web::field::Choice;
use crate::web::pairs::Pairs;

/// One-press reasons for a correction: value sent, words shown.
const REASONS: [(&str, &str); 3] =
    [("mistyped", "Mistyped"), ("re-read", "Re-read"), ("wrong container", "Wrong container")];

/// What was typed and what was wrong with it, when a page comes back.
#[derive(Clone, Debug, Default)]
pub struct Said {
    pub form: Pairs,
    /// Box name and sentence.
    pub errors: Vec<(String, String)>,
    /// Boxes whose change waits for its reason.
    pub wants_reason: Vec<String>,
}

/// One box.
#[derive(Clone, Debug, Template)]
#[template(path = "reading/box.html")]
pub struct ReadingBox {
    pub name: String,
    pub label: String,
    mode: &'static str,
    value: String,
    recorded: String,
    low: String,
    high: String,
    choices: Vec<Choice>,
    note: String,
    hint: String,
    pub is_refused: bool,
    is_why_open: bool,
    why_words: String,
    can_be_unread: bool,
    unread: String,
    unread_recorded: String,
    unread_hint: String,
}

impl askama::filters::HtmlSafe for ReadingBox {}

/// What a box shows of a recorded reading; the same text sent back changes nothing.
pub fn recorded_text(reading: &Reading) -> String {
    match reading.qualifier.as_str() {
        "not read" => "could not be read".to_string(),
        qualifier => shown(qualifier, &reading.typed),
    }
}

impl ReadingBox {
    pub fn of(slot: &Slot, reading: Option<&Reading>, said: &Said, photos: &[(String, i64)]) -> ReadingBox {
        let name = slot.key.name();
        let recorded = reading.map(recorded_text).unwrap_or_default();
        let typed = said.form.get(&name).map(str::to_string);
        let error =
            |name: &str| said.errors.iter().find(|(at, _)| at == name).map(|(_, words)| words.clone());
        let unread_name = format!("{name}.unread");
        let unread_recorded = reading
            .filter(|one| one.qualifier == "not read")
            .map(|one| one.typed.clone())
            .unwrap_or_default();
        let refused = error(&name);
        let asked = reading.filter(|one| one.has_open_question());
        let question = asked.and_then(|one| one.questions.first()).map(|one| one.sentence.clone());
        let (low, high) = match &slot.accepts {
            Accepts::Number { least, most } => (least.to_string(), most.to_string()),
            Accepts::Count { least, most, .. } => (least.to_string(), most.to_string()),
            _ => Default::default(),
        };
        ReadingBox {
            label: slot.label(),
            mode: mode(&slot.accepts),
            value: typed.unwrap_or_else(|| recorded.clone()),
            low,
            high,
            choices: choices(&slot.accepts, photos),
            note: reading.and_then(interval).unwrap_or_else(|| note(slot)),
            is_refused: refused.is_some(),
            hint: refused.or(question).unwrap_or_default(),
            is_why_open: said.wants_reason.contains(&name),
            why_words: said.form.get(&format!("{name}-why-words")).unwrap_or_default().to_string(),
            can_be_unread: !matches!(slot.accepts, Accepts::Words | Accepts::Setting(_)),
            unread: said.form.get(&unread_name).unwrap_or(&unread_recorded).to_string(),
            unread_hint: error(&unread_name).unwrap_or_default(),
            unread_recorded,
            recorded,
            name,
        }
    }

    /// The box of a setting, for all readings of the test.
    fn of_setting(slot: &Slot, said: &Said) -> ReadingBox {
        let name = setting_name(slot).unwrap_or_default();
        let wanted = if let Accepts::Setting(wanted) = &slot.accepts { wanted.as_str() } else { "" };
        let hint = said.errors.iter().find(|(at, _)| *at == name).map(|(_, words)| words.clone());
        ReadingBox {
            label: format!("{}, every reading", slot.title),
            value: said.form.get(&name).unwrap_or(wanted).to_string(),
            is_refused: hint.is_some(),
            hint: hint.unwrap_or_default(),
            name,
            ..ReadingBox::of(slot, None, &Said::default(), &[])
        }
    }

    fn is_chosen(&self, value: &str) -> bool {
        self.value == value
    }

    /// The element an error link leads to.
    pub fn target(&self) -> String {
        if self.choices.is_empty() { self.name.clone() } else { format!("{}-1", self.name) }
    }
}

fn mode(accepts: &Accepts) -> &'static str {
    match accepts {
        Accepts::Number { least, .. } if least.is_sign_positive() => "decimal",
        Accepts::Count { .. } => "numeric",
        _ => "text",
    }
}

fn choices(accepts: &Accepts, photos: &[(String, i64)]) -> Vec<Choice> {
    let Accepts::Grade(grades) = accepts else { return Vec::new() };
    let choice = |grade: &crate::domain::method::Grade| Choice {
        value: grade.code.clone(),
        label: grade.word.clone(),
        anchor: grade.anchor.clone(),
        photo: grade
            .photo
            .as_ref()
            .and_then(|sha256| photos.iter().find(|(known, _)| known == sha256))
            .map(|(_, id)| *id),
    };
    grades.iter().map(choice).collect()
}

/// What a recorded count says that was looked at after each so many.
fn interval(reading: &Reading) -> Option<String> {
    interval_words(&reading.typed, reading.inspected_every?)
}

fn note(slot: &Slot) -> String {
    match (&slot.accepts, slot.decimals) {
        (Accepts::Setting(wanted), _) => format!("method: {wanted}"),
        (Accepts::Number { .. }, Some(decimals)) if decimals > 0 => {
            format!("reads to {}", rust_decimal::Decimal::new(1, decimals))
        }
        _ => String::new(),
    }
}

/// A table of boxes.
pub struct Grid {
    pub caption: String,
    pub heads: Vec<String>,
    pub rows: Vec<GridRow>,
    /// Grades with anchors are large: one under the other, by part and container.
    pub parts: Vec<GridPart>,
    /// What is set once for all readings: spindle, speed.
    pub settings: Vec<SettingBox>,
}

/// A setting of the test: its box, or what is recorded.
pub struct SettingBox {
    pub title: String,
    pub recorded: String,
    pub one: Option<ReadingBox>,
}

/// A part of an appearance, with its containers.
pub struct GridPart {
    pub title: String,
    pub columns: Vec<GridColumn>,
}

pub struct GridColumn {
    pub head: String,
    /// Why nothing of it can be read now; said once in place of each box.
    pub closed: Option<String>,
    pub rows: Vec<(String, Cell)>,
}

pub struct GridRow {
    pub title: String,
    pub limit: String,
    pub cells: Vec<Cell>,
}

pub enum Cell {
    Box(Box<ReadingBox>),
    /// No box now, and why.
    Words(String),
    /// A figure of the server: id, text, what it is.
    Calculated(String, String, &'static str),
}

/// The grid of a test whose columns are containers or replicates.
pub fn grid(loaded: &Loaded, slots: &[Slot], said: &Said) -> Grid {
    if let Settings::Appearance { attributes } = &loaded.test.content.settings {
        let parts = loaded.test.content.stages().into_iter();
        let parts = parts.map(|stage| grid_part(loaded, slots, stage, attributes, said)).collect();
        let caption = loaded.test.title.clone();
        return Grid { caption, heads: Vec::new(), rows: Vec::new(), parts, settings: Vec::new() };
    }
    let (set, slots): (Vec<Slot>, Vec<Slot>) =
        slots.iter().cloned().partition(|slot| matches!(slot.accepts, Accepts::Setting(_)));
    let slots = &slots[..];
    let mut heads: Vec<String> = Vec::new();
    let mut titles: Vec<String> = Vec::new();
    for slot in slots {
        if !heads.contains(&slot.column) {
            heads.push(slot.column.clone());
        }
        if !titles.contains(&slot.title) {
            titles.push(slot.title.clone());
        }
    }
    let has_mean = loaded.test.content.level != Level::Container && heads.len() > 1;
    let rows = titles.iter().map(|title| grid_row(loaded, slots, title, &heads, has_mean, said)).collect();
    if has_mean {
        heads.push("Mean".to_string());
    }
    let settings = settings(loaded, &set, said);
    Grid { caption: loaded.test.title.clone(), heads, rows, parts: Vec::new(), settings }
}

/// One box for each setting, filled with what the method states; once recorded it stands as words.
fn settings(loaded: &Loaded, set: &[Slot], said: &Said) -> Vec<SettingBox> {
    let mut boxes: Vec<SettingBox> = Vec::new();
    for slot in set {
        let there = in_slot(&loaded.readings, &slot.key);
        let known = boxes.iter().position(|one| one.title == slot.title);
        let at = known.unwrap_or_else(|| {
            boxes.push(SettingBox { title: slot.title.clone(), recorded: String::new(), one: None });
            boxes.len() - 1
        });
        match there {
            Some(reading) => boxes[at].recorded = recorded_text(reading),
            None if boxes[at].one.is_none() && loaded.closed(slot).is_none() => {
                boxes[at].one = Some(ReadingBox::of_setting(slot, said));
            }
            None => {}
        }
    }
    boxes
}

fn grid_part(
    loaded: &Loaded,
    slots: &[Slot],
    stage: Stage,
    attributes: &[Attribute],
    said: &Said,
) -> GridPart {
    let of_part: Vec<&Slot> = slots.iter().filter(|slot| slot.stage == stage).collect();
    let mut heads: Vec<&str> = of_part.iter().map(|slot| slot.column.as_str()).collect();
    heads.dedup();
    // The heading says the part, so the row says the attribute alone.
    let title = |slot: &Slot| {
        let known = attributes.iter().find(|attribute| attribute.code == slot.key.field);
        known.map_or("Remarks".to_string(), |attribute| attribute.title.clone())
    };
    let column = |head: &str| {
        let here: Vec<&Slot> = of_part.iter().filter(|slot| slot.column == head).copied().collect();
        let closed: Vec<Option<String>> = here.iter().map(|slot| loaded.closed(slot)).collect();
        let closed =
            if closed.windows(2).all(|two| two[0] == two[1]) { closed.first().cloned() } else { None };
        let rows = here.iter().map(|slot| (title(slot), cell(loaded, slot, said))).collect();
        GridColumn { head: head.to_string(), closed: closed.flatten(), rows }
    };
    GridPart { title: capital(part_words(stage)), columns: heads.into_iter().map(column).collect() }
}

fn grid_row(
    loaded: &Loaded,
    slots: &[Slot],
    title: &str,
    heads: &[String],
    has_mean: bool,
    said: &Said,
) -> GridRow {
    let of_row: Vec<&Slot> = slots.iter().filter(|slot| slot.title == title).collect();
    let mut cells: Vec<Cell> = heads
        .iter()
        .map(|head| match of_row.iter().find(|slot| slot.column == *head) {
            Some(slot) => cell(loaded, slot, said),
            None => Cell::Words("not asked".to_string()),
        })
        .collect();
    let first = of_row.first();
    let field = first.map(|slot| slot.key.field.clone()).unwrap_or_default();
    if has_mean {
        let text = mean(loaded, &field);
        let what = if text.is_empty() { "" } else { "calculated" };
        cells.push(Cell::Calculated(format!("mean.{field}"), text, what));
    }
    let unit = first.map(|slot| slot.unit.as_str()).filter(|unit| !unit.is_empty());
    let is_judged = !matches!(first.map(|slot| &slot.accepts), Some(Accepts::Setting(_) | Accepts::Words))
        && (field == "value" || field == "inversions");
    let limit = if is_judged { limit_shown(loaded, slots) } else { String::new() };
    GridRow { title: unit.map_or(title.to_string(), |unit| format!("{title}, {unit}")), limit, cells }
}

fn cell(loaded: &Loaded, slot: &Slot, said: &Said) -> Cell {
    if let Some(why) = loaded.closed(slot) {
        let there = in_slot(&loaded.readings, &slot.key);
        let shown = there.map(|one| slot.shown(&one.qualifier, &one.typed));
        return Cell::Words(shown.unwrap_or(why));
    }
    Cell::Box(Box::new(ReadingBox::of(slot, in_slot(&loaded.readings, &slot.key), said, &loaded.photos)))
}

/// The mean of a row's numbers to one place more than is read.
pub fn mean(loaded: &Loaded, field: &str) -> String {
    let numbers: Vec<rust_decimal::Decimal> = crate::domain::reading::standing(&loaded.readings)
        .into_iter()
        .filter(|reading| reading.key.field == field && reading.qualifier == "=")
        .filter_map(|reading| reading.value)
        .collect();
    let decimals = loaded.test.content.reading_decimals + 1;
    let halves = loaded.test.content.rounding.halves;
    match Spread::of(&numbers) {
        Some(spread) if numbers.len() > 1 => to_decimals(spread.mean, decimals, halves).to_string(),
        _ => String::new(),
    }
}

/// The limit, or that it stays hidden until the readings are recorded (decision A15).
fn limit_shown(loaded: &Loaded, slots: &[Slot]) -> String {
    let all_in = slots
        .iter()
        .filter(|slot| slot.is_required)
        .all(|slot| in_slot(&loaded.readings, &slot.key).is_some());
    if loaded.test.content.hides_limits && !all_in {
        return "the limit is shown when all is recorded".to_string();
    }
    loaded.limit().map(|limit| limit_words(limit, Some(&loaded.test.content))).unwrap_or_default()
}

/// The slot of a field in the column of another.
pub fn beside(slots: &[Slot], key: &SlotKey, field: &str) -> Option<Slot> {
    let key = SlotKey { field: field.to_string(), ..key.clone() };
    slots.iter().find(|slot| slot.key == key).cloned()
}
