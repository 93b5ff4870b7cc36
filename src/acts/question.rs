//! The questions a value draws while it can still be re-read.

use rust_decimal::Decimal;

use crate::domain::failure::Failure;
use crate::domain::hint::{
    Hint, HintFacts, OUTSIDE_WINDOW, RatioFacts, expected, hints, may_be_identical, ratio_hints,
};
use crate::domain::method::{Reportable, Settings};
use crate::domain::reading::{Entry, Question, Reading, Said, in_slot, standing};
use crate::domain::result::{minute_of, outside_window};
use crate::domain::slot::SlotKey;
use crate::domain::specification::{Limit, LimitSet, Range};
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::Change;

/// The questions to be stored with a value. `readings` are those of the test, with what this act recorded.
pub(in crate::acts) fn of(
    change: &Change<'_>,
    sample: &BenchSample,
    test: &BenchTest,
    readings: &[Reading],
    entry: &Entry,
) -> Result<Vec<Question>, Failure> {
    let Said::Number(number) = &entry.said else { return Ok(Vec::new()) };
    let field = entry.slot.key.field.as_str();
    let mut facts = HintFacts {
        unit: entry.slot.unit.clone(),
        value: number.value,
        typed_decimals: number.decimals,
        reading_decimals: entry.slot.decimals,
        may_be_identical: may_be_identical(&test.content),
        ..HintFacts::default()
    };
    if field == "value" {
        with_neighbours(change, sample, test, readings, &entry.slot.key, &mut facts)?;
    }
    let mut found = hints(&facts);
    if let Settings::Sedimentation { reads, .. } = &test.content.settings {
        found.extend(ratio(readings, entry, number.value, *reads));
    }
    let outside = outside_window(&test.content.settings, &entry.slot.key, number.value);
    found.extend(outside.map(|words| Hint {
        rule: OUTSIDE_WINDOW,
        sentence: format!("{words}. Mend it and read again, or say that it is right: the reviewer sees it."),
    }));
    let asked =
        found.into_iter().map(|Hint { rule, sentence }| Question { rule: rule.to_string(), sentence });
    Ok(asked.collect())
}

/// The other replicates, the last pulls, the limits.
fn with_neighbours(
    change: &Change<'_>,
    sample: &BenchSample,
    test: &BenchTest,
    readings: &[Reading],
    key: &SlotKey,
    facts: &mut HintFacts,
) -> Result<(), Failure> {
    let others = standing(readings).into_iter().filter(|one| one.key.field == key.field && one.key != *key);
    facts.beside = others.filter(|one| one.qualifier == "=").filter_map(|one| one.value).collect();
    facts.replicates = test.content.replicates;
    facts.repeatability = test.content.repeatability;
    if let Reportable::Mean { range_at_most, .. } = test.content.reportable {
        facts.range_at_most = range_at_most;
    }
    if let Some(pull) = &sample.pull {
        let earlier = store::result::earlier(change, pull.study_arm, &test.test, pull.id)?;
        facts.last_pulls = earlier.iter().rev().map(|one| one.value).take(3).collect();
        if let Some(last) = earlier.last() {
            facts.previous_values =
                store::reading::values_of_pull(change, last.pull, &test.test, &key.field)?;
        }
    }
    facts.expected = expected(facts.last_pulls.first().copied(), range(sample, test).as_ref());
    Ok(())
}

fn range(sample: &BenchSample, test: &BenchTest) -> Option<Range> {
    let set = if sample.limit_set == "release" { LimitSet::Release } else { LimitSet::ShelfLife };
    match sample.limits(&test.test)?.limit(set) {
        Limit::Between { lower, upper } => Some(Range { lower: *lower, upper: *upper }),
        _ => None,
    }
}

/// The checks on F of a cylinder reading (decision A14).
fn ratio(
    readings: &[Reading],
    entry: &Entry,
    sediment_ml: Decimal,
    reads: crate::domain::method::InterfaceRead,
) -> Vec<Hint> {
    let key = &entry.slot.key;
    if !key.field.starts_with("sediment_ml@") {
        return Vec::new();
    }
    let total = in_slot(readings, &SlotKey { field: "total_ml".to_string(), ..key.clone() });
    let Some(total_ml) = total.and_then(|one| one.value) else { return Vec::new() };
    let minute = minute_of(&key.field).unwrap_or_default();
    let earlier = standing(readings)
        .into_iter()
        .filter(|one| one.key.container == key.container && one.key.replicate == key.replicate)
        .filter(|one| one.key.field.starts_with("sediment_ml@"))
        .filter(|one| minute_of(&one.key.field).is_some_and(|at| at < minute))
        .max_by_key(|one| minute_of(&one.key.field));
    let earlier_sediment_ml = earlier.and_then(|one| one.value);
    ratio_hints(&RatioFacts { total_ml, sediment_ml, earlier_sediment_ml, reads })
}
