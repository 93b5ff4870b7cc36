//! The first trend signal of a completed test.

use rust_decimal::Decimal;

use crate::domain::failure::Failure;
use crate::domain::judgement::{Judged, NewFlag, ResultQualifier};
use crate::domain::method::RoundTo;
use crate::domain::trend;
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::Change;

/// The signal of one result from the lot's own earlier points on the same arm. A sample without a pull, words and
/// censored values have none.
pub(in crate::acts) fn first_signal(
    change: &Change<'_>,
    sample: &BenchSample,
    test: &BenchTest,
    judged: &Judged,
) -> Result<Option<NewFlag>, Failure> {
    let (Some(pull), Some(value)) = (&sample.pull, judged.value) else { return Ok(None) };
    if judged.qualifier != ResultQualifier::Equal {
        return Ok(None);
    }
    let Some(age) = store::result::age_months(change, pull.id)? else { return Ok(None) };
    let earlier: Vec<(Decimal, Decimal)> =
        store::result::earlier(change, pull.study_arm, &test.test, pull.id)?
            .into_iter()
            .filter(|one| one.component == judged.component)
            .map(|one| (one.age_months, one.value))
            .collect();
    let decimals = match test.content.rounding.to {
        RoundTo::Decimals(decimals) => decimals,
        RoundTo::Nearest(_) => 0,
        RoundTo::SignificantFigures(_) => test.content.reading_decimals,
    };
    Ok(trend::first_signal(&earlier, age, value, decimals).flag)
}
