//! What the data suggest to the questions about significant change (ICH Q1A(R2) 2.2.7.1, requirements SC1–SC7). A
//! person answers; another answer than the suggested one says why.

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use crate::domain::evaluation::record::Record;
use crate::domain::specification::{LimitSet, SpecificationContent};
use crate::science::significant_change::{AssayReading, Kind, Pull, of_pull};

/// A significant change found in one lot at one age.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    pub lot: String,
    pub age: String,
    pub months: f64,
    /// "assay changed by 5 points of label", "pH outside its limits" …
    pub what: Vec<&'static str>,
}

/// What the data at one condition say.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Suggestion {
    pub changes: Vec<Change>,
    /// The age that every lot with data there has reached.
    pub reached_months: Option<f64>,
    /// Tests in words, which a person has to look at.
    pub in_words: Vec<String>,
}

/// Looks at the records of one condition. `initial` are the time-zero results of the same lots at any condition
/// (SC7: one initial value, shared by all).
pub fn suggest(records: &[Record], initial: &[Record], limits: &SpecificationContent) -> Suggestion {
    let mut found = Suggestion::default();
    let mut keys: Vec<(i64, Decimal)> = Vec::new();
    for record in records.iter().filter(|one| one.result.is_some() && !one.is_development) {
        let key = (record.lot, record.point.age_months);
        if !keys.contains(&key) {
            keys.push(key);
        }
        if record.point.qualifier == "words" && !found.in_words.contains(&record.point.title) {
            found.in_words.push(record.point.title.clone());
        }
    }
    for (lot, age) in &keys {
        let of_pull = |one: &&Record| one.lot == *lot && one.point.age_months == *age && one.result.is_some();
        let own: Vec<&Record> = records.iter().filter(of_pull).collect();
        found.changes.extend(change(&own, initial, limits));
    }
    let mut lots: Vec<i64> = keys.iter().map(|(lot, _)| *lot).collect();
    lots.sort_unstable();
    lots.dedup();
    let last = |lot: &i64| keys.iter().filter(|(one, _)| one == lot).map(|(_, age)| *age).max();
    found.reached_months = lots.iter().filter_map(last).min().and_then(|age| age.to_f64());
    found.changes.sort_by(|one, other| one.months.total_cmp(&other.months));
    found
}

fn change(own: &[&Record], initial: &[Record], limits: &SpecificationContent) -> Option<Change> {
    let first = own.first()?;
    let months = first.point.age_months.to_f64()?;
    let outside = |kinds: &[&str], parts: bool| {
        own.iter().any(|one| {
            kinds.contains(&one.kind.as_str())
                && one.point.component.is_empty() != parts
                && is_outside(one, limits)
        })
    };
    let loss = own.iter().find(|one| ["weight-loss", "water-loss"].contains(&one.point.test.as_str()));
    let dissolution = own.iter().any(|one| one.point.test == "dissolution" && is_outside(one, limits));
    let physical = ["appearance", "redispersibility", "as-stored-sediment", "sedimentation", "viscosity"];
    let pull = Pull {
        months,
        assay: own.iter().find_map(|one| assay(one, initial)),
        degradation_product_fails: outside(&["numeric"], true),
        physical_fails: outside(&physical, false),
        ph_fails: outside(&["ph"], false),
        dissolution_fails: dissolution,
        water_loss_percent: loss.and_then(|one| one.point.value).and_then(|value| value.to_f64()),
    };
    let what: Vec<&'static str> =
        of_pull(&pull, AssayReading::PointsOfLabel).into_iter().map(words).collect();
    (!what.is_empty()).then(|| Change {
        lot: first.lot_number.clone(),
        age: first.point.age.clone(),
        months,
        what,
    })
}

/// (initial, now) of an assay in % of label: the mean of the same lot's results at time zero.
fn assay(record: &Record, initial: &[Record]) -> Option<(f64, f64)> {
    (record.point.test == "assay" && record.point.unit == "%").then_some(())?;
    let zero: Vec<Decimal> = initial
        .iter()
        .filter(|one| one.lot == record.lot && one.point.test == "assay" && one.point.age_months.is_zero())
        .filter_map(|one| one.point.value)
        .collect();
    let count = Decimal::from(zero.len());
    let mean = zero.iter().sum::<Decimal>().checked_div(count)?;
    Some((mean.to_f64()?, record.point.value?.to_f64()?))
}

/// Outside its shelf-life limits, by the value or by the verdict; a bound counts where it lies outside already.
fn is_outside(record: &Record, limits: &SpecificationContent) -> bool {
    let point = &record.point;
    let (lower, upper) = limits.range_of(&point.test, &point.component, LimitSet::ShelfLife);
    let beyond = point.value.is_some_and(|value| {
        let low = lower.is_some_and(|limit| value < limit) && point.qualifier != ">";
        let high = upper.is_some_and(|limit| value > limit || (value == limit && point.qualifier == ">"));
        low || (high && point.qualifier != "<")
    });
    beyond || point.verdict == "out of specification"
}

fn words(kind: Kind) -> &'static str {
    match kind {
        Kind::Assay => "assay changed by 5 points of label or more (SC1)",
        Kind::DegradationProduct => "a degradation product exceeds its limit (SC2)",
        Kind::Physical => "a physical attribute fails its limit (SC3)",
        Kind::Ph => "pH is outside its limits (SC4)",
        Kind::Dissolution => "dissolution fails (SC5)",
        Kind::WaterLoss => "5 % of the water is lost (SC6)",
    }
}

impl Suggestion {
    /// The code of the answer about the accelerated condition that the data suggest; none where they do not reach
    /// six months on every lot and show nothing yet.
    pub fn accelerated(&self) -> Option<&'static str> {
        match self.changes.first() {
            Some(change) if change.months <= 3.5 => Some("within-3-months"),
            Some(_) => Some("after-3-months"),
            None => self.reached_months.filter(|months| *months >= 5.5).map(|_| "none"),
        }
    }

    /// The same for the intermediate condition.
    pub fn intermediate(&self) -> Option<&'static str> {
        match (self.changes.is_empty(), self.reached_months) {
            (false, _) => Some("change"),
            (true, Some(months)) if months >= 5.5 => Some("none"),
            (true, None) => Some("not-tested"),
            _ => None,
        }
    }

    /// In sentences, for the page and the record.
    pub fn sentences(&self, condition: &str) -> Vec<String> {
        let mut sentences: Vec<String> = self
            .changes
            .iter()
            .map(|one| format!("{condition}: lot {} at {}: {}.", one.lot, one.age, one.what.join("; ")))
            .collect();
        match self.reached_months {
            None => sentences.push(format!("{condition}: no result yet.")),
            Some(months) if self.changes.is_empty() => {
                sentences.push(format!(
                    "{condition}: no significant change found up to {months:.1} months on every lot there."
                ));
            }
            Some(_) => {}
        }
        if !self.in_words.is_empty() {
            sentences
                .push(format!("{condition}: look at {} yourself, it is in words.", self.in_words.join(", ")));
        }
        sentences
    }
}
