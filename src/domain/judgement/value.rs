//! The reportable value of single values, its verdict and its flags.

use rust_decimal::Decimal;
use serde_json::json;

use super::limit::{Known, Standing, Yardstick, way_words, with_unit};
use super::spread::{Spread, median};
use super::{FlagLevel, Judged, NewFlag, ResultQualifier, Verdict, flag_kind};
use crate::domain::method::{Level, Reportable};
use crate::domain::rounding::{rounded, to_decimals};
use crate::domain::specification::{Range, range_words};

/// One single value: a replicate, or a container.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Single {
    /// "bottle 07" or "reading 2", as sentences name it.
    pub label: String,
    pub container: Option<i64>,
    pub known: Known,
    /// The first recorded value, where it was corrected since.
    pub first: Option<Known>,
}

/// Single values, what could not be read, and words that go along.
#[derive(Clone, Debug, Default)]
pub(super) struct Gathered {
    pub singles: Vec<Single>,
    /// Label and reason.
    pub not_read: Vec<(String, String)>,
    pub flags: Vec<NewFlag>,
    /// Overrules the method's reportable rule: the worst container judges redispersibility.
    pub is_worst_highest: bool,
}

/// What the value belongs to.
pub(super) struct Subject {
    pub component: String,
    /// Before the value in sentences; empty for a single-value test.
    pub title: String,
}

impl Subject {
    pub fn whole() -> Subject {
        Subject { component: String::new(), title: String::new() }
    }

    fn says(&self, words: &str) -> String {
        if self.title.is_empty() { words.to_string() } else { format!("{}: {words}", self.title) }
    }
}

/// The reportable value, or why there is none.
enum Reported {
    Value(Known),
    Nothing { kind: &'static str, sentence: String },
}

pub(super) fn judge(
    yardstick: &Yardstick<'_>,
    subject: &Subject,
    range: Option<Range>,
    gathered: Gathered,
) -> Judged {
    let rule = if gathered.is_worst_highest {
        Reportable::Worst { highest: true }
    } else {
        yardstick.method.reportable.clone()
    };
    let reported = reportable(yardstick, &rule, range.as_ref(), &gathered);
    let mut judged = match reported {
        Reported::Value(known) => judged_value(yardstick, subject, range.as_ref(), &rule, known, &gathered),
        Reported::Nothing { kind, sentence } => nothing(yardstick, subject, kind, sentence),
    };
    if let Some(range) = &range {
        if judged.verdict != Verdict::OutOfSpecification && !matches!(rule, Reportable::Worst { .. }) {
            judged.flags.extend(singles_outside(yardstick, subject, range, &gathered, &judged));
        }
        judged.flags.extend(first_values_outside(yardstick, subject, range, &gathered));
    }
    judged.flags.extend(gathered.flags.clone());
    judged.detail = detail(yardstick, range.as_ref(), &rule, &gathered, &judged);
    judged
}

fn reportable(
    yardstick: &Yardstick<'_>,
    rule: &Reportable,
    range: Option<&Range>,
    gathered: &Gathered,
) -> Reported {
    let singles = &gathered.singles;
    let knowns = singles.iter().map(|single| single.known);
    let found = match rule {
        Reportable::Mean { range_at_most, rsd_percent_at_most } => {
            return mean(yardstick, singles, *range_at_most, *rsd_percent_at_most);
        }
        // A bound is worse than any number on its side: ">100" may be anything above.
        Reportable::Worst { highest: true } => {
            knowns.max_by_key(|known| (matches!(known, Known::Above(_)), known.number()))
        }
        Reportable::Worst { highest: false } => {
            knowns.min_by_key(|known| (!matches!(known, Known::Below(_)), known.number()))
        }
        Reportable::EachContainer => match range {
            Some(range) => knowns.min_by_key(|known| margin(yardstick, *known, range)),
            None => knowns.min_by_key(|known| known.number()),
        },
    };
    found.map_or_else(nothing_read, Reported::Value)
}

fn nothing_read() -> Reported {
    Reported::Nothing { kind: flag_kind::NO_VALUE, sentence: "No value could be read.".to_string() }
}

/// How far inside its limits a value lies; the least margin is the worst. Outside is negative.
fn margin(yardstick: &Yardstick<'_>, known: Known, range: &Range) -> Decimal {
    let far = Decimal::MAX;
    if yardstick.standing(known, range) == Standing::Undecided {
        return Decimal::ZERO;
    }
    let value = known.number();
    let over = range.upper.and_then(|upper| upper.checked_sub(value)).unwrap_or(far);
    let under = range.lower.and_then(|lower| value.checked_sub(lower)).unwrap_or(far);
    over.min(under)
}

/// The mean, if no value is censored and the spread stays within what the method allows (req_O10). At
/// container level the readings of one container are averaged first; the spread is always that of all single
/// values.
fn mean(
    yardstick: &Yardstick<'_>,
    singles: &[Single],
    range_at_most: Option<Decimal>,
    rsd_at_most: Option<Decimal>,
) -> Reported {
    if singles.is_empty() {
        return nothing_read();
    }
    if singles.iter().any(|single| !single.known.is_exact()) {
        let sentence = "A censored value has no mean, so there is no reportable value.".to_string();
        return Reported::Nothing { kind: flag_kind::NO_VALUE, sentence };
    }
    let values: Vec<Decimal> = singles.iter().map(|single| single.known.number()).collect();
    let (Some(spread), Some(mean)) = (Spread::of(&values), mean_at_level(yardstick, singles)) else {
        let sentence = "The values are too large to be averaged exactly.".to_string();
        return Reported::Nothing { kind: flag_kind::NO_VALUE, sentence };
    };
    match spread_words(yardstick, &spread, values.len(), range_at_most, rsd_at_most) {
        Some(sentence) => Reported::Nothing { kind: flag_kind::SPREAD, sentence },
        None => Reported::Value(Known::Exactly(mean)),
    }
}

fn mean_at_level(yardstick: &Yardstick<'_>, singles: &[Single]) -> Option<Decimal> {
    let mean_of = |values: &[Decimal]| Spread::of(values).map(|spread| spread.mean);
    let all: Vec<Decimal> = singles.iter().map(|single| single.known.number()).collect();
    let mut containers: Vec<Option<i64>> = singles.iter().map(|single| single.container).collect();
    containers.sort();
    containers.dedup();
    let of_container = |container: &Option<i64>| -> Vec<Decimal> {
        let own = singles.iter().filter(|single| single.container == *container);
        own.map(|single| single.known.number()).collect()
    };
    let sizes: Vec<usize> = containers.iter().map(|container| of_container(container).len()).collect();
    // Equal numbers per container: both means are the same, and one division is more exact than two.
    if yardstick.method.level != Level::Container || sizes.windows(2).all(|pair| pair[0] == pair[1]) {
        return mean_of(&all);
    }
    let means = containers.iter().map(|container| mean_of(&of_container(container)));
    mean_of(&means.collect::<Option<Vec<_>>>()?)
}

/// Why the spread is too wide; `None` if it is not.
fn spread_words(
    yardstick: &Yardstick<'_>,
    spread: &Spread,
    count: usize,
    range_at_most: Option<Decimal>,
    rsd_at_most: Option<Decimal>,
) -> Option<String> {
    let unit = &yardstick.method.unit;
    if let Some(most) = range_at_most.filter(|most| spread.range > *most) {
        let range = with_unit(&spread.range.to_string(), unit);
        return Some(format!("The {count} values differ by {range}, more than {most}: no reportable value."));
    }
    let (rsd, most) = (spread.rsd_percent?, rsd_at_most?);
    (rsd > most).then(|| {
        let shown = to_decimals(rsd, most.scale() + 1, yardstick.method.rounding.halves);
        format!(
            "The relative standard deviation of the {count} values is {shown} %, more than {most} %: no \
             reportable value."
        )
    })
}

fn judged_value(
    yardstick: &Yardstick<'_>,
    subject: &Subject,
    range: Option<&Range>,
    rule: &Reportable,
    known: Known,
    gathered: &Gathered,
) -> Judged {
    let show = |known: Known| known.shown(|value| rounded(value, yardstick.method.rounding));
    let shown = match rule {
        Reportable::EachContainer if gathered.singles.len() > 1 => {
            gathered.singles.iter().map(|single| show(single.known)).collect::<Vec<_>>().join("; ")
        }
        _ => show(known),
    };
    let qualifier = match known {
        Known::Exactly(_) => ResultQualifier::Equal,
        Known::Above(_) => ResultQualifier::Above,
        Known::Below(_) => ResultQualifier::Below,
    };
    let (verdict, flags) = match range {
        None => (Verdict::NoLimit, Vec::new()),
        Some(range) => verdict(yardstick, subject, range, known),
    };
    Judged {
        component: subject.component.clone(),
        value: Some(known.number()),
        qualifier,
        shown,
        unit: yardstick.method.unit.clone(),
        verdict,
        detail: serde_json::Value::Null,
        flags,
    }
}

fn verdict(
    yardstick: &Yardstick<'_>,
    subject: &Subject,
    range: &Range,
    known: Known,
) -> (Verdict, Vec<NewFlag>) {
    let standing = yardstick.standing(known, range);
    let limit = range_words(range.lower, range.upper);
    let numbers = json!({
        "value": known.shown(|value| value),
        "limit": limit,
        "way": way_words(yardstick.way),
    });
    if let Some(words) = yardstick.outside_words(known, standing) {
        let flag = yardstick.beyond_flag(&subject.says(&words), numbers);
        return (yardstick.beyond().0, vec![flag]);
    }
    if standing == Standing::Undecided {
        let value = with_unit(&known.shown(|value| value), &yardstick.method.unit);
        let sentence = subject.says(&format!("{value} does not show whether the limit, {limit}, is kept."));
        let flag = NewFlag { kind: flag_kind::NO_VALUE, level: FlagLevel::Exception, sentence, numbers };
        return (Verdict::NoReportableValue, vec![flag]);
    }
    (yardstick.within(), Vec::new())
}

fn nothing(yardstick: &Yardstick<'_>, subject: &Subject, kind: &'static str, sentence: String) -> Judged {
    let flag = NewFlag {
        kind,
        level: FlagLevel::Exception,
        sentence: subject.says(&sentence),
        numbers: json!({ "replicates": yardstick.method.replicates }),
    };
    Judged {
        component: subject.component.clone(),
        value: None,
        qualifier: ResultQualifier::None,
        shown: Verdict::NoReportableValue.words().to_string(),
        unit: yardstick.method.unit.clone(),
        verdict: Verdict::NoReportableValue,
        detail: serde_json::Value::Null,
        flags: vec![flag],
    }
}

/// A single value outside while the reported one is not: never averaged away in silence (req_O10).
fn singles_outside(
    yardstick: &Yardstick<'_>,
    subject: &Subject,
    range: &Range,
    gathered: &Gathered,
    judged: &Judged,
) -> Vec<NewFlag> {
    let is_reported_outside = judged.flags.iter().any(|flag| flag.kind == yardstick.beyond().1);
    if is_reported_outside || gathered.singles.len() < 2 {
        return Vec::new();
    }
    let reported = match judged.value {
        Some(_) => format!("; the reported {} is within", judged.shown),
        None => String::new(),
    };
    let outside = gathered.singles.iter().filter_map(|single| {
        let words = yardstick.outside_words(single.known, yardstick.standing(single.known, range))?;
        let sentence = subject.says(&format!("{}: {words}{reported}.", single.label));
        Some(yardstick.side_flag(flag_kind::SINGLE_VALUE_OUTSIDE, sentence))
    });
    outside.collect()
}

/// Limits are judged on the first recorded value too (decision A5).
fn first_values_outside(
    yardstick: &Yardstick<'_>,
    subject: &Subject,
    range: &Range,
    gathered: &Gathered,
) -> Vec<NewFlag> {
    let outside = gathered.singles.iter().filter_map(|single| {
        let first = single.first.filter(|first| *first != single.known)?;
        let words = yardstick.outside_words(first, yardstick.standing(first, range))?;
        let now = single.known.shown(|value| value);
        let sentence =
            subject.says(&format!("{}: first recorded {words}; corrected to {now}.", single.label));
        Some(yardstick.side_flag(flag_kind::FIRST_VALUE_OUTSIDE, sentence))
    });
    outside.collect()
}

fn rule_words(rule: &Reportable, count: usize) -> String {
    match rule {
        Reportable::EachContainer if count < 2 => "the value read".to_string(),
        Reportable::EachContainer => format!("each of {count}; the one nearest its limit judges"),
        Reportable::Worst { highest: true } => format!("highest of {count}"),
        Reportable::Worst { highest: false } => format!("lowest of {count}"),
        Reportable::Mean { .. } => format!("mean of {count}"),
    }
}

fn detail(
    yardstick: &Yardstick<'_>,
    range: Option<&Range>,
    rule: &Reportable,
    gathered: &Gathered,
    judged: &Judged,
) -> serde_json::Value {
    let exact = gathered.singles.iter().all(|single| single.known.is_exact());
    let numbers: Vec<Decimal> = gathered.singles.iter().map(|single| single.known.number()).collect();
    let spread = Spread::of(&numbers).filter(|_| exact);
    let text = |value: Decimal| value.to_string();
    let singles: Vec<_> = gathered
        .singles
        .iter()
        .map(|single| json!({ "of": single.label, "value": single.known.shown(|value| value) }))
        .collect();
    let not_read: Vec<_> =
        gathered.not_read.iter().map(|(label, why)| json!({ "of": label, "why": why })).collect();
    json!({
        "rule": rule_words(rule, gathered.singles.len()),
        "n": gathered.singles.len(),
        "values": singles,
        "not_read": not_read,
        "mean": spread.as_ref().map(|spread| text(spread.mean)),
        "range": spread.as_ref().map(|spread| text(spread.range)),
        "rsd_percent": spread.as_ref().and_then(|spread| spread.rsd_percent).map(|rsd| text(rsd.round_dp(4))),
        "median": median_known(gathered).map(|known| known.shown(|value| value)),
        "limit": range.map(|range| range_words(range.lower, range.upper)),
        "way": range.map(|_| way_words(yardstick.way)),
        "compared": compared(yardstick, range, judged),
        "rounding": crate::domain::rounding::words(yardstick.method.rounding),
    })
}

/// The median with its censoring: of 12, 14 and ">100" it is 14; where a bound falls in the middle it is a
/// bound.
fn median_known(gathered: &Gathered) -> Option<Known> {
    let mut knowns: Vec<Known> = gathered.singles.iter().map(|single| single.known).collect();
    if knowns.iter().all(|known| known.is_exact()) {
        let values: Vec<Decimal> = knowns.iter().map(|known| known.number()).collect();
        return median(&values).map(Known::Exactly);
    }
    let rank = |known: &Known| match known {
        Known::Below(value) => (0, *value),
        Known::Exactly(value) => (1, *value),
        Known::Above(value) => (2, *value),
    };
    knowns.sort_by_key(rank);
    let middle = knowns.len() / 2;
    let upper = *knowns.get(middle)?;
    if knowns.len() % 2 == 1 {
        return Some(upper);
    }
    let lower = *knowns.get(middle.checked_sub(1)?)?;
    match (lower, upper) {
        (Known::Exactly(a), Known::Exactly(b)) => median(&[a, b]).map(Known::Exactly),
        // Half-way between a number and a bound is at least half-way to the bound.
        (Known::Exactly(a), Known::Above(b)) => median(&[a, b]).map(Known::Above),
        (Known::Below(a), Known::Exactly(b)) => median(&[a, b]).map(Known::Below),
        _ => Some(upper),
    }
}

/// The number that was compared, as it was compared.
fn compared(yardstick: &Yardstick<'_>, range: Option<&Range>, judged: &Judged) -> Option<String> {
    let (value, range) = (judged.value?, range?);
    let limit = range.upper.or(range.lower)?;
    (judged.qualifier == ResultQualifier::Equal).then(|| yardstick.compared(value, limit).to_string())
}
