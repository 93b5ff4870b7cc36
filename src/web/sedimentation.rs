//! Cylinders: filled and shaken stamps time zero; planned readings come due over minutes, hours and days.

use rust_decimal::Decimal;

use super::reading::boxes::{Cell, Grid, GridRow, ReadingBox, Said};
use super::reading::load::{Loaded, load};
use super::reading::page::{query, test_page};
use super::reading::take::how;
use super::reply::{Outcome, see};
use super::route::{Route, post};
use super::show;
use super::visit::Visit;
use crate::acts;
use crate::acts::reading::time_zero;
use crate::domain::act::Act;
use crate::domain::failure::Failure;
use crate::domain::method::{Halves, Settings};
use crate::domain::moment::Moment;
use crate::domain::reading::{Entry, Reading, earliest_minutes, in_slot, is_late, is_too_early};
use crate::domain::reason::Reason;
use crate::domain::result::seconds_late;
use crate::domain::rounding::to_decimals;
use crate::domain::slot::{Slot, SlotKey, minutes_words};

pub const ROUTES: &[Route] = &[post("/tests/{id}/cylinders", &[Act::RecordReadings], start).at_bench()];

/// The cylinders of a test with the chosen one open.
pub struct Cylinders {
    /// Address, words, is here.
    pub tabs: Vec<(String, String, bool)>,
    pub number: usize,
    /// Which it is, in words.
    pub column: String,
    pub timers: Vec<Timer>,
    /// When the planned readings would fall, shown before the cylinder is started.
    pub planned: Vec<String>,
    pub is_started: bool,
    pub can_start: bool,
    pub zero: String,
    pub vessel_ml: String,
    pub typed: String,
    pub error: Option<String>,
    pub grid: Option<Grid>,
}

/// A planned reading of any cylinder.
pub struct Timer {
    pub due_at: String,
    pub name: String,
    pub words: String,
    pub path: String,
    pub is_done: bool,
    /// It may be read now, or from this instant on.
    pub is_open: bool,
    pub open_at: String,
}

pub fn cylinders(visit: &Visit, loaded: &Loaded, said: &Said) -> Result<Cylinders, Failure> {
    let Settings::Sedimentation { planned_minutes, vessel_ml, .. } = &loaded.test.content.settings else {
        return Err(Failure::missing("cylinder"));
    };
    let totals: Vec<&Slot> = loaded.slots.iter().filter(|slot| slot.key.field == "total_ml").collect();
    let asked = visit.form.get("cylinder").or_else(|| visit.query.get("cylinder")).unwrap_or_default();
    let number = asked.parse().ok().filter(|number| (1..=totals.len()).contains(number)).unwrap_or(1);
    let Some(total) = totals.get(number - 1) else { return Err(Failure::missing("cylinder")) };
    let zero = time_zero(&loaded.readings, &total.key, visit.at);
    let path = |number: usize| {
        let label = super::pairs::encoded(&loaded.label);
        format!("/tests/{}?label={label}&cylinder={number}", loaded.test.id)
    };
    let tabs = totals
        .iter()
        .zip(1..)
        .map(|(slot, at)| (path(at), super::failure::capital(&slot.column), at == number))
        .collect();
    let planned = planned_minutes
        .iter()
        .map(|minute| {
            let due = visit.at.plus_minutes(i64::from(*minute));
            format!("{}: {}", minutes_words(*minute), due.shown())
        })
        .collect();
    let error = said.errors.iter().find(|(at, _)| at == "total_ml").map(|(_, words)| words.clone());
    Ok(Cylinders {
        tabs,
        number,
        column: total.column.clone(),
        timers: timers(visit, loaded, &totals, &path),
        planned,
        is_started: zero.is_some(),
        can_start: loaded.is_open() && loaded.closed(total).is_none(),
        zero: zero.map(|at| at.shown()).unwrap_or_default(),
        vessel_ml: vessel_ml.normalize().to_string(),
        typed: said.form.get("total_ml").unwrap_or_default().to_string(),
        error,
        grid: zero.map(|zero| grid(visit, loaded, total, planned_minutes, zero, said)),
    })
}

/// The next due of all cylinders: those waiting, then those done.
fn timers(visit: &Visit, loaded: &Loaded, totals: &[&Slot], path: &dyn Fn(usize) -> String) -> Vec<Timer> {
    let mut timers = Vec::new();
    for (total, at) in totals.iter().zip(1..) {
        let Some(zero) = time_zero(&loaded.readings, &total.key, visit.at) else { continue };
        let of_cylinder = loaded.slots.iter().filter(|slot| {
            let is_same = slot.key == SlotKey { field: slot.key.field.clone(), ..total.key.clone() };
            is_same && slot.key.field.starts_with("sediment_ml")
        });
        for slot in of_cylinder {
            let Some(minute) = slot.due_minute else { continue };
            let due = zero.plus_minutes(i64::from(minute));
            let opens = due.plus_minutes(-earliest_minutes(minute));
            let is_done = in_slot(&loaded.readings, &slot.key).is_some();
            let words = if is_done { "recorded".to_string() } else { format!("due {}", due.shown()) };
            timers.push(Timer {
                due_at: due.exported(),
                name: format!("{}, {}", super::failure::capital(&total.column), minutes_words(minute)),
                words,
                path: format!("{}#{}", path(at), slot.key.name()),
                is_done,
                is_open: opens.utc <= visit.at.utc,
                open_at: opens.exported(),
            });
        }
    }
    timers.sort_by(|one, other| (one.is_done, &one.due_at).cmp(&(other.is_done, &other.due_at)));
    timers
}

/// One row a planned reading: sediment volume, supernatant, F, how late.
fn grid(visit: &Visit, loaded: &Loaded, total: &Slot, minutes: &[u32], zero: Moment, said: &Said) -> Grid {
    let at = |field: String| SlotKey { field, ..total.key.clone() };
    let volume = in_slot(&loaded.readings, &total.key);
    let rows = minutes.iter().map(|minute| {
        let sediment = at(format!("sediment_ml@{minute}"));
        let keys = [sediment.clone(), at(format!("clarity@{minute}"))];
        let due = zero.plus_minutes(i64::from(*minute));
        let mut cells: Vec<Cell> =
            keys.iter().map(|key| planned_cell(visit, loaded, key, *minute, due, said)).collect();
        let read = in_slot(&loaded.readings, &sediment);
        cells.push(Cell::Calculated(format!("F.{minute}"), ratio(read, volume), "F, calculated"));
        cells.push(Cell::Words(lateness(read, *minute, visit.at, due)));
        GridRow { title: minutes_words(*minute), limit: String::new(), cells }
    });
    let mut rows: Vec<GridRow> = rows.collect();
    let first = GridRow {
        title: "Total volume, mL".to_string(),
        limit: String::new(),
        cells: vec![
            Cell::Box(Box::new(ReadingBox::of(total, volume, said, &[]))),
            Cell::Words("shaken".to_string()),
            Cell::Words("F = sediment ÷ total".to_string()),
            Cell::Words(zero.shown()),
        ],
    };
    rows.insert(0, first);
    let heads = ["Sediment volume, mL", "Supernatant", "Ratio F", "Read"].map(str::to_string).to_vec();
    let caption = format!("{}: {}", loaded.test.title, total.column);
    Grid { caption, heads, rows, parts: Vec::new(), settings: Vec::new() }
}

fn planned_cell(
    visit: &Visit,
    loaded: &Loaded,
    key: &SlotKey,
    minute: u32,
    due: Moment,
    said: &Said,
) -> Cell {
    let Some(slot) = loaded.slots.iter().find(|slot| slot.key == *key) else {
        return Cell::Words("not asked".to_string());
    };
    let there = in_slot(&loaded.readings, key);
    let early = (due.utc - visit.at.utc).num_seconds();
    if there.is_none() && is_too_early(minute, early) {
        return Cell::Words("not due yet".to_string());
    }
    match loaded.closed(slot) {
        Some(why) => Cell::Words(why),
        None => Cell::Box(Box::new(ReadingBox::of(slot, there, said, &[]))),
    }
}

/// F to two decimals, from the exact volumes.
fn ratio(read: Option<&Reading>, total: Option<&Reading>) -> String {
    let volumes = read.and_then(|read| read.value).zip(total.and_then(|total| total.value));
    let exact = volumes.and_then(|(read, total): (Decimal, Decimal)| read.checked_div(total));
    exact.map(|ratio| to_decimals(ratio, 2, Halves::AwayFromZero).to_string()).unwrap_or_default()
}

fn lateness(read: Option<&Reading>, minute: u32, now: Moment, due: Moment) -> String {
    let Some(read) = read else { return format!("due {}", due.shown()) };
    let at = show::instant(read.read_instant(), now.zone);
    match seconds_late(read, now) {
        Some(seconds) if is_late(minute, seconds) => {
            format!("{at}, {} late", minutes_words(u32::try_from(seconds / 60).unwrap_or_default()))
        }
        _ => at,
    }
}

const KNOWN: [&str; 8] =
    ["form_token", "submission", "version", "label", "session", "instrument", "cylinder", "total_ml"];

/// "Cylinder filled and shaken now": time zero and the total volume, once.
fn start(visit: &Visit) -> Outcome {
    let loaded = load(visit, visit.id("id")?)?;
    if let Some((name, _)) = visit.form.iter().find(|(name, _)| !KNOWN.contains(name)) {
        return Err(Failure::BadRequest(format!("This form has no field “{name}”.")));
    }
    let asked = visit.form.get("cylinder").unwrap_or_default();
    let totals = loaded.slots.iter().filter(|slot| slot.key.field == "total_ml");
    let slot =
        totals.zip(1..).find(|(_, at): &(_, usize)| at.to_string() == asked).map(|(slot, _)| slot.clone());
    let Some(slot) = slot else { return Err(Failure::missing("cylinder with this number")) };
    let how = how(&loaded, &visit.form).map_err(Failure::BadRequest)?;
    let back = |status: u16, sentence: String| {
        let errors = vec![("total_ml".to_string(), sentence)];
        let said = Said { form: visit.form.clone(), errors, ..Said::default() };
        test_page(status, visit, &loaded, &said, None)
    };
    let said = match slot.read(visit.form.get("total_ml").unwrap_or_default()) {
        Ok(said) => said,
        Err(sentence) => return back(422, sentence),
    };
    let entry = Entry { slot, said };
    match acts::reading::record(visit.db(), visit.actor()?, &how, &[entry], &Reason::none()) {
        Ok(_) => see(format!("/tests/{}{}", loaded.test.id, query(visit, &loaded))),
        Err(Failure::Refused(refusal)) => back(409, refusal.sentence),
        Err(Failure::Stale(stale)) => {
            let fresh = load(visit, loaded.test.id)?;
            test_page(409, visit, &fresh, &Said::default(), Some(stale))
        }
        Err(other) => Err(other),
    }
}
