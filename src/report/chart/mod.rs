//! The trend chart of one test: pure facts in, a self-contained SVG figure with its table out.
//!
//! Points stand at real time and at their exact value; limits are labelled lines; a series ends with its name.
//! What a point is (signed, not signed, out of specification, out of trend, imported, set aside, censored) is
//! told by its shape. A pull without a result leaves a gap that no line crosses.

pub mod draw;
pub mod fit;
pub mod from_series;
pub mod scale;
pub mod words;

use askama::Template;
use rust_decimal::Decimal;

/// The facts of one chart.
#[derive(Clone, Debug, Default)]
pub struct Chart {
    /// Unique on its page: makes the ids of title and description.
    pub id: String,
    /// The test as people call it: "pH", "Inversions to uniform".
    pub test: String,
    pub unit: String,
    /// "TW-104-0640".
    pub lot: String,
    /// "25 °C/60 % RH inverted".
    pub condition: String,
    /// One to four; more are drawn as several charts.
    pub series: Vec<Series>,
    pub lower: Option<Decimal>,
    pub upper: Option<Decimal>,
    /// The assigned shelf life, drawn as a dotted upright.
    pub life_months: Option<Decimal>,
    /// The straight line through each series' own points is drawn, from its first to its last age; never beyond.
    pub has_fit: bool,
    /// Drawn at 420 × 230 instead of 720 × 320.
    pub is_small: bool,
    /// Readings within one test, not pulls: no word of signatures or limits.
    pub is_of_readings: bool,
    /// Several lots on one picture: points are not joined and single readings stand in the table only.
    pub is_group: bool,
    /// Computed curves: fitted lines, confidence limits, prediction bands.
    pub curves: Vec<Curve>,
    /// What the dotted upright says instead of "shelf life".
    pub life_words: String,
    /// The time axis reaches at least so far.
    pub end_months: Option<Decimal>,
    /// With many lots only this one is named at its line.
    pub named: String,
    /// What stands in the key beside the shapes, for the curves.
    pub curve_key: String,
}

/// A computed curve over age: months and value.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Curve {
    pub kind: CurveKind,
    pub points: Vec<(Decimal, Decimal)>,
}

/// What a curve is; bands are drawn first.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum CurveKind {
    /// The polygon of an interval: along its upper side, back along the lower.
    Band,
    /// A fitted mean.
    #[default]
    Fit,
    /// A confidence limit.
    Bound,
}

/// A line of points in order of age.
#[derive(Clone, Debug, Default)]
pub struct Series {
    /// Written at the line's end; empty where there is one series only.
    pub label: String,
    pub points: Vec<Point>,
}

/// One pull's result in a series.
#[derive(Clone, Debug, Default)]
pub struct Point {
    /// Actual age where it is known, else nominal; in months.
    pub age_months: Decimal,
    /// "18 months", "day 14".
    pub age: String,
    /// `None`: no reportable value, which leaves a gap.
    pub value: Option<Decimal>,
    pub bound: Bound,
    /// As reported, in the method's decimals.
    pub shown: String,
    /// Single readings, drawn small and open.
    pub replicates: Vec<Decimal>,
    /// An imported mean carries its spread and number instead of readings.
    pub spread: Option<(Decimal, Option<i64>)>,
    pub mark: Mark,
    pub is_signed: bool,
    /// The point this page is about: drawn with a ring and its value beside it.
    pub is_asked: bool,
    /// The limits of the forecast made before it was measured, drawn as a bracket.
    pub forecast: Option<(Decimal, Decimal)>,
}

/// Whether a value is known, or only that it lies beyond.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Bound {
    #[default]
    Equal,
    Above,
    Below,
}

/// What a point is, beside being a value. The first that holds is drawn.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub enum Mark {
    #[default]
    None,
    OutOfSpecification,
    OutOfTrend,
    Imported,
    /// Invalidated by a signed conclusion: shown, never joined by the line.
    SetAside,
}

impl Mark {
    pub fn words(self) -> &'static str {
        match self {
            Mark::None => "",
            Mark::OutOfSpecification => "out of specification",
            Mark::OutOfTrend => "out of trend",
            Mark::Imported => "imported, not observed here",
            Mark::SetAside => "set aside",
        }
    }
}

impl Point {
    /// Whether the line may run through it: a known value that counts.
    fn is_joined(&self) -> bool {
        self.value.is_some() && self.bound == Bound::Equal && self.mark != Mark::SetAside
    }
}

impl Chart {
    /// Draws the chart.
    pub fn drawn(&self) -> Drawn {
        draw::drawn(self)
    }

    /// All points that have a value, series by series.
    pub fn valued(&self) -> impl Iterator<Item = (&Series, &Point)> {
        self.series
            .iter()
            .flat_map(|series| series.points.iter().map(move |point| (series, point)))
            .filter(|(_, point)| point.value.is_some())
    }
}

/// A drawn chart: figure, SVG and table. Pages embed it as it is.
#[derive(Clone, Debug, Template)]
#[template(path = "part/chart.html")]
pub struct Drawn {
    pub id: String,
    pub title: String,
    /// The finding in one sentence (screen_U112).
    pub finding: String,
    pub is_small: bool,
    pub width: i64,
    pub height: i64,
    pub shapes: Vec<Shape>,
    pub texts: Vec<Text>,
    /// What the shapes in use mean.
    pub key: String,
    pub has_series: bool,
    pub unit: String,
    pub rows: Vec<Row>,
}

impl askama::filters::HtmlSafe for Drawn {}

/// One path with the class that styles it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Shape {
    pub class: &'static str,
    pub path: String,
}

/// One text of the drawing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Text {
    pub class: &'static str,
    pub x: String,
    pub y: String,
    pub anchor: &'static str,
    pub words: String,
}

/// One row of the table under the chart: exactly one for each drawn point.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Row {
    pub series: String,
    pub age: String,
    pub value: String,
    pub is_out: bool,
    pub readings: String,
    pub limits: String,
    pub note: String,
}

#[cfg(test)]
mod tests {
    use super::*;

    fn dec(text: &str) -> Decimal {
        Decimal::from_str_exact(text).unwrap()
    }

    fn point(months: i64, value: Option<&str>) -> Point {
        Point {
            age_months: Decimal::from(months),
            age: format!("{months} months"),
            value: value.map(dec),
            shown: value.unwrap_or_default().to_string(),
            is_signed: true,
            ..Point::default()
        }
    }

    fn ph() -> Chart {
        let mut points =
            vec![point(0, Some("6.90")), point(3, Some("6.88")), point(6, None), point(9, Some("7.62"))];
        points.push(point(12, Some("6.83")));
        points[3].mark = Mark::OutOfSpecification;
        points[4].replicates = vec![dec("6.82"), dec("6.84")];
        points[4].is_asked = true;
        Chart {
            id: "ph".to_string(),
            test: "pH".to_string(),
            unit: "pH units".to_string(),
            lot: "S-014".to_string(),
            condition: "40 °C/75 % RH".to_string(),
            series: vec![Series { label: String::new(), points }],
            lower: Some(dec("6.00")),
            upper: Some(dec("7.50")),
            ..Chart::default()
        }
    }

    fn count(drawn: &Drawn, class: &str) -> usize {
        drawn.shapes.iter().filter(|shape| shape.class == class).count()
    }

    #[test]
    fn screen_u112_the_finding_is_one_sentence_from_the_data() {
        assert_eq!(
            ph().drawn().finding,
            "pH, lot S-014, 40 °C/75 % RH: 4 pulls, 0–12 months. Last 6.83, limits 6.00–7.50. \
             1 out of specification: 7.62 at 9 months. Without a value: 6 months."
        );
    }

    /// decision A12: a line through the points is no shelf life, and the chart says so.
    #[test]
    fn the_straight_line_is_drawn_where_asked_and_says_what_it_is() {
        assert_eq!(count(&ph().drawn(), "fit"), 0);
        let fitted = Chart { has_fit: true, ..ph() }.drawn();
        assert_eq!(count(&fitted, "fit"), 1);
        assert!(fitted.key.contains("no shelf life"), "{}", fitted.key);
        let mut short = Chart { has_fit: true, ..ph() };
        short.series[0].points.truncate(2);
        assert_eq!((count(&short.drawn(), "fit"), short.drawn().key.contains("straight")), (0, false));
    }

    #[test]
    fn screen_u111_every_drawn_point_has_its_row() {
        let drawn = ph().drawn();
        let points = count(&drawn, "point") + count(&drawn, "point-out") + count(&drawn, "point-trend");
        assert_eq!((points, drawn.rows.len()), (4, 4));
        assert_eq!(drawn.rows[2].value, "▲ 7.62 above 7.50");
        assert_eq!(drawn.rows[3].readings, "6.82, 6.84");
    }

    #[test]
    fn screen_u114_the_line_is_not_drawn_through_a_gap() {
        let drawn = ph().drawn();
        let line = drawn.shapes.iter().find(|shape| shape.class == "line").unwrap();
        assert_eq!(line.path.matches('M').count(), 2, "{}", line.path);
        assert_eq!(line.path.matches('L').count(), 2);
        assert_eq!(count(&drawn, "point-open"), 2, "the two single readings");
    }

    #[test]
    fn screen_u114_signed_draft_out_trend_imported_and_censored_differ_in_shape() {
        let mut shapes = Vec::new();
        for change in [
            |_: &mut Point| (),
            |point: &mut Point| point.is_signed = false,
            |point: &mut Point| point.mark = Mark::OutOfSpecification,
            |point: &mut Point| point.mark = Mark::OutOfTrend,
            |point: &mut Point| point.mark = Mark::Imported,
            |point: &mut Point| point.mark = Mark::SetAside,
            |point: &mut Point| point.bound = Bound::Above,
            |point: &mut Point| point.bound = Bound::Below,
        ] {
            let mut chart = Chart { id: "a".to_string(), ..Chart::default() };
            let mut one = point(3, Some("5"));
            change(&mut one);
            chart.series = vec![Series { label: String::new(), points: vec![one] }];
            let drawn = chart.drawn();
            let from = drawn.shapes.iter().position(|shape| shape.path.starts_with("M56 26V")).unwrap() + 1;
            shapes.push(drawn.shapes[from..].to_vec());
        }
        for (place, shape) in shapes.iter().enumerate() {
            assert!(!shape.is_empty());
            assert!(!shapes[..place].contains(shape), "case {place} looks like another");
        }
    }

    #[test]
    fn screen_u113_series_end_with_their_names_and_limits_with_their_words() {
        let mut chart = ph();
        let mut second = chart.series[0].clone();
        chart.series[0].label = "upright".to_string();
        second.label = "inverted".to_string();
        chart.series.push(second);
        let drawn = chart.drawn();
        let words: Vec<&str> = drawn.texts.iter().map(|text| text.words.as_str()).collect();
        for expected in ["upright", "inverted", "at most 7.50", "at least 6.00"] {
            assert!(words.contains(&expected), "{expected}: {words:?}");
        }
        let mut heights: Vec<Decimal> =
            drawn.texts.iter().filter(|text| text.x == "598").map(|text| dec(&text.y)).collect();
        heights.sort();
        assert!(heights.windows(2).all(|pair| pair[1] - pair[0] >= Decimal::from(16)), "{heights:?}");
        assert_eq!(count(&drawn, "line line-2"), 1);
    }

    #[test]
    fn screen_u110_the_picture_has_a_role_a_title_and_a_description() {
        let html = ph().drawn().render().unwrap();
        for part in [
            "role=\"img\"",
            "<title id=\"ph-title\">",
            "<desc id=\"ph-finding\">",
            "<details class=\"numbers\">",
        ] {
            assert!(html.contains(part), "{part}");
        }
        assert!(!html.contains("style="));
    }

    /// However odd the numbers, drawing never fails and stays in the frame.
    #[test]
    fn huge_and_equal_values_are_drawn() {
        for values in [["79228162514264337593543950335", "-79228162514264337593543950335"], ["0", "0"]] {
            let points = values.iter().map(|value| point(1, Some(value))).collect();
            let chart = Chart { series: vec![Series { label: String::new(), points }], ..Chart::default() };
            assert_eq!(chart.drawn().rows.len(), 2);
        }
        assert_eq!(Chart::default().drawn().rows.len(), 0);
    }
}
