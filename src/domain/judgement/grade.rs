//! Appearance: does every limited attribute have a grade that conforms?

use serde_json::json;

use super::limit::{Yardstick, limit_words};
use super::{FlagLevel, Judged, NewFlag, Qualifier, ReadingValue, ResultQualifier, Verdict, flag_kind};
use crate::domain::method::{Attribute, Settings, Stage};
use crate::domain::slot::field::REMARKS_AFTER_SHAKE;
use crate::domain::specification::Limit;
use crate::domain::stage::part_words;

/// One attribute as it was graded.
struct Graded {
    /// "Caking", or "Caking, bottle 07" where several containers were graded.
    title: String,
    word: String,
    conforms: bool,
    /// The first recorded grade, if it did not conform and was changed since.
    first_outside: Option<String>,
    allowed: String,
}

/// One entry per part: as stored and after the label shake are judged apart (decision A4). A method of one part
/// has the component "".
pub(super) fn judge(yardstick: &Yardstick<'_>, readings: &[ReadingValue]) -> Vec<Judged> {
    let Settings::Appearance { attributes } = &yardstick.method.settings else { return Vec::new() };
    let stages = yardstick.method.stages();
    let part = |(at, stage): (usize, &Stage)| {
        let of_part: Vec<Attribute> =
            attributes.iter().filter(|one| yardstick.method.stage_of(one) == *stage).cloned().collect();
        let (component, remarks) = match (stages.len(), at) {
            (1, _) => ("", "remarks"),
            (_, 0) => (part_words(*stage), "remarks"),
            _ => (part_words(*stage), REMARKS_AFTER_SHAKE),
        };
        judge_part(yardstick, component, remarks, &of_part, readings)
    };
    stages.iter().enumerate().map(part).collect()
}

fn judge_part(
    yardstick: &Yardstick<'_>,
    component: &str,
    remarks: &str,
    attributes: &[Attribute],
    readings: &[ReadingValue],
) -> Judged {
    let limited: Vec<(String, Vec<String>)> = match yardstick.limit {
        Some(Limit::Grades(limited)) => limited
            .iter()
            .filter(|(code, _)| attributes.iter().any(|attribute| attribute.code == *code))
            .cloned()
            .collect(),
        _ => Vec::new(),
    };
    let limited = limited.as_slice();
    let graded: Vec<Graded> = attributes.iter().flat_map(|one| of(one, limited, readings)).collect();
    let missing: Vec<&Attribute> = attributes.iter().filter(|one| !has_grade(one, readings)).collect();
    let mut flags = Vec::new();
    for bad in graded.iter().filter(|graded| !graded.conforms) {
        let words = format!("{}: {}, not {}", bad.title, bad.word, bad.allowed);
        flags.push(yardstick.beyond_flag(&words, json!({ "grade": bad.word, "limit": bad.allowed })));
    }
    let is_missing_limited = missing.iter().any(|one| limited.iter().any(|(code, _)| *code == one.code));
    if is_missing_limited {
        flags.push(missing_flag(&missing, readings));
    }
    for (title, first, now) in
        graded.iter().filter_map(|graded| Some((&graded.title, graded.first_outside.as_ref()?, &graded.word)))
    {
        let sentence =
            format!("{title}: first recorded {first}, which does not conform; corrected to {now}.");
        flags.push(yardstick.side_flag(flag_kind::FIRST_VALUE_OUTSIDE, sentence));
    }
    let verdict = verdict(yardstick, limited.is_empty(), is_missing_limited, &graded);
    Judged {
        component: component.to_string(),
        value: None,
        qualifier: if graded.is_empty() { ResultQualifier::None } else { ResultQualifier::Words },
        shown: shown(verdict, &graded),
        unit: String::new(),
        verdict,
        detail: detail(yardstick, &graded, &missing, limited, remarks, readings),
        flags,
    }
}

fn verdict(yardstick: &Yardstick<'_>, is_unlimited: bool, is_missing: bool, graded: &[Graded]) -> Verdict {
    if graded.is_empty() {
        return Verdict::NoReportableValue;
    }
    if is_unlimited {
        return Verdict::NoLimit;
    }
    if graded.iter().any(|one| !one.conforms) {
        return yardstick.beyond().0;
    }
    if is_missing { Verdict::NoReportableValue } else { yardstick.within() }
}

fn shown(verdict: Verdict, graded: &[Graded]) -> String {
    let bad: Vec<String> =
        graded.iter().filter(|one| !one.conforms).map(|one| format!("{}: {}", one.title, one.word)).collect();
    if !bad.is_empty() {
        return format!("does not conform ({})", bad.join("; "));
    }
    match verdict {
        Verdict::Conforms => "conforms".to_string(),
        Verdict::NoReportableValue => verdict.words().to_string(),
        _ => {
            let each = graded.iter().map(|one| format!("{}: {}", one.title, one.word));
            each.collect::<Vec<_>>().join("; ")
        }
    }
}

fn is_grade(reading: &ReadingValue, attribute: &Attribute) -> bool {
    reading.field == attribute.code && reading.qualifier != Qualifier::NotRead
}

fn has_grade(attribute: &Attribute, readings: &[ReadingValue]) -> bool {
    readings.iter().any(|reading| is_grade(reading, attribute))
}

fn of(attribute: &Attribute, limited: &[(String, Vec<String>)], readings: &[ReadingValue]) -> Vec<Graded> {
    let limit = limited.iter().find(|(code, _)| *code == attribute.code);
    let own: Vec<&ReadingValue> = readings.iter().filter(|reading| is_grade(reading, attribute)).collect();
    let conforms = |code: &str| limit.is_none_or(|(_, allowed)| allowed.iter().any(|one| one == code));
    let allowed = limit.map_or(String::new(), |(_, allowed)| {
        allowed.iter().map(|code| word(attribute, code)).collect::<Vec<_>>().join(" or ")
    });
    let grade = |reading: &&ReadingValue| {
        let title = if own.len() > 1 && !reading.container_label.is_empty() {
            format!("{}, {}", attribute.title, reading.container_label)
        } else {
            attribute.title.clone()
        };
        let first = reading.first_typed.as_ref().map(|(typed, _)| typed);
        Graded {
            title,
            word: word(attribute, &reading.typed),
            conforms: conforms(&reading.typed),
            first_outside: first
                .filter(|first| **first != reading.typed && !conforms(first))
                .map(|first| word(attribute, first)),
            allowed: allowed.clone(),
        }
    };
    own.iter().map(grade).collect()
}

/// The word of a grade with its code: `hard cake (3)`.
fn word(attribute: &Attribute, code: &str) -> String {
    match attribute.grades.iter().find(|grade| grade.code == code) {
        Some(grade) if grade.word != grade.code => format!("{} ({})", grade.word, grade.code),
        _ => code.to_string(),
    }
}

fn missing_flag(missing: &[&Attribute], readings: &[ReadingValue]) -> NewFlag {
    let each = missing.iter().map(|attribute| {
        let why = readings
            .iter()
            .find(|reading| reading.field == attribute.code && reading.qualifier == Qualifier::NotRead);
        match why {
            Some(reading) => format!("{} ({})", attribute.title, reading.typed),
            None => attribute.title.clone(),
        }
    });
    let sentence = format!("Not graded: {}.", each.collect::<Vec<_>>().join(", "));
    NewFlag { kind: flag_kind::NO_VALUE, level: FlagLevel::Exception, sentence, numbers: json!({}) }
}

fn detail(
    yardstick: &Yardstick<'_>,
    graded: &[Graded],
    missing: &[&Attribute],
    limited: &[(String, Vec<String>)],
    remarks: &str,
    readings: &[ReadingValue],
) -> serde_json::Value {
    let grades: Vec<_> = graded
        .iter()
        .map(|one| json!({ "of": one.title, "value": one.word, "conforms": one.conforms }))
        .collect();
    let not_read: Vec<_> =
        missing.iter().map(|one| json!({ "of": one.title, "why": "not graded" })).collect();
    let remarks: Vec<&str> = readings
        .iter()
        .filter(|reading| reading.field == remarks)
        .map(|reading| reading.typed.as_str())
        .collect();
    json!({
        "rule": "every limited attribute conforms",
        "n": graded.len(),
        "values": grades,
        "not_read": not_read,
        "remarks": remarks,
        "limit": (!limited.is_empty())
            .then(|| limit_words(&Limit::Grades(limited.to_vec()), Some(yardstick.method))),
    })
}
