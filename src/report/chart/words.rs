//! What a chart says in words: title, finding, key and table.

use rust_decimal::Decimal;

use super::scale::TimeUnit;
use super::{Bound, Chart, Mark, Point, Row, Series, fit};

/// "pH, lot TW-104-0640, 25 °C/60 % RH".
pub fn title(chart: &Chart) -> String {
    let mut parts = vec![chart.test.clone()];
    if !chart.lot.is_empty() {
        parts.push(format!("lot {}", chart.lot));
    }
    if !chart.condition.is_empty() {
        parts.push(chart.condition.clone());
    }
    parts.join(", ")
}

/// The finding (screen_U112): "pH, lot S-014, 40 °C/75 % RH: 5 pulls, 0–12 months. Last 6.83, limits 6.00–7.50.
/// 1 out of specification: 7.62 at 9 months."
pub fn finding(chart: &Chart) -> String {
    let count = chart.valued().count();
    let mut text = format!("{}: {}", title(chart), counted(chart, count));
    if let Some(span) = ages(chart) {
        text.push_str(&format!(", {span}"));
    }
    text.push('.');
    let is_alone = chart.series.len() == 1 && !chart.is_of_readings;
    if let (true, Some(last)) = (is_alone, chart.valued().map(|(_, point)| point).last()) {
        text.push_str(&format!(" Last {}, {}.", last.shown, limits(chart)));
    } else if count > 0 && !chart.is_of_readings {
        text.push_str(&format!(" {}.", capital(&limits(chart))));
    }
    for mark in [Mark::OutOfSpecification, Mark::OutOfTrend, Mark::SetAside] {
        if let Some(sentence) = marked(chart, mark) {
            text.push_str(&format!(" {sentence}"));
        }
    }
    let missing = chart.series.iter().flat_map(|series| &series.points).filter(|point| point.value.is_none());
    let mut missing: Vec<&str> = missing.map(|point| point.age.as_str()).collect();
    let known = missing.clone();
    let mut place = 0;
    missing.retain(|age| {
        place += 1;
        !known[..place - 1].contains(age)
    });
    if !missing.is_empty() {
        text.push_str(&format!(" Without a value: {}.", missing.join(", ")));
    }
    text
}

fn counted(chart: &Chart, count: usize) -> String {
    let things = if chart.is_of_readings { "reading" } else { "pull" };
    let pulls = if count == 1 { format!("1 {things}") } else { format!("{count} {things}s") };
    match chart.series.len() {
        lots if chart.is_group && lots > 1 => format!("{pulls} of {lots} lots"),
        _ => pulls,
    }
}

fn ages(chart: &Chart) -> Option<String> {
    let ages: Vec<Decimal> = chart.valued().map(|(_, point)| point.age_months).collect();
    let (least, most) = (*ages.iter().min()?, *ages.iter().max()?);
    let unit = TimeUnit::for_months(most);
    let shown = |months| unit.of_months(months).round().normalize();
    let (least, most) = (shown(least), shown(most));
    Some(if least == most {
        format!("{most} {}", unit.words())
    } else {
        format!("{least}–{most} {}", unit.words())
    })
}

fn marked(chart: &Chart, mark: Mark) -> Option<String> {
    let found: Vec<String> = chart
        .valued()
        .filter(|(_, point)| point.mark == mark)
        .map(|(series, point)| match chart.is_group {
            true => format!("{} at {} ({})", point.shown, point.age, series.label),
            false => format!("{} at {}", point.shown, point.age),
        })
        .collect();
    (!found.is_empty()).then(|| format!("{} {}: {}.", found.len(), mark.words(), found.join(", ")))
}

fn capital(words: &str) -> String {
    let mut letters = words.chars();
    letters.next().map(|first| first.to_uppercase().chain(letters).collect()).unwrap_or_default()
}

/// "limits 6.00–7.50", "limit at most 20", "no limit".
pub fn limits(chart: &Chart) -> String {
    match (chart.lower, chart.upper) {
        (Some(lower), Some(upper)) => format!("limits {lower}–{upper}"),
        (Some(lower), None) => format!("limit at least {lower}"),
        (None, Some(upper)) => format!("limit at most {upper}"),
        (None, None) => "no limit".to_string(),
    }
}

/// What the shapes that occur mean, in one sentence for the caption.
pub fn key(chart: &Chart) -> String {
    let has = |test: &dyn Fn(&Point) -> bool| chart.valued().any(|(_, point)| test(point));
    let table: [(bool, &str); 9] = [
        (
            !chart.is_of_readings && has(&|point| point.mark == Mark::None && point.is_signed),
            "filled: signed",
        ),
        (has(&|point| point.mark == Mark::None && !point.is_signed), "open ring: not signed yet"),
        (!chart.is_group && has(&|point| !point.replicates.is_empty()), "small open: single readings"),
        (has(&|point| point.mark == Mark::OutOfSpecification), "triangle: out of specification"),
        (has(&|point| point.mark == Mark::OutOfTrend), "diamond: out of trend"),
        (has(&|point| point.mark == Mark::Imported), "ring with a dot: imported"),
        (has(&|point| point.mark == Mark::SetAside), "cross: set aside"),
        (has(&|point| point.bound != Bound::Equal), "arrow: beyond the value"),
        (has(&|point| point.forecast.is_some()), "bracket: its forecast, outside which it is an alert"),
    ];
    let line = "straight line: least squares through the lot's own points, no shelf life";
    let fitted = chart.has_fit && chart.series.iter().any(|series| fit::ends(series).is_some());
    let parts: Vec<&str> = table
        .iter()
        .filter(|(holds, _)| *holds)
        .map(|(_, words)| *words)
        .chain(fitted.then_some(line))
        .chain((!chart.curve_key.is_empty()).then_some(chart.curve_key.as_str()))
        .collect();
    capital(&parts.join(" · "))
}

/// The table's rows: one for each drawn point, in order of age.
pub fn rows(chart: &Chart) -> Vec<Row> {
    let mut points: Vec<(&Series, &Point)> = chart.valued().collect();
    points.sort_by_key(|(_, point)| point.age_months);
    points.into_iter().map(|(series, point)| row(chart, series, point)).collect()
}

fn row(chart: &Chart, series: &Series, point: &Point) -> Row {
    let is_out = point.mark == Mark::OutOfSpecification;
    let value = match (is_out, point.value) {
        (true, Some(value)) if chart.lower.is_some_and(|lower| value < lower) => {
            format!("▼ {} below {}", point.shown, chart.lower.unwrap_or_default())
        }
        (true, Some(value)) if chart.upper.is_some_and(|upper| value > upper) => {
            format!("▲ {} above {}", point.shown, chart.upper.unwrap_or_default())
        }
        _ => point.shown.clone(),
    };
    let readings = match &point.spread {
        Some((sd, Some(n))) => format!("mean of {n}, sd {sd}"),
        Some((sd, None)) => format!("sd {sd}"),
        None => point.replicates.iter().map(ToString::to_string).collect::<Vec<_>>().join(", "),
    };
    let signed = if point.is_signed || point.mark == Mark::Imported { "" } else { "not signed yet" };
    let note: Vec<&str> =
        [point.mark.words(), signed].into_iter().filter(|words| !words.is_empty()).collect();
    Row {
        series: series.label.clone(),
        age: point.age.clone(),
        value,
        is_out,
        readings,
        limits: limits(chart).trim_start_matches("limits ").trim_start_matches("limit ").to_string(),
        note: note.join(", "),
    }
}
