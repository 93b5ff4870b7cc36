//! All series of a group computed: which test binds, and what cannot be evaluated.

use super::assess::{Assessment, assess_life};
use super::record::{self, Built, Group, Record, SeriesChoice};
use super::{Choices, Replicates};
use crate::domain::specification::{LimitSet, SpecificationContent};

/// One test or component of a group.
#[derive(Clone, Debug)]
pub struct Computed {
    pub test: String,
    pub component: String,
    /// "Assay", "Degradation products, a".
    pub title: String,
    pub kind: String,
    pub built: Built,
    /// The computed series, or the sentence that says what stands in the way.
    pub found: Result<Assessment, String>,
    /// Reported in words or grades: no line is ever drawn through it.
    pub is_in_words: bool,
}

/// Choices that differ from the usual ones, for one test and component.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Wishes {
    pub replicates: Replicates,
    /// A scale code; none: the usual one of the kind.
    pub scale: Option<String>,
    pub formulation_version: Option<i64>,
    pub without: Vec<(i64, String)>,
    pub alpha: f64,
}

/// The limits that a group is evaluated by.
pub fn limit_set(group: &Group) -> LimitSet {
    if group.limits_do == "in-use limits" { LimitSet::InUse } else { LimitSet::ShelfLife }
}

/// Computes one series of a group.
pub fn compute(
    group: &Group,
    (test, component): (&str, &str),
    records: &[Record],
    limits: &SpecificationContent,
    wishes: &Wishes,
) -> Computed {
    let own = records.iter().filter(|one| one.point.test == test);
    let kind = own.clone().map(|one| one.kind.clone()).next().unwrap_or_default();
    let scale = wishes.scale.as_deref().and_then(record::scale_of);
    let choice = SeriesChoice {
        replicates: wishes.replicates,
        scale: scale.unwrap_or_else(|| record::usual_scale(&kind)),
        formulation_version: wishes.formulation_version,
        without: wishes.without.clone(),
    };
    let range = limits.range_of(test, component, limit_set(group));
    let built = record::build(group, (test, component), records, range, &choice);
    let choices = Choices { replicates: wishes.replicates, alpha: wishes.alpha, ..Choices::default() };
    let found = assess_life(&built.series, &choices).map_err(|complaints| {
        let sentences: Vec<String> = complaints.into_iter().map(|one| one.sentence).collect();
        format!("{}: choose another scale", sentences.first().cloned().unwrap_or_default())
    });
    let is_in_words = built.series.lots.is_empty()
        && own.clone().any(|one| one.result.is_some())
        && own.filter(|one| one.result.is_some()).all(|one| one.point.qualifier == "words");
    Computed {
        test: test.to_string(),
        component: component.to_string(),
        title: built.series.test.clone(),
        kind,
        built,
        found,
        is_in_words,
    }
}

/// Computes every series of a group by the usual choices.
pub fn compute_all(
    group: &Group,
    records: &[Record],
    limits: &SpecificationContent,
    wishes: &Wishes,
) -> Vec<Computed> {
    let series = record::series_of(records);
    series
        .iter()
        .map(|(test, component)| compute(group, (test, component), records, limits, wishes))
        .collect()
}

/// The computed test whose shelf life is the shortest; none where nothing crosses.
pub fn binding(computed: &[Computed]) -> Option<&Computed> {
    let months = |one: &&Computed| one.found.as_ref().ok().and_then(|found| found.life.outcome.months());
    computed
        .iter()
        .filter(|one| months(one).is_some())
        .min_by(|one, other| months(one).unwrap_or(0.0).total_cmp(&months(other).unwrap_or(0.0)))
}
