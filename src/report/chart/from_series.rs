//! Charts from stored results: one for each test and component that has a number.

use rust_decimal::Decimal;

use super::{Bound, Chart, Drawn, Mark, Point, Series};
use crate::domain::series::{ArmWords, SeriesPoint};
use crate::domain::specification::{LimitSet, SpecificationContent};

/// What the charts of one lot and condition have in common.
#[derive(Clone, Debug, Default)]
pub struct About<'a> {
    pub lot: &'a str,
    /// "25 °C/60 % RH inverted".
    pub condition: &'a str,
    pub specification: Option<&'a SpecificationContent>,
    pub set: Option<LimitSet>,
    pub life_months: Option<Decimal>,
    /// The sample the page is about: its point gets a ring.
    pub asked: Option<i64>,
    /// Makes the ids of several lots' charts unique on one page.
    pub id_prefix: &'a str,
    /// Draws the straight line through the lot's own points.
    pub has_fit: bool,
    pub is_small: bool,
    /// Forecasts of single results: test of the sample, component, lower and upper limit.
    pub forecasts: &'a [(i64, String, Decimal, Decimal)],
}

/// One chart for each test and component, in the order of the points. Tests in words have none.
pub fn charts(points: &[SeriesPoint], about: &About<'_>) -> Vec<Chart> {
    let mut charts: Vec<Chart> = Vec::new();
    let mut groups: Vec<(&str, &str, Vec<&SeriesPoint>)> = Vec::new();
    let components =
        |test: &str| points.iter().any(|point| point.test == test && !point.component.is_empty());
    for point in points {
        if point.component.is_empty() && components(&point.test) && point.value.is_none() {
            continue;
        }
        let found = groups.iter_mut().find(|(test, part, _)| *test == point.test && *part == point.component);
        match found {
            Some((_, _, group)) => group.push(point),
            None => groups.push((&point.test, &point.component, vec![point])),
        }
    }
    for (test, component, group) in groups {
        if group.iter().any(|point| point.value.is_some()) {
            charts.push(chart(test, component, &group, about));
        }
    }
    charts
}

/// The charts of several arms of one lot, arm by arm, with the shelf-life limits of the specification of each.
pub fn of_arms(lot: &str, arms: &[(ArmWords, Vec<SeriesPoint>)], is_small: bool) -> Vec<Drawn> {
    let mut drawn = Vec::new();
    for (words, points) in arms {
        let content = words.specification.as_deref();
        let content = content.and_then(|text| serde_json::from_str::<SpecificationContent>(text).ok());
        let about = About {
            lot,
            condition: &words.condition,
            specification: content.as_ref(),
            set: content.as_ref().map(|_| LimitSet::ShelfLife),
            id_prefix: &format!("arm-{}-", words.arm),
            is_small,
            ..About::default()
        };
        drawn.extend(charts(points, &about).iter().map(Chart::drawn));
    }
    drawn
}

fn chart(test: &str, component: &str, group: &[&SeriesPoint], about: &About<'_>) -> Chart {
    let (lower, upper) = limits(test, component, about);
    let named = |point: &&&SeriesPoint| !point.unit.is_empty();
    let title = group.first().map(|point| point.title.as_str()).unwrap_or(test);
    let part = if component.is_empty() { String::new() } else { format!(", {component}") };
    Chart {
        id: id(&format!("{}chart-{test}-{component}", about.id_prefix)),
        test: format!("{title}{part}"),
        unit: group.iter().find(named).map(|point| point.unit.clone()).unwrap_or_default(),
        lot: about.lot.to_string(),
        condition: about.condition.to_string(),
        series: vec![Series {
            label: String::new(),
            points: group.iter().map(|point| drawn_point(point, about)).collect(),
        }],
        lower,
        upper,
        life_months: about.life_months,
        has_fit: about.has_fit,
        is_small: about.is_small,
        ..Chart::default()
    }
}

/// An id holds letters, digits and hyphens only.
pub(in crate::report) fn id(text: &str) -> String {
    text.chars().map(|letter| if letter.is_ascii_alphanumeric() { letter } else { '-' }).collect()
}

fn limits(test: &str, component: &str, about: &About<'_>) -> (Option<Decimal>, Option<Decimal>) {
    let found = about.specification.zip(about.set);
    found.map(|(content, set)| content.range_of(test, component, set)).unwrap_or_default()
}

pub(in crate::report) fn drawn_point(point: &SeriesPoint, about: &About<'_>) -> Point {
    let mark = if point.verdict == "out of specification" {
        Mark::OutOfSpecification
    } else if point.has_trend_flag {
        Mark::OutOfTrend
    } else if point.is_imported {
        Mark::Imported
    } else {
        Mark::None
    };
    Point {
        age_months: point.age_months,
        age: point.age.clone(),
        value: point.value,
        bound: match point.qualifier.as_str() {
            ">" => Bound::Above,
            "<" => Bound::Below,
            _ => Bound::Equal,
        },
        shown: point.shown.clone(),
        replicates: point.readings.clone(),
        spread: point.sd.map(|sd| (sd, point.n)),
        mark,
        is_signed: point.is_signed,
        is_asked: about.asked == Some(point.sample),
        forecast: about
            .forecasts
            .iter()
            .find(|(test, part, _, _)| *test == point.sample_test && *part == point.component)
            .map(|(_, _, lower, upper)| (*lower, *upper)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::domain::specification::{Limit, TestLimits, Way};

    fn point(test: &str, component: &str, value: Option<i64>, qualifier: &str) -> SeriesPoint {
        SeriesPoint {
            sample: 1,
            sample_test: 1,
            test: test.to_string(),
            title: test.to_uppercase(),
            component: component.to_string(),
            age_months: Decimal::ZERO,
            age: "Initial".to_string(),
            value: value.map(Decimal::from),
            qualifier: qualifier.to_string(),
            shown: String::new(),
            unit: "%".to_string(),
            verdict: "conforms".to_string(),
            sd: None,
            n: None,
            is_imported: false,
            has_trend_flag: false,
            is_signed: false,
            is_missed: false,
            readings: Vec::new(),
        }
    }

    #[test]
    fn every_test_and_component_with_a_number_has_its_chart_and_limits() {
        let limits = TestLimits {
            test: "assay".to_string(),
            title: "Assay".to_string(),
            method: 1,
            unit: "%".to_string(),
            release: Limit::None,
            shelf_life: Limit::Between { lower: Some(Decimal::from(95)), upper: None },
            in_use: Limit::None,
            way: Way::Rounding,
        };
        let specification = SpecificationContent { tests: vec![limits] };
        let points = [
            point("appearance", "", None, "words"),
            point("assay", "", Some(99), "="),
            point("degradation", "A", Some(1), "<"),
            point("degradation", "total", Some(2), "="),
        ];
        let about = About {
            specification: Some(&specification),
            set: Some(LimitSet::ShelfLife),
            asked: Some(1),
            ..About::default()
        };
        let charts = charts(&points, &about);
        let names: Vec<&str> = charts.iter().map(|chart| chart.test.as_str()).collect();
        assert_eq!(names, ["ASSAY", "DEGRADATION, A", "DEGRADATION, total"]);
        assert_eq!(charts[0].lower, Some(Decimal::from(95)));
        assert_eq!(charts[1].series[0].points[0].bound, Bound::Below);
        assert!(charts[0].series[0].points[0].is_asked);
    }
}
