//! Multi-component results: named and unspecified components, reporting threshold, computed total.

use rust_decimal::Decimal;
use serde_json::json;

use super::limit::{Known, Yardstick, component_title};
use super::value::{self, Gathered, Single, Subject};
use super::{Judged, ReadingValue, ResultQualifier, Verdict, gather};
use crate::domain::method::{Component, MethodContent, Rounding};
use crate::domain::rounding::{rounded, to_decimals};
use crate::domain::specification::{Limit, Range};

/// One entry per component read or limited, then the total.
pub(super) fn judge(
    yardstick: &Yardstick<'_>,
    components: &[Component],
    has_total: bool,
    readings: &[ReadingValue],
) -> Vec<Judged> {
    let mut judged: Vec<Judged> = Vec::new();
    let mut counted: Vec<Decimal> = Vec::new();
    let mut first_counted: Vec<Decimal> = Vec::new();
    for component in components {
        for code in codes(component, readings) {
            let gathered = gather::read_field(yardstick.method, readings, &code);
            let subject =
                Subject { title: component_title(&code, Some(yardstick.method)), component: code.clone() };
            let one = value::judge(yardstick, &subject, range(yardstick, &code), gathered.clone());
            let one = under_threshold(one, component, yardstick.method.rounding);
            counted.extend(counts(&one));
            first_counted.extend(first_counts(&gathered, component, yardstick.method.rounding, &one));
            judged.push(one);
        }
    }
    if has_total {
        judged.push(total(yardstick, components, &judged, &counted, &first_counted));
    }
    judged
}

/// A named component is always there; unspecified ones as they were read, in the order of their times.
fn codes(component: &Component, readings: &[ReadingValue]) -> Vec<String> {
    if !component.is_unspecified {
        return vec![component.code.clone()];
    }
    let mut found: Vec<String> = readings
        .iter()
        .filter(|reading| reading.field.starts_with("unspecified@"))
        .map(|reading| reading.field.clone())
        .collect();
    let time =
        |code: &String| code.strip_prefix("unspecified@").and_then(|time| time.parse::<Decimal>().ok());
    found.sort_by_key(|code| (time(code), code.clone()));
    found.dedup();
    found
}

/// The limit of a component; one named by its time has the limit of `unspecified`.
fn range(yardstick: &Yardstick<'_>, code: &str) -> Option<Range> {
    let Some(Limit::Components(limits)) = yardstick.limit else { return None };
    let find =
        |wanted: &str| limits.iter().find(|(known, _)| known == wanted).map(|(_, range)| range.clone());
    find(code).or_else(|| find(code.split('@').next().unwrap_or(code)))
}

/// Below its reporting threshold, rounded to the threshold's decimals, a component is reported as
/// `<threshold`. The value found stays in the record.
fn under_threshold(judged: Judged, component: &Component, rounding: Rounding) -> Judged {
    let (Some(threshold), Some(value)) = (component.reporting_threshold, judged.value) else { return judged };
    let is_under = match judged.qualifier {
        ResultQualifier::Equal => !is_reported(value, threshold, rounding),
        ResultQualifier::Below => value <= threshold,
        _ => false,
    };
    if !is_under {
        return judged;
    }
    Judged {
        shown: format!("<{threshold}"),
        qualifier: ResultQualifier::Below,
        value: Some(threshold),
        ..judged
    }
}

fn is_reported(value: Decimal, threshold: Decimal, rounding: Rounding) -> bool {
    to_decimals(value, threshold.scale(), rounding.halves) >= threshold
}

fn counts(judged: &Judged) -> Option<Decimal> {
    judged.value.filter(|_| judged.qualifier == ResultQualifier::Equal)
}

/// What the component would have counted with its first recorded values.
fn first_counts(
    gathered: &Gathered,
    component: &Component,
    rounding: Rounding,
    now: &Judged,
) -> Option<Decimal> {
    let [single] = gathered.singles.as_slice() else { return counts(now) };
    match single.first {
        Some(Known::Exactly(first)) => {
            let threshold = component.reporting_threshold.unwrap_or(Decimal::ZERO);
            Some(first).filter(|first| is_reported(*first, threshold, rounding))
        }
        Some(_) => None,
        None => counts(now),
    }
}

/// The sum of the reported, unrounded components. Where none is reported it is below the largest threshold.
fn total(
    yardstick: &Yardstick<'_>,
    components: &[Component],
    judged: &[Judged],
    counted: &[Decimal],
    first_counted: &[Decimal],
) -> Judged {
    let subject = Subject { component: "total".to_string(), title: "Total".to_string() };
    let range = range(yardstick, "total");
    let is_incomplete =
        judged.iter().any(|one| one.verdict == Verdict::NoReportableValue && one.value.is_none());
    let sum =
        |values: &[Decimal]| values.iter().try_fold(Decimal::ZERO, |sum, value| sum.checked_add(*value));
    let threshold = components.iter().filter_map(|component| component.reporting_threshold).max();
    let known = match (is_incomplete, counted.is_empty(), threshold) {
        (true, _, _) => None,
        (false, true, Some(threshold)) => Some(Known::Below(threshold)),
        (false, _, _) => sum(counted).map(Known::Exactly),
    };
    let first = sum(first_counted).filter(|_| first_counted != counted).map(Known::Exactly);
    let singles = known.map(|known| Single { label: "sum".to_string(), container: None, known, first });
    let gathered = Gathered { singles: singles.into_iter().collect(), ..Gathered::default() };
    let method = MethodContent {
        reportable: crate::domain::method::Reportable::EachContainer,
        ..yardstick.method.clone()
    };
    let own = Yardstick { method: &method, ..*yardstick };
    let mut total = value::judge(&own, &subject, range, gathered);
    let parts: Vec<_> = judged
        .iter()
        .map(|one| json!({ "of": one.component, "value": one.shown, "counts": counts(one).is_some() }))
        .collect();
    total.detail["rule"] = json!("sum of the reported components, unrounded");
    total.detail["values"] = json!(parts);
    if let Some(value) = counts(&total) {
        total.shown = rounded(value, yardstick.method.rounding).to_string();
    }
    total
}
