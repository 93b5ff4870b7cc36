//! Which earlier results a result is judged by: chosen by one rule, listed with what was left out, and digested.
//!
//! Used are valid, not imported results of lots with the same presentation, condition, orientation, test,
//! component, method version and formulation version, or versions declared alike, of pulls taken before the
//! judged one; the newest version of each (decision A13). Nothing else removes a result but a person, with a
//! reason.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;
use serde::{Deserialize, Serialize};

use crate::domain::digest::sha256_hex;
use crate::domain::judgement::spread::Spread;
use crate::domain::method::TestKind;
use crate::science::regression::Point;

/// A result that might be used, as stored: same presentation, condition, orientation and test, pulled before.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Candidate {
    pub lot: i64,
    pub lot_number: String,
    pub formulation_version: i64,
    pub method_version: i64,
    pub sample_test: i64,
    pub result: i64,
    pub component: String,
    pub value: Option<Decimal>,
    /// As stored: `=`, `>`, `<`, `words`, `none`.
    pub qualifier: String,
    /// From time zero of its study to the pull.
    pub days: i64,
    pub is_imported: bool,
    pub is_sent_back: bool,
    /// Read only at intervals: the count lies between two inspections.
    pub is_interval: bool,
    /// Why a person left it out.
    pub left_out_because: Option<String>,
}

/// What is judged.
#[derive(Clone, Copy, Debug)]
pub struct Wanted<'a> {
    pub lot: i64,
    pub component: &'a str,
    pub formulation_version: i64,
    pub method_version: i64,
}

/// Pairs of versions that a person declared alike.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Alike {
    pub formulations: Vec<(i64, i64)>,
    pub methods: Vec<(i64, i64)>,
}

fn alike(pairs: &[(i64, i64)], one: i64, other: i64) -> bool {
    one == other || pairs.contains(&(one.min(other), one.max(other)))
}

/// One used result: its row, its age in days and its exact value.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(from = "(i64, i64, Decimal)", into = "(i64, i64, Decimal)")]
pub struct Entry {
    pub result: i64,
    pub days: i64,
    pub value: Decimal,
}

impl From<(i64, i64, Decimal)> for Entry {
    fn from((result, days, value): (i64, i64, Decimal)) -> Entry {
        Entry { result, days, value }
    }
}

impl From<Entry> for (i64, i64, Decimal) {
    fn from(entry: Entry) -> (i64, i64, Decimal) {
        (entry.result, entry.days, entry.value)
    }
}

/// A lot of the history with its results by age.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct HistoryLot {
    pub lot: i64,
    pub number: String,
    pub entries: Vec<Entry>,
}

/// Results of one lot that were not used, and why.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct LeftOut {
    pub number: String,
    pub why: String,
    pub results: usize,
}

/// The history a verdict rests on.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct History {
    /// Other lots, by the order in which they were recorded.
    pub lots: Vec<HistoryLot>,
    /// Earlier results of the judged lot.
    pub own: Vec<Entry>,
    pub left_out: Vec<LeftOut>,
    /// Some results that belong here are known only as bounds: then nothing can be judged by the others alone.
    pub has_bounds: bool,
}

/// Chooses the history. `candidates` come by lot and age.
pub fn choose(candidates: &[Candidate], wanted: &Wanted<'_>, pairs: &Alike) -> History {
    let mut history = History::default();
    for one in candidates.iter().filter(|one| one.component == wanted.component) {
        match usable(one, wanted, pairs) {
            Ok(value) => history.add(one, wanted.lot, value),
            Err(why) => {
                history.has_bounds |= why == BOUND;
                history.leave_out(one, why);
            }
        }
    }
    history
}

const BOUND: &str = "known only as a bound";

/// The value, or why it is left out, in this order: imported, other formulation version, other method version,
/// sent back, left out by a person, no number, known only as a bound.
fn usable(one: &Candidate, wanted: &Wanted<'_>, pairs: &Alike) -> Result<Decimal, String> {
    let left = |why: &str| Err(why.to_string());
    if one.is_imported {
        return left("imported");
    }
    if !alike(&pairs.formulations, one.formulation_version, wanted.formulation_version) {
        return left("another formulation version");
    }
    if !alike(&pairs.methods, one.method_version, wanted.method_version) {
        return left("another method version");
    }
    if one.is_sent_back {
        return left("sent back");
    }
    if let Some(why) = &one.left_out_because {
        return Err(format!("left out: {why}"));
    }
    match (one.value, one.qualifier.as_str()) {
        (Some(_), ">" | "<") => left(BOUND),
        (Some(_), "=") if one.is_interval => left(BOUND),
        (Some(value), "=") => Ok(value),
        _ => left("no number"),
    }
}

impl History {
    fn add(&mut self, one: &Candidate, own_lot: i64, value: Decimal) {
        let entry = Entry { result: one.result, days: one.days, value };
        if one.lot == own_lot {
            return self.own.push(entry);
        }
        match self.lots.last_mut() {
            Some(last) if last.lot == one.lot => last.entries.push(entry),
            _ => self.lots.push(HistoryLot {
                lot: one.lot,
                number: one.lot_number.clone(),
                entries: vec![entry],
            }),
        }
    }

    fn leave_out(&mut self, one: &Candidate, why: String) {
        match self.left_out.iter_mut().find(|known| known.number == one.lot_number && known.why == why) {
            Some(known) => known.results += 1,
            None => self.left_out.push(LeftOut { number: one.lot_number.clone(), why, results: 1 }),
        }
    }

    /// The text that is stored and digested.
    pub fn canonical(&self) -> String {
        serde_json::to_string(self).unwrap_or_default()
    }

    pub fn digest(&self) -> String {
        sha256_hex(self.canonical().as_bytes())
    }

    /// Reads what [`History::canonical`] wrote.
    pub fn read(text: &str) -> Option<History> {
        serde_json::from_str(text).ok()
    }

    /// The used results that this history has and the other has not, by their rows.
    pub fn beyond(&self, other: &History) -> usize {
        let known: Vec<i64> = other.entries().map(|entry| entry.result).collect();
        self.entries().filter(|entry| !known.contains(&entry.result)).count()
    }

    /// All used results.
    pub fn entries(&self) -> impl Iterator<Item = &Entry> {
        self.lots.iter().flat_map(|lot| &lot.entries).chain(&self.own)
    }

    /// "3 other lots and 4 earlier pulls".
    pub fn words(&self) -> String {
        let own = distinct(&self.own);
        let pulls = if own == 1 { "1 earlier pull".to_string() } else { format!("{own} earlier pulls") };
        match self.lots.len() {
            0 => format!("the lot’s own {pulls}"),
            1 => format!("1 other lot and {pulls}"),
            lots => format!("{lots} other lots and {pulls}"),
        }
    }
}

fn distinct(entries: &[Entry]) -> usize {
    by_age(entries).len()
}

/// Results of one age of a lot are one result: their exact mean (a retest is never a second entry).
fn by_age(entries: &[Entry]) -> Vec<(i64, Decimal)> {
    let mut days: Vec<i64> = entries.iter().map(|entry| entry.days).collect();
    days.sort_unstable();
    days.dedup();
    let mean = |day: i64| {
        let values: Vec<Decimal> =
            entries.iter().filter(|one| one.days == day).map(|one| one.value).collect();
        Spread::of(&values).map(|spread| (day, spread.mean))
    };
    days.into_iter().filter_map(mean).collect()
}

/// The scale on which a test is judged.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scale {
    AsMeasured,
    /// Counts of a waiting time scatter in proportion: natural logarithm.
    Ln,
}

impl Scale {
    pub fn of(kind: TestKind) -> Scale {
        if kind == TestKind::Redispersibility { Scale::Ln } else { Scale::AsMeasured }
    }

    pub fn words(self) -> &'static str {
        match self {
            Scale::AsMeasured => "as measured",
            Scale::Ln => "natural logarithm",
        }
    }
}

/// Months of 30.4375 days (decision A11).
pub fn months(days: i64) -> f64 {
    days as f64 / 30.4375
}

/// A history as numbers: values counted exactly from an origin before they become floats.
#[derive(Clone, Debug)]
pub struct Numbers {
    pub lots: Vec<Vec<Point>>,
    /// Earlier pulls of the lot; one at the judged age is not among them.
    pub own: Vec<Point>,
    /// Results of the lot at the judged age, averaged into the judged one.
    same_age: Vec<Decimal>,
    origin: Decimal,
    pub scale: Scale,
}

impl Numbers {
    /// `None` where a value cannot be put on the scale.
    pub fn of(history: &History, scale: Scale, days: i64) -> Option<Numbers> {
        let origin = history.entries().next().map_or(Decimal::ZERO, |entry| entry.value);
        let mut numbers = Numbers { lots: Vec::new(), own: Vec::new(), same_age: Vec::new(), origin, scale };
        for lot in &history.lots {
            numbers.lots.push(numbers.points(&lot.entries)?);
        }
        let (same, earlier): (Vec<Entry>, Vec<Entry>) =
            history.own.iter().cloned().partition(|entry| entry.days == days);
        numbers.own = numbers.points(&earlier)?;
        numbers.same_age = same.into_iter().map(|entry| entry.value).collect();
        Some(numbers)
    }

    fn points(&self, entries: &[Entry]) -> Option<Vec<Point>> {
        let point = |(days, value): (i64, Decimal)| Some(Point { x: months(days), y: self.scaled(value)? });
        by_age(entries).into_iter().map(point).collect()
    }

    /// The judged value: the mean with those of the same age.
    pub fn judged(&self, value: Decimal) -> Decimal {
        let values: Vec<Decimal> = self.same_age.iter().copied().chain([value]).collect();
        Spread::of(&values).map_or(value, |spread| spread.mean)
    }

    pub fn scaled(&self, value: Decimal) -> Option<f64> {
        match self.scale {
            Scale::AsMeasured => value.checked_sub(self.origin)?.to_f64(),
            Scale::Ln => value.to_f64().filter(|value| *value > 0.0).map(f64::ln),
        }
    }

    /// From the scale to the unit of the test.
    pub fn back(&self, y: f64) -> f64 {
        match self.scale {
            Scale::AsMeasured => y + self.origin.to_f64().unwrap_or_default(),
            Scale::Ln => y.exp(),
        }
    }

    pub fn slices(&self) -> Vec<&[Point]> {
        self.lots.iter().map(Vec::as_slice).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn candidate(lot: i64, days: i64, value: &str) -> Candidate {
        Candidate {
            lot,
            lot_number: format!("L{lot}"),
            formulation_version: 1,
            method_version: 1,
            result: lot * 100 + days,
            value: Some(value.parse().unwrap()),
            qualifier: "=".to_string(),
            days,
            ..Candidate::default()
        }
    }

    const WANTED: Wanted<'_> = Wanted { lot: 9, component: "", formulation_version: 1, method_version: 1 };

    #[test]
    fn what_is_left_out_is_named_in_a_fixed_order() {
        type Spoil = fn(&mut Candidate);
        let table: [(Spoil, &str); 8] = [
            (|one| one.is_imported = true, "imported"),
            (|one| one.formulation_version = 2, "another formulation version"),
            (|one| one.method_version = 2, "another method version"),
            (|one| one.is_sent_back = true, "sent back"),
            (|one| one.left_out_because = Some("wrong bottle".to_string()), "left out: wrong bottle"),
            (|one| one.qualifier = "words".to_string(), "no number"),
            (|one| one.qualifier = ">".to_string(), "known only as a bound"),
            (|one| one.is_interval = true, "known only as a bound"),
        ];
        for place in 0..table.len() {
            let mut one = candidate(1, 30, "5");
            // Everything that comes later is wrong too: the first in the order is named.
            table[place..7].iter().chain(&table[7..]).for_each(|(spoil, _)| spoil(&mut one));
            if place == 7 {
                one.qualifier = "=".to_string();
            }
            if place == 5 {
                one.qualifier = "words".to_string();
            }
            let history = choose(&[one], &WANTED, &Alike::default());
            assert_eq!(history.left_out[0].why, table[place].1, "case {place}");
            assert_eq!(history.has_bounds, place >= 6);
            assert!(history.lots.is_empty());
        }
    }

    #[test]
    fn versions_declared_alike_count_both_ways_and_make_no_chain() {
        let mut one = candidate(1, 30, "5");
        one.formulation_version = 3;
        let alike = |pairs: &[(i64, i64)]| Alike { formulations: pairs.to_vec(), methods: Vec::new() };
        let used = |pairs: &[(i64, i64)]| choose(&[one.clone()], &WANTED, &alike(pairs)).lots.len();
        assert_eq!(used(&[(1, 3)]), 1);
        assert_eq!(used(&[(1, 2), (2, 3)]), 0);
    }

    #[test]
    fn the_digest_tells_any_difference_and_the_text_reads_back() {
        let found = [candidate(1, 0, "5.10"), candidate(1, 90, "5.0"), candidate(9, 0, "4.9")];
        let history = choose(&found, &WANTED, &Alike::default());
        assert_eq!(
            history.canonical(),
            concat!(
                r#"{"lots":[{"lot":1,"number":"L1","entries":[[100,0,"5.10"],[190,90,"5.0"]]}],"#,
                r#""own":[[900,0,"4.9"]],"left_out":[],"has_bounds":false}"#
            )
        );
        assert_eq!(History::read(&history.canonical()).as_ref(), Some(&history));
        let mut other = found.to_vec();
        other[0].value = Some("5.1".parse().unwrap());
        assert_ne!(choose(&other, &WANTED, &Alike::default()).digest(), history.digest());
        assert_eq!(history.beyond(&choose(&found[..1], &WANTED, &Alike::default())), 2);
        assert_eq!(history.words(), "1 other lot and 1 earlier pull");
    }

    #[test]
    fn results_of_one_age_are_one_and_the_judged_age_is_averaged_in() {
        let mut found = vec![candidate(1, 30, "5"), candidate(1, 30, "6")];
        found[1].result += 1;
        found.push(candidate(9, 60, "4"));
        let history = choose(&found, &WANTED, &Alike::default());
        let numbers = Numbers::of(&history, Scale::AsMeasured, 60).unwrap();
        assert_eq!((numbers.lots[0].len(), numbers.own.len()), (1, 0));
        assert_eq!(numbers.lots[0][0].y, 0.5);
        assert_eq!(numbers.judged(Decimal::from(5)), Decimal::new(45, 1));
        assert!(Numbers::of(&history, Scale::Ln, 61).is_some_and(|numbers| numbers.own.len() == 1));
    }
}
