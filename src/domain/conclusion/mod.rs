//! A signed conclusion on a shelf life: lots chosen, answers, inputs and numbers in one canonical document.
//!
//! It proposes; a shelf life is assigned by the authorised person (decision A12), never taken from here.

pub mod cap;
pub mod rule;
pub mod suggestion;

use serde::{Deserialize, Serialize};

use self::cap::Answers;
use super::digest::sha256_hex;
use super::evaluation::group::Computed;
use super::evaluation::record::{Record, scale_code};
use crate::science::pooling::Model;

/// What a person hands in to conclude.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Proposal {
    pub answers: Answers,
    /// Lots left out, each with the reason.
    pub left_out: Vec<(i64, String)>,
    pub months: u32,
}

/// The document under the signature.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Content {
    /// "supernate 0.1.0".
    pub program: String,
    pub rules: String,
    pub presentation: String,
    pub condition: String,
    pub specification: String,
    pub alpha_percent: i64,
    pub lots: Vec<Lot>,
    pub left_out: Vec<LeftOutLot>,
    pub answers: Answers,
    /// What the data suggested to the questions when they were answered.
    pub suggested: Vec<String>,
    pub tests: Vec<Test>,
    pub covered_months: String,
    pub node: String,
    pub cap_months: String,
    pub steps: Vec<String>,
    pub most_months: u64,
    /// The test and lot that bind, or the cap.
    pub binds: String,
    pub proposed_months: u32,
}

#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Lot {
    pub id: i64,
    pub number: String,
    pub formulation: String,
}

#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct LeftOutLot {
    pub id: i64,
    pub number: String,
    pub why: String,
}

/// One test as it was computed.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Test {
    pub test: String,
    pub component: String,
    pub title: String,
    pub limits: String,
    pub scale: String,
    pub model: String,
    pub status: String,
    /// Exact to ten digits; none where there is no age to name.
    pub months: Option<String>,
    pub lot: Option<String>,
    pub inputs: Vec<Input>,
}

/// One result that went in.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Input {
    pub result: i64,
    pub version: i64,
    pub lot: String,
    pub age_months: String,
    pub qualifier: String,
    pub value: String,
}

impl Content {
    /// The text that is signed.
    pub fn canonical(&self) -> String {
        serde_json::to_string(self).unwrap_or_default()
    }

    /// The digest of what went in: results and limits, test by test.
    pub fn inputs_digest(&self) -> String {
        let inputs: Vec<(&str, &str, &str, &[Input])> = self
            .tests
            .iter()
            .map(|test| {
                (test.test.as_str(), test.component.as_str(), test.limits.as_str(), test.inputs.as_slice())
            })
            .collect();
        sha256_hex(serde_json::to_string(&inputs).unwrap_or_default().as_bytes())
    }

    /// What is different now, in sentences; empty where inputs and numbers are as they were signed.
    pub fn differences(&self, now: &Content) -> Vec<String> {
        let mut found = Vec::new();
        for was in &self.tests {
            let same = |one: &&Test| one.test == was.test && one.component == was.component;
            let Some(is) = now.tests.iter().find(same) else {
                found.push(format!("{}: no longer there", was.title));
                continue;
            };
            if was.limits != is.limits {
                found.push(format!("{}: limits were {}, are {}", was.title, was.limits, is.limits));
            }
            found.extend(input_differences(was, is));
            if was.inputs == is.inputs && (&was.months, &was.status) != (&is.months, &is.status) {
                found.push(format!("{}: the same inputs give another number with this program", was.title));
            }
        }
        found
    }
}

fn input_differences(was: &Test, is: &Test) -> Vec<String> {
    let missing = was.inputs.iter().filter(|one| !is.inputs.contains(one)).count();
    let further = is.inputs.iter().filter(|one| !was.inputs.contains(one)).count();
    let mut found = Vec::new();
    if missing > 0 {
        found.push(format!("{}: {missing} of the results stand no longer as they were signed", was.title));
    }
    if further > 0 {
        found.push(format!("{}: {further} results have come since", was.title));
    }
    found
}

/// A computed test as the document keeps it.
pub fn test_of(one: &Computed) -> Test {
    let series = &one.built.series;
    let found = one.found.as_ref().ok();
    let life = found.map(|found| &found.life);
    let months = life.and_then(|life| life.outcome.months());
    Test {
        test: one.test.clone(),
        component: one.component.clone(),
        title: one.title.clone(),
        limits: super::specification::range_words(series.lower_limit, series.upper_limit),
        scale: scale_code(series.scale).to_string(),
        model: found.and_then(|found| found.pooling.as_ref()).map(|one| model(one.model)).unwrap_or_default(),
        status: life.map_or("not_estimable", |life| life.outcome.code()).to_string(),
        months: months.map(|months| format!("{months:.10}")),
        lot: found.and_then(|found| Some(found.series.lots.get(found.life.binding_lot?)?.name.clone())),
        inputs: one.built.records().map(input).collect(),
    }
}

fn input(record: &Record) -> Input {
    let (result, version) = record.result.unwrap_or_default();
    Input {
        result,
        version,
        lot: record.lot_number.clone(),
        age_months: record.point.age_months.round_dp(10).normalize().to_string(),
        qualifier: record.point.qualifier.clone(),
        value: record.point.value.map(|value| value.to_string()).unwrap_or_default(),
    }
}

fn model(model: Model) -> String {
    match model {
        Model::SeparateLines => "separate",
        Model::CommonSlope => "common_slope",
        Model::CommonLine => "common_line",
    }
    .to_string()
}
