//! Loads what the page of one sample shows, in one snapshot.

use crate::domain::digest::sha256_hex;
use crate::domain::protocol::LimitsDo;
use crate::domain::review::checked::CheckedFacts;
use crate::domain::series::SeriesPoint;
use crate::domain::specification::{LimitSet, SpecificationContent};
use crate::domain::subject::{Kind, Subject};
use crate::report::chart::Chart;
use crate::report::chart::from_series::{About, charts};
use crate::report::cylinder::{Cylinder, of_points};
use crate::store;
use crate::store::review::decision::AnswerLine;
use crate::store::review::facts::{Head, ReviewSample};
use crate::store::review::page::{CheckLine, ReadingLine, ResultLine};
use crate::store::signature::Signature;
use crate::store::trail::Recent;
use crate::store::trend::verdict::Verdict;
use crate::store::{Answer, Reader};
use crate::web::suggestion::Suggestions;
use crate::web::trend::bands;

/// Everything about one sample.
pub struct Loaded {
    pub sample: ReviewSample,
    pub digest: String,
    pub results: Vec<ResultLine>,
    pub readings: Vec<ReadingLine>,
    pub checks: Vec<CheckLine>,
    pub answers: Vec<AnswerLine>,
    /// With the digest of the content as it was at the act of each.
    pub signatures: Vec<(Signature, String)>,
    pub checked: CheckedFacts,
    pub specification: Option<SpecificationContent>,
    pub set: Option<LimitSet>,
    pub points: Vec<SeriesPoint>,
    pub clarities: Vec<(i64, u8)>,
    pub investigations: Vec<(i64, i64)>,
    pub verdicts: Vec<Verdict>,
    /// Of the sample's lot, where it has results on a study.
    pub suggestions: Option<Suggestions>,
    pub trail: Recent,
}

pub fn load(reader: &Reader<'_>, id: i64) -> Answer<Loaded> {
    let sample = store::review::sample(reader, id)?;
    let key = store::series::key_of_sample(reader, id)?;
    let (points, clarities) = match &key {
        Some(key) => (store::series::of_key(reader, key)?, store::series::clarities(reader, key)?),
        None => Default::default(),
    };
    Ok(Loaded {
        digest: store::review::digest(reader, id)?,
        results: store::review::page::results(reader, id)?,
        readings: store::review::page::readings(reader, id)?,
        checks: store::review::page::checks(reader, id)?,
        answers: store::review::decision::answers(reader, id)?,
        signatures: signatures(reader, id)?,
        checked: store::review::checked::facts(reader, &sample)?,
        specification: specification(reader, &sample.head)?,
        set: limit_set(&sample.head),
        points,
        clarities,
        suggestions: match sample.head.pull {
            Some(_) => Suggestions::of(reader, sample.head.lot)?,
            None => None,
        },
        verdicts: store::trend::verdict::of_sample(reader, id)?,
        investigations: store::review::page::investigations(reader, id)?,
        trail: store::trail::of_subject(reader, Subject::new(Kind::Sample, id))?,
        sample,
    })
}

fn signatures(reader: &Reader<'_>, id: i64) -> Answer<Vec<(Signature, String)>> {
    let found = store::signature::of(reader, Kind::Sample, id)?;
    let mut kept = Vec::new();
    for signature in found {
        let text = store::review::canonical(reader, id, Some(signature.act))?;
        kept.push((signature, sha256_hex(text.as_bytes())));
    }
    Ok(kept)
}

fn specification(reader: &Reader<'_>, head: &Head) -> Answer<Option<SpecificationContent>> {
    let Some(version) = head.specification_version else { return Ok(None) };
    let content = store::review::page::specification(reader, version)?;
    Ok(content.and_then(|text| serde_json::from_str(&text).ok()))
}

/// The limit set the sample is judged by; an in-use arm has its own.
pub fn limit_set(head: &Head) -> Option<LimitSet> {
    let is_in_use = head.limits_do.as_deref().and_then(LimitsDo::from_words) == Some(LimitsDo::InUse);
    match head.limit_set.as_str() {
        _ if is_in_use => Some(LimitSet::InUse),
        "release" => Some(LimitSet::Release),
        "shelf-life" => Some(LimitSet::ShelfLife),
        _ => None,
    }
}

impl Loaded {
    /// The charts of all tests with numbers, this sample's points marked.
    pub fn charts(&self, id_prefix: &str, is_small: bool) -> Vec<(String, Chart)> {
        let bands = bands(&self.verdicts);
        let about = About {
            forecasts: &bands,
            lot: &self.sample.head.lot_number,
            condition: &self.sample.head.condition,
            specification: self.specification.as_ref(),
            set: self.set,
            life_months: None,
            asked: Some(self.sample.head.sample),
            id_prefix,
            has_fit: true,
            is_small,
        };
        let mut found = Vec::new();
        let mut tests: Vec<&str> = self.points.iter().map(|point| point.test.as_str()).collect();
        tests.dedup();
        for test in tests {
            let own: Vec<SeriesPoint> =
                self.points.iter().filter(|point| point.test == test).cloned().collect();
            found.extend(charts(&own, &about).into_iter().map(|chart| (test.to_string(), chart)));
        }
        found
    }

    /// The product drawn at each age: sediment, clarity, inversions.
    pub fn cylinders(&self) -> Vec<Cylinder> {
        of_points(&self.points, &self.clarities, false)
    }
}
