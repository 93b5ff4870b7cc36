//! A table of results as rows: two headers are known, the tidy one and that of the import files.

use std::collections::HashMap;

use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::Complaint;
use crate::domain::import::COLUMNS;
use crate::science::shelf_life::Direction;
use crate::science::transform::Scale;

/// How a value is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Qualifier {
    /// The value itself.
    Exact,
    /// Less than the value.
    Below,
    /// More than the value.
    Above,
}

/// One result.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Line of the file.
    pub line: u64,
    /// What makes a series: product, test, condition, pack, orientation.
    pub key: [String; 5],
    /// Lot.
    pub lot: String,
    /// Unit, as written.
    pub unit: String,
    /// Replicate name, empty if there is none.
    pub replicate: String,
    /// Age in months (days / 30.4375).
    pub age_months: f64,
    /// The value as typed.
    pub value: Decimal,
    /// How it is known.
    pub qualifier: Qualifier,
    /// Lower limit.
    pub lower_limit: Option<Decimal>,
    /// Upper limit.
    pub upper_limit: Option<Decimal>,
    /// Direction, if stated.
    pub direction: Option<Direction>,
    /// Scale, if stated.
    pub scale: Option<Scale>,
    /// Standard deviation and number of replicates of the import files, as written: shown, never used.
    pub printed: Option<(String, String)>,
}

/// Days of a month, everywhere in the program.
pub const DAYS_PER_MONTH: f64 = 30.4375;

const REQUIRED: [&str; 3] = ["lot", "test", "value"];
const AGES: [&str; 2] = ["age_months", "age_days"];
const OPTIONAL: [&str; 11] = [
    "product",
    "condition",
    "pack",
    "orientation",
    "unit",
    "replicate",
    "qualifier",
    "lower_limit",
    "upper_limit",
    "direction",
    "scale",
];

/// Reads a table; on trouble, every complaint it can find.
pub fn read(text: &[u8]) -> Result<Vec<Row>, Vec<Complaint>> {
    let text = std::str::from_utf8(text.strip_prefix(b"\xef\xbb\xbf").unwrap_or(text))
        .map_err(|_| one("the file is not UTF-8 text; save it as CSV with UTF-8"))?;
    let first = text.lines().next().unwrap_or("");
    let semicolons = first.contains(';') && !first.contains(',');
    let mut reader = csv::ReaderBuilder::new()
        .delimiter(if semicolons { b';' } else { b',' })
        .trim(csv::Trim::All)
        .flexible(true)
        .from_reader(text.as_bytes());
    let header = reader.headers().map_err(|error| one(&format!("the header cannot be read: {error}")))?;
    let columns = Columns::of(header, semicolons).map_err(|complaint| vec![complaint])?;
    let (mut rows, mut complaints) = (Vec::new(), Vec::new());
    for record in reader.records() {
        match record {
            Ok(record) if record.iter().all(str::is_empty) => {}
            Ok(record) => match columns.row(&record) {
                Ok(row) => rows.push(row),
                Err(mut found) => complaints.append(&mut found),
            },
            Err(error) => complaints.push(unreadable(&error)),
        }
    }
    if rows.is_empty() && complaints.is_empty() {
        complaints.push(Complaint::whole("the table has a header but no results"));
    }
    if complaints.is_empty() { Ok(rows) } else { Err(complaints) }
}

fn one(sentence: &str) -> Vec<Complaint> {
    vec![Complaint::whole(sentence)]
}

fn unreadable(error: &csv::Error) -> Complaint {
    let line = error.position().map(csv::Position::line);
    Complaint { line, sentence: format!("the line cannot be read: {error}") }
}

/// Where each known column stands.
struct Columns {
    places: HashMap<String, usize>,
    names: usize,
    import: bool,
    comma_decimals: bool,
}

impl Columns {
    fn of(header: &csv::StringRecord, comma_decimals: bool) -> Result<Self, Complaint> {
        let mut places = HashMap::new();
        for (place, name) in header.iter().enumerate() {
            if places.insert(name.to_ascii_lowercase(), place).is_some() {
                return Err(Complaint::at(1, format!("the column {name} stands twice; keep one of them")));
            }
        }
        let has = |name: &&str| places.contains_key(*name);
        let import = !has(&"lot") && ["study", "formulation", "time"].iter().any(has);
        let columns = Self { names: header.len(), import, comma_decimals, places };
        if import {
            columns.check_import()?
        } else {
            columns.check_tidy()?
        }
        Ok(columns)
    }

    fn has(&self, name: &str) -> bool {
        self.places.contains_key(name)
    }

    fn check_tidy(&self) -> Result<(), Complaint> {
        let missing: Vec<&str> = REQUIRED.into_iter().filter(|name| !self.has(name)).collect();
        let ages = AGES.into_iter().filter(|name| self.has(name)).count();
        if !missing.is_empty() || ages == 0 {
            return Err(Complaint::at(
                1,
                "the columns are those of neither known table; a table needs lot, test, value and age_months \
                 or age_days, an import file has study, formulation, condition, container, time, time_unit, \
                 test, value, sd, n, unit, flag",
            ));
        }
        if ages == 2 {
            return Err(Complaint::at(1, "the table has both age_months and age_days; keep one of them"));
        }
        let known: Vec<&str> = REQUIRED.into_iter().chain(AGES).chain(OPTIONAL).collect();
        self.check_unknown(&known)
    }

    fn check_import(&self) -> Result<(), Complaint> {
        let needed = ["formulation", "time", "time_unit", "test", "value"];
        let missing: Vec<&str> = needed.into_iter().filter(|name| !self.has(name)).collect();
        if !missing.is_empty() {
            let sentence = format!("the import file lacks the column {}", missing.join(", "));
            return Err(Complaint::at(1, sentence));
        }
        self.check_unknown(&COLUMNS)
    }

    fn check_unknown(&self, known: &[&str]) -> Result<(), Complaint> {
        let mut unknown: Vec<(&usize, &String)> = self
            .places
            .iter()
            .filter(|(name, _)| !known.contains(&name.as_str()))
            .map(|(n, p)| (p, n))
            .collect();
        unknown.sort();
        match unknown.first() {
            None => Ok(()),
            Some((_, name)) => Err(Complaint::at(
                1,
                format!("the column {name} is not known; rename or remove it (known: {})", known.join(", ")),
            )),
        }
    }

    fn cell<'r>(&self, record: &'r csv::StringRecord, name: &str) -> &'r str {
        self.places.get(name).and_then(|place| record.get(*place)).unwrap_or("")
    }

    fn row(&self, record: &csv::StringRecord) -> Result<Row, Vec<Complaint>> {
        let line = record.position().map_or(0, csv::Position::line);
        if record.len() != self.names {
            let sentence =
                format!("the line has {} cells, the header {}; check its commas", record.len(), self.names);
            return Err(vec![Complaint::at(line, sentence)]);
        }
        let mut reading = Reading { columns: self, record, line, complaints: Vec::new() };
        let row = if self.import { reading.import_row() } else { reading.tidy_row() };
        if reading.complaints.is_empty() { Ok(row) } else { Err(reading.complaints) }
    }
}

/// One line while it is read; complaints are collected, so that all of a line are told at once.
struct Reading<'a> {
    columns: &'a Columns,
    record: &'a csv::StringRecord,
    line: u64,
    complaints: Vec<Complaint>,
}

impl Reading<'_> {
    fn tidy_row(&mut self) -> Row {
        let age_months = if self.columns.has("age_months") {
            self.age("age_months", 1.0)
        } else {
            self.age("age_days", 1.0 / DAYS_PER_MONTH)
        };
        Row {
            line: self.line,
            key: ["product", "test", "condition", "pack", "orientation"].map(|name| self.text(name)),
            lot: self.needed("lot"),
            unit: self.text("unit"),
            replicate: self.text("replicate"),
            age_months,
            value: self.value(),
            qualifier: self.qualifier(),
            lower_limit: self.optional("lower_limit"),
            upper_limit: self.optional("upper_limit"),
            direction: self.direction(),
            scale: self.scale(),
            printed: None,
        }
    }

    fn import_row(&mut self) -> Row {
        let months = match self.text("time_unit").as_str() {
            "day" | "days" | "d" => 1.0 / DAYS_PER_MONTH,
            "week" | "weeks" => 7.0 / DAYS_PER_MONTH,
            "month" | "months" => 1.0,
            other => {
                let sentence = match (other, self.text("time").is_empty()) {
                    ("", true) => {
                        "time and time_unit are empty; a result without an age cannot be evaluated".into()
                    }
                    ("", false) => "time_unit is empty; write day, week or month".into(),
                    _ => format!("the time_unit \"{other}\" is not known; write day, week or month"),
                };
                self.complain(sentence);
                0.0
            }
        };
        let age_months = if months > 0.0 { self.age("time", months) } else { 0.0 };
        let printed = (self.text("sd"), self.text("n"));
        Row {
            line: self.line,
            key: [
                self.text("study"),
                self.needed("test"),
                self.text("condition"),
                self.text("container"),
                String::new(),
            ],
            lot: self.needed("formulation"),
            unit: self.text("unit"),
            replicate: String::new(),
            age_months,
            value: self.value(),
            qualifier: Qualifier::Exact,
            lower_limit: None,
            upper_limit: None,
            direction: None,
            scale: None,
            printed: (printed != Default::default()).then_some(printed),
        }
    }

    fn complain(&mut self, sentence: String) {
        self.complaints.push(Complaint::at(self.line, sentence));
    }

    fn text(&self, name: &str) -> String {
        self.columns.cell(self.record, name).to_string()
    }

    fn needed(&mut self, name: &str) -> String {
        let text = self.text(name);
        if text.is_empty() {
            self.complain(format!("{name} is empty"));
        }
        text
    }

    fn age(&mut self, name: &str, months: f64) -> f64 {
        let Some(age) = self.number(name) else { return 0.0 };
        if age.is_sign_negative() && !age.is_zero() {
            self.complain(format!("{name} is {age}; an age cannot be negative"));
        }
        age.to_f64().unwrap_or(0.0) * months
    }

    fn value(&mut self) -> Decimal {
        self.number("value").unwrap_or_default()
    }

    fn number(&mut self, name: &str) -> Option<Decimal> {
        let text = self.text(name);
        if text.is_empty() {
            self.complain(format!("{name} is empty; remove the line or fill it in"));
            return None;
        }
        let number = decimal(&text, self.columns.comma_decimals);
        if number.is_none() {
            let hint = match text.as_str() {
                bound if bound.starts_with(['<', '>']) => "; write < or > in the column qualifier",
                long if long.parse::<f64>().is_ok_and(f64::is_finite) => " of at most 28 digits",
                _ => "",
            };
            self.complain(format!("{name} \"{text}\" is not a number{hint}"));
        }
        number
    }

    fn optional(&mut self, name: &str) -> Option<Decimal> {
        if self.text(name).is_empty() { None } else { self.number(name) }
    }

    fn qualifier(&mut self) -> Qualifier {
        match self.text("qualifier").as_str() {
            "" | "=" => Qualifier::Exact,
            "<" => Qualifier::Below,
            ">" => Qualifier::Above,
            other => {
                self.complain(format!("the qualifier \"{other}\" is not known; write =, < or >"));
                Qualifier::Exact
            }
        }
    }

    fn direction(&mut self) -> Option<Direction> {
        match self.text("direction").as_str() {
            "" => None,
            "decreasing" => Some(Direction::Decreasing),
            "increasing" => Some(Direction::Increasing),
            "either" => Some(Direction::Either),
            other => {
                let sentence = "write decreasing, increasing or either";
                self.complain(format!("the direction \"{other}\" is not known; {sentence}"));
                None
            }
        }
    }

    fn scale(&mut self) -> Option<Scale> {
        match self.text("scale").as_str() {
            "" => None,
            "none" => Some(Scale::None),
            "ln" => Some(Scale::Ln),
            "anscombe" => Some(Scale::Anscombe),
            "logit" => Some(Scale::Logit),
            other => {
                self.complain(format!(
                    "the scale \"{other}\" is not known; write none, ln, anscombe or logit"
                ));
                None
            }
        }
    }
}

/// A decimal as laboratories print it: a typographic minus counts as minus; with semicolons between cells a
/// comma is the decimal sign.
fn decimal(text: &str, comma_decimals: bool) -> Option<Decimal> {
    let mut text = text.replace('\u{2212}', "-");
    if comma_decimals {
        text = text.replace(',', ".");
    }
    text.parse().ok().or_else(|| Decimal::from_scientific(&text).ok())
}
