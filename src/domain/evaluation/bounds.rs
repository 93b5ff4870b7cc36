//! Results known only as "less than" or "more than": what they allow, and what can still be said.

use rust_decimal::prelude::ToPrimitive;

use super::series::{Measured, Series};
use super::table::Qualifier;
use crate::science::transform::Scale;
use crate::science::{censored, quantitation};

/// How many results are known only as bounds.
pub(super) struct Bounds {
    below: usize,
    above: usize,
    all: usize,
}

impl Bounds {
    pub(super) fn of(series: &Series) -> Self {
        let results = || series.lots.iter().flat_map(|lot| &lot.pulls).flat_map(|pull| &pull.results);
        let count = |wanted: Qualifier| results().filter(|result| result.qualifier == wanted).count();
        Self { below: count(Qualifier::Below), above: count(Qualifier::Above), all: results().count() }
    }

    pub(super) fn any(&self) -> bool {
        self.below + self.above > 0
    }

    /// Values above a bound, or more than 15 % below one, allow no least-squares line.
    pub(super) fn forbid_a_line(&self) -> bool {
        self.above > 0 || self.below * 100 > 15 * self.all
    }

    pub(super) fn note(&self, series: &Series, notes: &mut Vec<String>) {
        if !self.any() {
            return;
        }
        let share = format!("{} of {} results are known only as bounds", self.below + self.above, self.all);
        if !self.forbid_a_line() {
            notes.push(format!("{share}: half the bound stands in for each, at most 15 % of the results"));
            notes.extend(sensitivity(series));
            return;
        }
        notes.push(format!("{share}: no least-squares line, so no shelf life"));
        notes.extend(likelihood(series));
        notes.extend(outside_by_bound(series));
    }
}

/// What 0, half and whole bounds would make of the slope.
fn sensitivity(series: &Series) -> Option<String> {
    if series.scale != Scale::None {
        return None;
    }
    let results: Vec<quantitation::Quantified> = each(series, |age, value, qualifier| match qualifier {
        Qualifier::Below => quantitation::Quantified::Below(age, value),
        _ => quantitation::Quantified::Measured(age, value),
    });
    let [zero, half, whole] = quantitation::sensitivity(&results).ok()?;
    Some(format!(
        "slope of all lots with 0, half and the whole bound: {:.4e}, {:.4e}, {:.4e} per month",
        zero.slope, half.slope, whole.slope
    ))
}

fn each<T>(series: &Series, f: impl Fn(f64, f64, Qualifier) -> T) -> Vec<T> {
    let mut all = Vec::new();
    for pull in series.lots.iter().flat_map(|lot| &lot.pulls) {
        for result in &pull.results {
            all.push(f(pull.age_months, result.value.to_f64().unwrap_or(0.0), result.qualifier));
        }
    }
    all
}

/// The line of all lots by maximum likelihood, for information.
fn likelihood(series: &Series) -> Option<String> {
    let mut rows = Vec::new();
    let mut values = Vec::new();
    for (age, value, qualifier) in each(series, |age, value, qualifier| (age, value, qualifier)) {
        let z = series.scale.forward(value).ok()?;
        rows.extend([1.0, age]);
        values.push(match qualifier {
            Qualifier::Exact => censored::Observed::Exactly(z),
            Qualifier::Below => censored::Observed::Below(z),
            Qualifier::Above => censored::Observed::Above(z),
        });
    }
    match censored::fit(&rows, 2, &values, censored::Errors::Normal) {
        Ok(fit) => Some(format!(
            "one line for all results by maximum likelihood: {:.5} + {:.5} per month on the analysis scale \
             (standard errors {:.5}, {:.5})",
            fit.coefficients[0], fit.coefficients[1], fit.standard_errors[0], fit.standard_errors[1]
        )),
        Err(_) => Some("too few exact values for a line: only the bounds can be stated".into()),
    }
}

/// A bound that already lies outside a limit is a failure at that age, whatever a line would say.
fn outside_by_bound(series: &Series) -> Option<String> {
    let outside = |result: &Measured| match result.qualifier {
        Qualifier::Above => series.upper_limit.is_some_and(|limit| result.value >= limit),
        Qualifier::Below => series.lower_limit.is_some_and(|limit| result.value <= limit),
        Qualifier::Exact => false,
    };
    let pulls = series.lots.iter().flat_map(|lot| &lot.pulls);
    let ages = pulls.filter(|pull| pull.results.iter().any(outside)).map(|pull| pull.age_months);
    ages.min_by(f64::total_cmp).map(|age| format!("outside its limit by a bound from {age:.2} months on"))
}
