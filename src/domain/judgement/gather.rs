//! From readings to single values: as read, or computed from several fields of one replicate.

use rust_decimal::Decimal;
use serde_json::json;

use super::limit::Known;
use super::value::{Gathered, Single};
use super::{FlagLevel, NewFlag, Qualifier, ReadingValue, flag_kind};
use crate::domain::formula::Expression;
use crate::domain::method::{Level, MethodContent, Settings};

/// Above this sedimentation ratio a result is marked (decision A14).
const MARKED_RATIO: Decimal = Decimal::from_parts(110, 0, 0, false, 2);

/// The readings of one replicate of one container.
struct Group<'a> {
    label: String,
    container: Option<i64>,
    readings: Vec<&'a ReadingValue>,
}

/// The single values of a test without components.
pub(super) fn singles(method: &MethodContent, readings: &[ReadingValue]) -> Gathered {
    match &method.settings {
        Settings::Redispersibility { .. } => {
            Gathered { is_worst_highest: true, ..read_field(method, readings, "inversions") }
        }
        Settings::AsStoredSediment => computed(method, readings, &SEDIMENT_FIELDS, &sediment_ratio),
        Settings::Sedimentation { report_at_minute, .. } => {
            sedimentation(method, readings, *report_at_minute)
        }
        Settings::Numeric { formula: Some(formula), inputs, .. } => {
            let codes: Vec<&str> = inputs.iter().map(|input| input.code.as_str()).collect();
            match Expression::parse(&formula.expression, &codes) {
                Ok(expression) => computed(method, readings, &codes, &|value| {
                    expression.evaluate(&|code| value(code)).map_err(|fault| fault.to_string())
                }),
                Err(fault) => Gathered {
                    not_read: vec![("The formula".to_string(), fault.to_string())],
                    ..Gathered::default()
                },
            }
        }
        _ => read_field(method, readings, "value"),
    }
}

/// The single values of one field, as read.
pub(super) fn read_field(method: &MethodContent, readings: &[ReadingValue], field: &str) -> Gathered {
    let mut gathered = Gathered::default();
    let own: Vec<&ReadingValue> = readings.iter().filter(|reading| reading.field == field).collect();
    for group in groups(method, own) {
        for reading in group.readings {
            match known(reading) {
                Some(known) => gathered.singles.push(Single {
                    label: group.label.clone(),
                    container: group.container,
                    known,
                    first: first_known(reading),
                }),
                None => gathered.not_read.push((group.label.clone(), reading.typed.clone())),
            }
        }
    }
    gathered
}

fn known(reading: &ReadingValue) -> Option<Known> {
    match reading.qualifier {
        Qualifier::Equal => reading.value.map(Known::Exactly),
        Qualifier::Above => reading.value.map(Known::Above),
        Qualifier::Below => reading.value.map(Known::Below),
        Qualifier::Words | Qualifier::NotRead => None,
    }
}

/// The first recorded value; its text tells whether it was a bound.
fn first_known(reading: &ReadingValue) -> Option<Known> {
    let (typed, value) = reading.first_typed.as_ref()?;
    let value = (*value)?;
    match typed.trim_start().chars().next() {
        Some('>') => Some(Known::Above(value)),
        Some('<') => Some(Known::Below(value)),
        _ => Some(Known::Exactly(value)),
    }
}

/// Groups by container and replicate, in the order read.
fn groups<'a>(method: &MethodContent, readings: Vec<&'a ReadingValue>) -> Vec<Group<'a>> {
    let mut keys: Vec<(Option<i64>, u32)> = Vec::new();
    for reading in &readings {
        let key = (reading.container, reading.replicate);
        if !keys.contains(&key) {
            keys.push(key);
        }
    }
    let group = |key: &(Option<i64>, u32)| {
        let is_own = |reading: &&&ReadingValue| (reading.container, reading.replicate) == *key;
        let own: Vec<&ReadingValue> = readings.iter().filter(is_own).copied().collect();
        let is_lone = keys.iter().filter(|(container, _)| *container == key.0).count() == 1;
        let container = own.first().map(|reading| reading.container_label.clone()).unwrap_or_default();
        Group { label: label(method, container, key.1, is_lone), container: key.0, readings: own }
    };
    keys.iter().map(group).collect()
}

/// `bottle 07`, `bottle 07, reading 2`, `reading 2`.
fn label(method: &MethodContent, container: String, replicate: u32, is_lone: bool) -> String {
    let thing = match (&method.settings, method.level) {
        (Settings::Sedimentation { .. }, _) => "cylinder",
        (_, Level::Preparation) => "preparation",
        _ => "reading",
    };
    match (container.is_empty(), is_lone) {
        (true, _) => format!("{thing} {replicate}"),
        (false, true) => container,
        (false, false) => format!("{container}, {thing} {replicate}"),
    }
}

type Look<'a> = &'a dyn Fn(&str) -> Option<Decimal>;

/// One value per replicate, computed from its fields; also from the first recorded values.
fn computed(
    method: &MethodContent,
    readings: &[ReadingValue],
    fields: &[&str],
    compute: &dyn Fn(Look<'_>) -> Result<Decimal, String>,
) -> Gathered {
    let mut gathered = Gathered::default();
    let own = readings.iter().filter(|reading| fields.contains(&reading.field.as_str())).collect();
    for group in groups(method, own) {
        let of = |field: &str| group.readings.iter().find(|reading| reading.field == field);
        let missing = fields.iter().find_map(|field| match of(field) {
            None => Some(format!("{} was not read", field_words(field))),
            Some(reading) if reading.value.is_none() => Some(reading.typed.clone()),
            Some(_) => None,
        });
        if let Some(why) = missing {
            gathered.not_read.push((group.label, why));
            continue;
        }
        let now = compute(&|field| of(field).and_then(|reading| reading.value));
        let was_corrected = group.readings.iter().any(|reading| reading.first_typed.is_some());
        let first = |field: &str| {
            let reading = of(field)?;
            reading.first_typed.as_ref().map_or(reading.value, |(_, value)| *value)
        };
        match now {
            Ok(value) => gathered.singles.push(Single {
                label: group.label,
                container: group.container,
                known: Known::Exactly(value),
                first: was_corrected.then(|| compute(&first).ok()).flatten().map(Known::Exactly),
            }),
            Err(why) => gathered.not_read.push((group.label, why)),
        }
    }
    gathered
}

fn field_words(field: &str) -> String {
    match field {
        "base_mm" => "the base".to_string(),
        "bed_top_mm" => "the top of the bed".to_string(),
        "fill_line_mm" => "the fill line".to_string(),
        "total_ml" => "the total volume".to_string(),
        _ => match field.strip_prefix("sediment_ml@") {
            Some(minute) => format!("the sediment at {minute} min"),
            None => field.to_string(),
        },
    }
}

const SEDIMENT_FIELDS: [&str; 3] = ["base_mm", "bed_top_mm", "fill_line_mm"];

/// (bed top − base) / (fill line − base), the part of the fill that is sediment.
fn sediment_ratio(value: Look<'_>) -> Result<Decimal, String> {
    let (Some(base), Some(top), Some(fill)) = (value("base_mm"), value("bed_top_mm"), value("fill_line_mm"))
    else {
        return Err("a height was not read".to_string());
    };
    if fill <= base || top < base {
        return Err("the heights do not go up from base to bed top and fill line".to_string());
    }
    quotient(top - base, fill - base)
}

fn quotient(over: Decimal, under: Decimal) -> Result<Decimal, String> {
    over.checked_div(under).map(|value| value.normalize()).ok_or("the volume is 0".to_string())
}

/// F = sediment volume at the reporting minute / total volume, per cylinder.
fn sedimentation(method: &MethodContent, readings: &[ReadingValue], minute: u32) -> Gathered {
    let sediment = format!("sediment_ml@{minute}");
    let fields = ["total_ml", sediment.as_str()];
    let mut gathered = computed(method, readings, &fields, &|value| {
        let (Some(total), Some(bed)) = (value("total_ml"), value(&sediment)) else {
            return Err("a volume was not read".to_string());
        };
        quotient(bed, total)
    });
    let high = gathered.singles.iter().filter(|single| single.known.number() > MARKED_RATIO);
    gathered.flags = high
        .map(|single| {
            let ratio = single.known.shown(|value| value.round_dp(4));
            NewFlag {
                kind: flag_kind::HIGH_RATIO,
                level: FlagLevel::Mark,
                sentence: format!("{}: sedimentation ratio {ratio}, above {MARKED_RATIO}.", single.label),
                numbers: json!({ "ratio": ratio, "at_most": MARKED_RATIO.to_string() }),
            }
        })
        .collect();
    gathered
}
