//! Draws a chart: shapes and texts at their places.

use rust_decimal::Decimal;

use super::scale::{self, Axis, TimeUnit};
use super::{Bound, Chart, Curve, CurveKind, Drawn, Mark, Point, Series, Shape, Text, fit, words};

/// Dashes of the series, in order.
const LINES: [&str; 4] = ["line", "line line-2", "line line-3", "line line-4"];
/// Least distance of two words at the right edge.
const WORD_GAP: i64 = 16;

/// The picture's frame in its own units.
struct Frame {
    left: i64,
    right: i64,
    top: i64,
    bottom: i64,
    width: i64,
    height: i64,
}

fn frame(chart: &Chart) -> Frame {
    if chart.is_small {
        Frame { left: 50, right: 310, top: 26, bottom: 186, width: 420, height: 230 }
    } else {
        Frame { left: 56, right: 590, top: 26, bottom: 276, width: 720, height: 320 }
    }
}

/// The whole chart.
pub fn drawn(chart: &Chart) -> Drawn {
    let frame = frame(chart);
    let y = scale::values(chart, frame.bottom, frame.top);
    let (x, unit) = scale::time(chart, frame.left, frame.right);
    let mut canvas =
        Canvas { x, y, unit, shapes: Vec::new(), texts: Vec::new(), ends: Vec::new(), taken: Vec::new() };
    canvas.curves(chart, CurveKind::Band);
    canvas.axes(chart, &frame);
    canvas.limits(chart, &frame);
    canvas.curves(chart, CurveKind::Fit);
    canvas.curves(chart, CurveKind::Bound);
    for (place, series) in chart.series.iter().enumerate() {
        canvas.fit(chart, series);
        canvas.series(chart, series, place);
    }
    canvas.write_ends(&frame);
    Drawn {
        id: chart.id.clone(),
        title: words::title(chart),
        finding: words::finding(chart),
        is_small: chart.is_small,
        width: frame.width,
        height: frame.height,
        shapes: canvas.shapes,
        texts: canvas.texts,
        key: words::key(chart),
        has_series: chart.series.len() > 1,
        unit: chart.unit.clone(),
        rows: words::rows(chart),
    }
}

struct Canvas {
    x: Axis,
    y: Axis,
    unit: TimeUnit,
    shapes: Vec<Shape>,
    texts: Vec<Text>,
    /// Words at the right edge: wanted height and text. Moved apart before they are written.
    ends: Vec<(Decimal, String)>,
    /// Heights that the words of limits have taken, which names of lots go around.
    taken: Vec<Decimal>,
}

impl Canvas {
    fn shape(&mut self, class: &'static str, path: String) {
        self.shapes.push(Shape { class, path });
    }

    fn text(&mut self, class: &'static str, x: Decimal, y: Decimal, anchor: &'static str, words: String) {
        self.texts.push(Text { class, x: plain(x), y: plain(y), anchor, words });
    }

    fn place(&self, point: &Point, value: Decimal) -> (Decimal, Decimal) {
        (self.x.at(self.unit.of_months(point.age_months)), self.y.at(value))
    }

    fn axes(&mut self, chart: &Chart, frame: &Frame) {
        let (left, right) = (Decimal::from(frame.left), Decimal::from(frame.right));
        for value in self.y.ticks() {
            let y = self.y.at(value);
            self.shape("grid", format!("M{} {}H{}", frame.left, plain(y), frame.right));
            let shown = with_decimals(value, self.y.step);
            self.text("soft", left - Decimal::from(8), y + Decimal::from(4), "end", shown);
        }
        let bottom = Decimal::from(frame.bottom);
        for value in self.x.ticks() {
            let x = self.x.at(value);
            self.shape("axis", format!("M{} {}v5", plain(x), frame.bottom));
            self.text("soft", x, bottom + Decimal::from(20), "middle", value.to_string());
        }
        self.shape("axis", format!("M{} {}V{}H{}", frame.left, frame.top, frame.bottom, frame.right));
        let unit = self.unit.words().to_string();
        self.text("soft", right + Decimal::from(12), bottom + Decimal::from(20), "start", unit);
        let label = if chart.unit.is_empty() {
            chart.test.clone()
        } else {
            format!("{}, {}", chart.test, chart.unit)
        };
        self.text("", Decimal::from(4), Decimal::from(14), "start", label);
    }

    fn limits(&mut self, chart: &Chart, frame: &Frame) {
        let both = [(chart.lower, "at least"), (chart.upper, "at most")];
        for (limit, words) in both {
            let Some(limit) = limit else { continue };
            let y = self.y.at(limit);
            self.shape("limit", format!("M{} {}H{}", frame.left, plain(y), frame.right));
            if chart.is_group {
                let at = Decimal::from(frame.right + 8);
                self.text("", at, y + Decimal::from(4), "start", format!("{words} {limit}"));
                self.taken.push(y);
            } else {
                self.ends.push((y, format!("{words} {limit}")));
            }
        }
        if let Some(months) = chart.life_months {
            let x = self.x.at(self.unit.of_months(months));
            self.shape("life", format!("M{} {}V{}", plain(x), frame.top, frame.bottom));
            let words = if chart.life_words.is_empty() { "shelf life" } else { chart.life_words.as_str() };
            let is_left = x < Decimal::from((frame.left + frame.right) / 2);
            let (shift, anchor) = if is_left { (4, "start") } else { (-4, "end") };
            let at = x + Decimal::from(shift);
            self.text("soft", at, Decimal::from(frame.top + 12), anchor, words.to_string());
        }
    }

    fn series(&mut self, chart: &Chart, series: &Series, place: usize) {
        if !chart.is_group {
            self.line(series, place);
        }
        for point in &series.points {
            let Some(value) = point.value else { continue };
            let are_drawn = point.replicates.len() > 1 && !chart.is_group;
            for reading in point.replicates.iter().filter(|_| are_drawn) {
                let (x, y) = self.place(point, *reading);
                self.shape("point-open", circle(x, y, "2.5"));
            }
            self.forecast(point);
            let (x, y) = self.place(point, value);
            let (class, path) = mark(point, place, x, y);
            self.shape(class, path);
            if point.mark == Mark::Imported {
                self.shape("point", circle(x, y, "1.5"));
            }
            if point.is_asked {
                self.shape("axis", circle(x, y, "11"));
            }
            if point.is_asked || point.bound != Bound::Equal {
                let beside = self.beside(chart, y);
                self.text("", x + Decimal::from(13), beside, "start", point.shown.clone());
            }
        }
        let last = series.points.iter().rev().find_map(|point| Some((point, point.value?)));
        let is_named = !chart.is_group || chart.series.len() <= LINES.len() || chart.named == series.label;
        if let (true, Some((point, value))) = (is_named && !series.label.is_empty(), last) {
            let (_, y) = self.place(point, value);
            self.ends.push((y, series.label.clone()));
        }
    }

    /// Where the words beside a point stand: above it, or below where a limit would run through them.
    fn beside(&self, chart: &Chart, y: Decimal) -> Decimal {
        let above = y - Decimal::from(6);
        let limits = [chart.lower, chart.upper].into_iter().flatten().map(|limit| self.y.at(limit));
        let runs_through = |at: Decimal| above - Decimal::from(16) < at && at < above + Decimal::from(4);
        if limits.into_iter().any(runs_through) { y + Decimal::from(18) } else { above }
    }

    /// The computed curves of one kind; a stroke ends where it leaves the picture.
    fn curves(&mut self, chart: &Chart, kind: CurveKind) {
        for curve in chart.curves.iter().filter(|curve| curve.kind == kind) {
            let path = self.curve(curve);
            let class = match kind {
                CurveKind::Band => "band",
                CurveKind::Fit => "fit",
                CurveKind::Bound => "bound",
            };
            if path.contains('L') {
                self.shape(class, path);
            }
        }
    }

    fn curve(&self, curve: &Curve) -> String {
        let mut path = String::new();
        let mut is_down = false;
        for (age, value) in &curve.points {
            let is_inside = *value >= self.y.least && *value <= self.y.most;
            if !is_inside && curve.kind != CurveKind::Band {
                is_down = false;
                continue;
            }
            let (x, y) = (plain(self.x.at(self.unit.of_months(*age))), plain(self.y.at(*value)));
            path.push_str(&format!("{}{x} {y}", if is_down { 'L' } else { 'M' }));
            is_down = true;
        }
        if curve.kind == CurveKind::Band && is_down {
            path.push('z');
        }
        path
    }

    /// A bracket from the lower to the upper limit of the forecast at the point's age.
    fn forecast(&mut self, point: &Point) {
        let Some((lower, upper)) = point.forecast else { return };
        let (x, low) = self.place(point, lower);
        let (_, high) = self.place(point, upper);
        let left = plain(x - Decimal::from(7));
        self.shape("bound", format!("M{left} {}h14m-7 0V{}m-7 0h14", plain(low), plain(high)));
    }

    /// The straight line through the series' own points.
    fn fit(&mut self, chart: &Chart, series: &Series) {
        let Some([from, to]) = fit::ends(series).filter(|_| chart.has_fit) else { return };
        let at = |(age, value): (Decimal, Decimal)| {
            (plain(self.x.at(self.unit.of_months(age))), plain(self.y.at(value)))
        };
        let ((x, y), (to_x, to_y)) = (at(from), at(to));
        self.shape("fit", format!("M{x} {y}L{to_x} {to_y}"));
    }

    /// Runs through neighbours only: a gap, a bound or a value set aside ends the stroke.
    fn line(&mut self, series: &Series, place: usize) {
        let mut path = String::new();
        let mut is_down = false;
        for point in &series.points {
            let Some(value) = point.value.filter(|_| point.is_joined()) else {
                is_down = false;
                continue;
            };
            let (x, y) = self.place(point, value);
            path.push_str(&format!("{}{} {}", if is_down { 'L' } else { 'M' }, plain(x), plain(y)));
            is_down = true;
        }
        if path.contains('L') {
            self.shape(LINES[place % LINES.len()], path);
        }
    }

    /// Writes the words at the right edge, moved apart so that none covers another.
    fn write_ends(&mut self, frame: &Frame) {
        let mut ends = std::mem::take(&mut self.ends);
        ends.sort_by_key(|(y, _)| *y);
        let gap = Decimal::from(WORD_GAP);
        let mut free = Decimal::from(frame.top);
        for (y, words) in ends {
            let mut at = y.max(free);
            while let Some(taken) = self.taken.iter().find(|taken| (**taken - at).abs() < gap) {
                at = *taken + gap;
            }
            free = at + gap;
            self.text("", Decimal::from(frame.right + 8), at + Decimal::from(4), "start", words);
        }
    }
}

/// The shape that tells what a point is; plain points take the shape of their series.
fn mark(point: &Point, place: usize, x: Decimal, y: Decimal) -> (&'static str, String) {
    let at = format!("M{} {}", plain(x), plain(y));
    match (point.bound, point.mark) {
        (Bound::Above, Mark::OutOfSpecification) => ("point-out", format!("{at}m-5 6v-8h-4l9 -9 9 9h-4v8z")),
        (Bound::Above, _) => ("point-open", format!("{at}m-5 6v-8h-4l9 -9 9 9h-4v8z")),
        (Bound::Below, Mark::OutOfSpecification) => ("point-out", format!("{at}m-5 -6v8h-4l9 9 9 -9h-4v-8z")),
        (Bound::Below, _) => ("point-open", format!("{at}m-5 -6v8h-4l9 9 9 -9h-4v-8z")),
        (_, Mark::OutOfSpecification) => ("point-out", format!("{at}m0 -8l8 14h-16z")),
        (_, Mark::OutOfTrend) => ("point-trend", format!("{at}m0 -8l8 8 -8 8 -8 -8z")),
        (_, Mark::SetAside) => ("axis", format!("{at}m-5 -5l10 10m0 -10l-10 10")),
        (_, Mark::Imported) => ("point-open", series_shape(place, x, y)),
        (_, Mark::None) if point.is_signed => ("point", series_shape(place, x, y)),
        (_, Mark::None) => ("point-open", series_shape(place, x, y)),
    }
}

fn series_shape(place: usize, x: Decimal, y: Decimal) -> String {
    let at = format!("M{} {}", plain(x), plain(y));
    match place % 4 {
        0 => circle(x, y, "4.5"),
        1 => format!("{at}m-4.2 -4.2h8.4v8.4h-8.4z"),
        2 => format!("{at}m-5.5 -4h11l-5.5 9.5z"),
        _ => format!("{at}m-6 0l3 -5h6l3 5 -3 5h-6z"),
    }
}

/// A circle as two half turns.
fn circle(x: Decimal, y: Decimal, radius: &str) -> String {
    let across =
        Decimal::from_str_exact(radius).map(|radius| plain(radius * Decimal::TWO)).unwrap_or_default();
    let (x, y) = (plain(x), plain(y));
    format!("M{x} {y}m-{radius} 0a{radius} {radius} 0 1 0 {across} 0a{radius} {radius} 0 1 0 -{across} 0z")
}

fn plain(value: Decimal) -> String {
    value.normalize().to_string()
}

/// A mark's value with as many decimals as the step has.
fn with_decimals(value: Decimal, step: Decimal) -> String {
    let decimals = step.normalize().scale() as usize;
    format!("{value:.decimals$}")
}
