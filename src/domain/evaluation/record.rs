//! Stored results as the evaluation sees them, and the series they make.
//!
//! A group is one presentation at one condition, orientation and pack; a series is one test (and component) of a
//! group. What is not taken into a series is named with its reason, never dropped in silence.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::Replicates;
use super::series::{Lot, Measured, Pull, Series};
use super::table::Qualifier;
use crate::domain::series::SeriesPoint;
use crate::science::shelf_life::Direction;
use crate::science::transform::Scale;

/// Presentation × condition × orientation × pack as named at import.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct GroupKey {
    pub presentation: i64,
    pub condition: i64,
    pub orientation: String,
    /// Empty but for imported arms, which name their pack.
    pub pack: String,
}

/// A group with what a page needs to name it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Group {
    pub key: GroupKey,
    /// Any arm of the group; the group is addressed by it.
    pub arm: i64,
    pub presentation_code: String,
    pub product: String,
    pub product_code: String,
    pub condition: String,
    /// "long-term", "accelerated" …, as the catalogue states.
    pub condition_use: String,
    pub temperature_c: Option<Decimal>,
    pub limits_do: String,
    pub is_labelled: bool,
    pub is_imported: bool,
}

impl Group {
    /// "25 °C/60 % RH inverted, HDPE".
    pub fn condition_words(&self) -> String {
        let mut words = self.condition.clone();
        if self.key.orientation != "not stated" {
            words.push_str(&format!(" {}", self.key.orientation));
        }
        if !self.key.pack.is_empty() {
            words.push_str(&format!(", {}", self.key.pack));
        }
        words
    }
}

/// One test's newest result at one pull, or the pull's lack of one.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    pub arm: i64,
    pub lot: i64,
    pub lot_number: String,
    pub formulation_version: i64,
    /// "F-104 version 2".
    pub formulation: String,
    pub is_development: bool,
    pub method_version: i64,
    /// The method's kind: "ph", "viscosity" …
    pub kind: String,
    /// The planned age where it is counted in months.
    pub planned_months: Option<i64>,
    /// The result's row and version; none where the test has no result.
    pub result: Option<(i64, i64)>,
    pub point: SeriesPoint,
    /// The value of each container (the mean of its readings), where the readings are of the reported quantity.
    pub containers: Vec<Decimal>,
}

/// A result that takes no part, and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LeftOut {
    pub lot: String,
    pub age: String,
    pub why: String,
}

/// What a person may choose for a series.
#[derive(Clone, Debug, PartialEq)]
pub struct SeriesChoice {
    pub replicates: Replicates,
    pub scale: Scale,
    /// Only lots of this formulation version.
    pub formulation_version: Option<i64>,
    /// Lots that a person left out, with the reason.
    pub without: Vec<(i64, String)>,
}

/// A series with what went in and what did not.
#[derive(Clone, Debug, PartialEq)]
pub struct Built {
    pub series: Series,
    /// The records in the series, lot by lot, in the order of `series.lots`.
    pub used: Vec<(i64, Vec<Record>)>,
    pub left_out: Vec<LeftOut>,
}

/// The usual scale of a kind of test: viscosity and counts change by shares, all else as it is (A.0).
pub fn usual_scale(kind: &str) -> Scale {
    match kind {
        "viscosity" | "redispersibility" => Scale::Ln,
        _ => Scale::None,
    }
}

pub const SCALES: [(&str, Scale, &str); 4] = [
    ("none", Scale::None, "as it is"),
    ("ln", Scale::Ln, "logarithm"),
    ("anscombe", Scale::Anscombe, "square root of count + 3/8"),
    ("logit", Scale::Logit, "logit, for shares between 0 and 1"),
];

/// The code of a scale, as forms and the command line write it.
pub fn scale_code(scale: Scale) -> &'static str {
    SCALES.iter().find(|(_, known, _)| *known == scale).map_or("none", |(code, ..)| code)
}

pub fn scale_of(code: &str) -> Option<Scale> {
    SCALES.iter().find(|(known, ..)| *known == code).map(|(_, scale, _)| *scale)
}

/// The tests and components of a group that have numbers or words, in order: (test, component).
pub fn series_of(records: &[Record]) -> Vec<(String, String)> {
    let mut found: Vec<(String, String)> = Vec::new();
    for record in records.iter().filter(|record| record.result.is_some()) {
        let key = (record.point.test.clone(), record.point.component.clone());
        if !found.contains(&key) {
            found.push(key);
        }
    }
    let parts = found.clone();
    let has_parts =
        |test: &str| parts.iter().any(|(other, component)| other == test && !component.is_empty());
    let numbers = |test: &str| {
        records
            .iter()
            .any(|one| one.point.test == test && one.point.component.is_empty() && one.point.value.is_some())
    };
    found.retain(|(test, component)| !component.is_empty() || !has_parts(test) || numbers(test));
    found
}

/// The series of one test and component from the records of its group. Limits are exact, of the shelf life.
pub fn build(
    group: &Group,
    (test, component): (&str, &str),
    records: &[Record],
    (lower_limit, upper_limit): (Option<Decimal>, Option<Decimal>),
    choice: &SeriesChoice,
) -> Built {
    let is_of = |one: &&Record| one.point.test == test && one.point.component == component;
    let mut own: Vec<&Record> = records.iter().filter(is_of).collect();
    own.extend(without_result(records, test, component));
    own.sort_by(|one, other| {
        (&one.lot_number, one.point.age_months).cmp(&(&other.lot_number, other.point.age_months))
    });
    let mut built = Built {
        series: empty_series(group, &own, (lower_limit, upper_limit), choice.scale),
        used: Vec::new(),
        left_out: Vec::new(),
    };
    for record in own {
        match why_not(record, choice) {
            Some(why) => built.left_out.push(LeftOut {
                lot: record.lot_number.clone(),
                age: record.point.age.clone(),
                why,
            }),
            None => built.take(record, choice.replicates),
        }
    }
    built
}

/// Tests of this code without any result: missed, or not complete yet.
fn without_result<'a>(records: &'a [Record], test: &str, component: &str) -> Vec<&'a Record> {
    let asked = |one: &&Record| one.point.test == test && one.result.is_none() && !component.is_empty();
    records.iter().filter(asked).collect()
}

fn empty_series(
    group: &Group,
    own: &[&Record],
    (lower_limit, upper_limit): (Option<Decimal>, Option<Decimal>),
    scale: Scale,
) -> Series {
    let named = |pick: fn(&SeriesPoint) -> &String| {
        own.iter().map(|one| pick(&one.point)).find(|text| !text.is_empty()).cloned().unwrap_or_default()
    };
    let (title, component) = (named(|point| &point.title), named(|point| &point.component));
    Series {
        product: format!("{} {}", group.product_code, group.product),
        test: if component.is_empty() { title } else { format!("{title}, {component}") },
        condition: group.condition.clone(),
        pack: group.key.pack.clone(),
        orientation: group.key.orientation.clone(),
        unit: named(|point| &point.unit),
        lower_limit,
        upper_limit,
        direction: match (lower_limit, upper_limit) {
            (Some(_), None) => Some(Direction::Decreasing),
            (None, Some(_)) => Some(Direction::Increasing),
            (Some(_), Some(_)) => Some(Direction::Either),
            (None, None) => None,
        },
        scale,
        lots: Vec::new(),
        line: 0,
        printed: Vec::new(),
    }
}

/// Why a record takes no part; the first reason that holds.
fn why_not(record: &Record, choice: &SeriesChoice) -> Option<String> {
    let point = &record.point;
    if record.is_development {
        return Some("a development lot takes no part in an official evaluation".to_string());
    }
    if let Some((_, why)) = choice.without.iter().find(|(lot, _)| *lot == record.lot) {
        return Some(format!("lot left out: {why}"));
    }
    if choice.formulation_version.is_some_and(|version| version != record.formulation_version) {
        return Some(format!("made to {}", record.formulation));
    }
    if record.result.is_none() {
        return Some(if point.is_missed { "the pull was missed" } else { "not complete yet" }.to_string());
    }
    if point.qualifier == "words" {
        return Some(format!("reported in words: {}", point.shown));
    }
    point.value.is_none().then(|| "no reportable value".to_string())
}

impl Built {
    fn take(&mut self, record: &Record, replicates: Replicates) {
        let place = self.used.iter().position(|(lot, _)| *lot == record.lot).unwrap_or_else(|| {
            self.used.push((record.lot, Vec::new()));
            self.series.lots.push(Lot { name: record.lot_number.clone(), pulls: Vec::new() });
            self.used.len() - 1
        });
        self.used[place].1.push(record.clone());
        let age_months = record.point.age_months.to_f64().unwrap_or(0.0);
        let results = measured(record, replicates);
        let pulls = &mut self.series.lots[place].pulls;
        match pulls.iter_mut().find(|pull| pull.age_months == age_months) {
            Some(pull) => pull.results.extend(results),
            None => pulls.push(Pull { age_months, results }),
        }
    }

    pub fn records(&self) -> impl Iterator<Item = &Record> {
        self.used.iter().flat_map(|(_, records)| records)
    }
}

/// The reported value, or with independent replicates the value of each container.
fn measured(record: &Record, replicates: Replicates) -> Vec<Measured> {
    let qualifier = match record.point.qualifier.as_str() {
        ">" => Qualifier::Above,
        "<" => Qualifier::Below,
        _ => Qualifier::Exact,
    };
    let one = |value: &Decimal| Measured { value: *value, qualifier, line: 0 };
    let apart = replicates == Replicates::Independent && qualifier == Qualifier::Exact;
    if apart && record.containers.len() > 1 {
        return record.containers.iter().map(one).collect();
    }
    record.point.value.iter().map(one).collect()
}

/// Whether any record offers several containers, so that the choice for replicates means something.
pub fn has_independent(records: &[Record]) -> bool {
    records.iter().any(|record| record.containers.len() > 1)
}

/// A pull this near its planned age counts as that age when the reach of data is stated.
const NEAR_PLAN_MONTHS: f64 = 0.5;

/// The age in months that long-term data reach on every lot of a series: the least of the lots' last ages. A pull
/// near its planned age stands for it, so that one taken a day early at 12 months covers 12 months.
pub fn covered_months(built: &Built) -> Option<f64> {
    let reached = |record: &Record| {
        let actual = record.point.age_months.to_f64().unwrap_or(0.0);
        let planned = record.planned_months.map(|months| months as f64);
        planned.filter(|planned| (planned - actual).abs() <= NEAR_PLAN_MONTHS).unwrap_or(actual)
    };
    let last = |records: &Vec<Record>| records.iter().map(reached).max_by(f64::total_cmp);
    built.used.iter().filter_map(|(_, records)| last(records)).min_by(f64::total_cmp)
}

/// For a test in words: the last age up to which every lot conformed, and the first age at which one did not.
pub fn conforming_until(records: &[&Record]) -> (Option<Decimal>, Option<(Decimal, String)>) {
    let first_bad = records
        .iter()
        .filter(|one| one.point.verdict == "out of specification")
        .min_by_key(|one| one.point.age_months)
        .map(|one| (one.point.age_months, one.lot_number.clone()));
    let good = |one: &&&Record| {
        one.point.verdict == "conforms"
            && first_bad.as_ref().is_none_or(|(age, _)| one.point.age_months < *age)
    };
    (records.iter().filter(good).map(|one| one.point.age_months).max(), first_bad)
}
