//! What the pages of evaluation are loaded from, and what was asked of them.

use super::super::setting;
use super::super::visit::Visit;
use crate::domain::evaluation::Replicates;
use crate::domain::evaluation::group::Wishes;
use crate::domain::evaluation::record::{Group, Record, scale_of};
use crate::domain::failure::Failure;
use crate::domain::setting::POOLING_PERCENT;
use crate::domain::specification::SpecificationContent;
use crate::store;

/// A group with its records and the specification that holds for it.
pub struct Loaded {
    pub group: Group,
    pub records: Vec<Record>,
    pub limits: SpecificationContent,
    /// "SP-104 version 2"; says so where studies are bound to others.
    pub specification: String,
    pub other_specifications: Vec<String>,
    /// More lots are on study than take part.
    pub lots_on_study: i64,
}

/// The group of an arm with everything its evaluation rests on.
pub fn group_of(visit: &Visit, arm: i64) -> Result<Loaded, Failure> {
    let (group, records, bindings, lots_on_study) = visit.read(|reader| {
        let group = store::evaluation::group_of_arm(reader, arm)?;
        let records = store::evaluation::records(reader, &group.key)?;
        let bindings = store::evaluation::specifications(reader, group.key.presentation)?;
        let lots_on_study = store::evaluation::lots_on_study(reader, group.key.presentation)?;
        Ok((group, records, bindings, lots_on_study))
    })?;
    let (limits, specification, other_specifications) = newest(bindings);
    Ok(Loaded { group, records, limits, specification, other_specifications, lots_on_study })
}

/// The newest specification that binds a study, its words, and the words of the others.
pub fn newest(bindings: Vec<store::evaluation::Binding>) -> (SpecificationContent, String, Vec<String>) {
    let mut words: Vec<String> = bindings.iter().map(|one| one.words.clone()).collect();
    let content = bindings.first().and_then(|one| serde_json::from_str(&one.content).ok());
    let first = if words.is_empty() { "no specification".to_string() } else { words.remove(0) };
    (content.unwrap_or_default(), first, words)
}

/// The level for pooling that the site has set, in percent.
pub fn alpha_percent(visit: &Visit) -> Result<i64, Failure> {
    setting::value(visit, POOLING_PERCENT)
}

/// What the page was asked for beside the usual choices; unknown words are refused.
pub fn wishes(visit: &Visit) -> Result<Wishes, Failure> {
    let asked = |name: &str| visit.query.get(name).filter(|text| !text.is_empty());
    let replicates = match asked("replicates") {
        None | Some("mean") => Replicates::Mean,
        Some("independent") => Replicates::Independent,
        Some(other) => return Err(unknown("replicates", other, "mean or independent")),
    };
    let scale = asked("scale").map(str::to_string);
    if let Some(other) = scale.as_deref().filter(|code| scale_of(code).is_none()) {
        return Err(unknown("scale", other, "none, ln, anscombe or logit"));
    }
    let formulation_version = match asked("version").map(str::parse) {
        None => None,
        Some(Ok(id)) => Some(id),
        Some(Err(_)) => return Err(unknown("version", "this", "the number of a formulation version")),
    };
    let alpha = alpha_percent(visit)? as f64 / 100.0;
    Ok(Wishes { replicates, scale, formulation_version, without: Vec::new(), alpha })
}

fn unknown(name: &str, other: &str, known: &str) -> Failure {
    Failure::BadRequest(format!("“{other}” is not a choice for {name}: it is {known}."))
}
