//! Rows as series: one product, test, condition, pack and orientation, with its lots and pulls.

use std::collections::HashMap;

use rust_decimal::Decimal;

use super::Complaint;
use super::table::{Qualifier, Row};
use crate::science::shelf_life::Direction;
use crate::science::transform::Scale;

/// A result of a pull.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// The value.
    pub value: Decimal,
    /// How it is known.
    pub qualifier: Qualifier,
    /// Line of the file.
    pub line: u64,
}

/// All results of one lot at one age.
#[derive(Clone, Debug, PartialEq)]
pub struct Pull {
    /// Age in months.
    pub age_months: f64,
    /// One or more results.
    pub results: Vec<Measured>,
}

/// A lot with its pulls, oldest age last.
#[derive(Clone, Debug, PartialEq)]
pub struct Lot {
    /// Name.
    pub name: String,
    /// Pulls by age.
    pub pulls: Vec<Pull>,
}

/// A series.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// Product; empty where not stated, as all of these.
    pub product: String,
    /// Test.
    pub test: String,
    /// Condition.
    pub condition: String,
    /// Pack.
    pub pack: String,
    /// Orientation.
    pub orientation: String,
    /// Unit.
    pub unit: String,
    /// Lower limit.
    pub lower_limit: Option<Decimal>,
    /// Upper limit.
    pub upper_limit: Option<Decimal>,
    /// Direction: as stated, or from the limits; none without limits.
    pub direction: Option<Direction>,
    /// Analysis scale.
    pub scale: Scale,
    /// Lots in the order of the file.
    pub lots: Vec<Lot>,
    /// The line it begins on.
    pub line: u64,
    /// Standard deviations and counts as the file prints them: shown, not used.
    pub printed: Vec<(String, String)>,
}

impl Series {
    /// Whether some lot has results at two ages.
    pub fn has_two_ages(&self) -> bool {
        self.lots.iter().any(|lot| lot.pulls.len() > 1)
    }
}

/// Groups rows, and complains where rows of one series contradict one another.
pub fn group(rows: &[Row]) -> Result<Vec<Series>, Vec<Complaint>> {
    let mut complaints = mixed_units(rows);
    let mut places: HashMap<&[String; 5], usize> = HashMap::new();
    let mut groups: Vec<Vec<&Row>> = Vec::new();
    for row in rows {
        let place = *places.entry(&row.key).or_insert_with(|| {
            groups.push(Vec::new());
            groups.len() - 1
        });
        groups[place].push(row);
    }
    let mut series = Vec::with_capacity(groups.len());
    for group in &groups {
        complaints.extend(contradictions(group));
        complaints.extend(repeated_replicates(group));
        series.extend(one_series(group));
    }
    if complaints.is_empty() && !series.iter().any(Series::has_two_ages) {
        complaints.push(Complaint::whole(
            "no series has results of one lot at two ages, so there is no line; add later results",
        ));
    }
    if complaints.is_empty() {
        return Ok(series);
    }
    complaints.sort_by_key(|complaint| complaint.line);
    Err(complaints)
}

fn mixed_units(rows: &[Row]) -> Vec<Complaint> {
    let mut first: HashMap<(&str, &str), &Row> = HashMap::new();
    let mut complaints = Vec::new();
    for row in rows {
        let start = first.entry((&row.key[0], &row.key[1])).or_insert(row);
        if start.unit != row.unit {
            let unit = |row: &Row| if row.unit.is_empty() { "no unit".into() } else { row.unit.clone() };
            complaints.push(Complaint::at(
                row.line,
                format!(
                    "{} is given in {} here and in {} on line {}; convert one of them",
                    row.key[1],
                    unit(row),
                    unit(start),
                    start.line
                ),
            ));
        }
    }
    complaints
}

fn contradictions(group: &[&Row]) -> Vec<Complaint> {
    let mut complaints = Vec::new();
    let Some(first) = group.first() else { return complaints };
    for row in group {
        for (name, same) in [
            ("lower_limit", row.lower_limit == first.lower_limit),
            ("upper_limit", row.upper_limit == first.upper_limit),
            ("direction", row.direction == first.direction),
            ("scale", row.scale == first.scale),
        ] {
            if !same {
                let sentence = format!(
                    "{name} differs from that on line {} of the same series; a series has one {name}",
                    first.line
                );
                complaints.push(Complaint::at(row.line, sentence));
            }
        }
    }
    if let (Some(lower), Some(upper)) = (first.lower_limit, first.upper_limit)
        && lower >= upper
    {
        let sentence = format!("the lower limit {lower} is not below the upper limit {upper}");
        complaints.push(Complaint::at(first.line, sentence));
    }
    complaints
}

fn repeated_replicates(group: &[&Row]) -> Vec<Complaint> {
    let mut seen: HashMap<(&str, u64, &str), u64> = HashMap::new();
    let mut complaints = Vec::new();
    for row in group.iter().filter(|row| !row.replicate.is_empty()) {
        let key = (row.lot.as_str(), row.age_months.to_bits(), row.replicate.as_str());
        if let Some(line) = seen.insert(key, row.line) {
            let sentence = format!(
                "replicate {} of lot {} at this age stands on line {line} already; number replicates apart",
                row.replicate, row.lot
            );
            complaints.push(Complaint::at(row.line, sentence));
        }
    }
    complaints
}

fn one_series(group: &[&Row]) -> Option<Series> {
    let first = group.first()?;
    let [product, test, condition, pack, orientation] = first.key.clone();
    let from_limits = match (first.lower_limit, first.upper_limit) {
        (Some(_), None) => Some(Direction::Decreasing),
        (None, Some(_)) => Some(Direction::Increasing),
        (Some(_), Some(_)) => Some(Direction::Either),
        (None, None) => None,
    };
    let mut series = Series {
        product,
        test,
        condition,
        pack,
        orientation,
        unit: first.unit.clone(),
        lower_limit: first.lower_limit,
        upper_limit: first.upper_limit,
        direction: first.direction.or(from_limits),
        scale: first.scale.unwrap_or(Scale::None),
        lots: Vec::new(),
        line: first.line,
        printed: group.iter().filter_map(|row| row.printed.clone()).collect(),
    };
    let mut places: HashMap<&str, usize> = HashMap::new();
    for row in group {
        let place = *places.entry(&row.lot).or_insert_with(|| {
            series.lots.push(Lot { name: row.lot.clone(), pulls: Vec::new() });
            series.lots.len() - 1
        });
        series.lots[place].add(row);
    }
    for lot in &mut series.lots {
        lot.pulls.sort_by(|a, b| a.age_months.total_cmp(&b.age_months));
    }
    Some(series)
}

impl Lot {
    fn add(&mut self, row: &Row) {
        let result = Measured { value: row.value, qualifier: row.qualifier, line: row.line };
        match self.pulls.iter_mut().find(|pull| pull.age_months == row.age_months) {
            Some(pull) => pull.results.push(result),
            None => self.pulls.push(Pull { age_months: row.age_months, results: vec![result] }),
        }
    }
}
