//! Analysis of covariance: textbook examples and the check values of the Q1E requirement table.

use supernate::science::pooling::{Model, Pooling};
use supernate::science::regression::{Line, Point, Sums};
use supernate::science::shelf_life::{Direction, Outcome, Specification, of_model};

use crate::support::{agree, rows};

fn grouped(name: &str, group: usize, x: usize, y: usize) -> Vec<Vec<Point>> {
    let mut groups: Vec<(String, Vec<Point>)> = Vec::new();
    for row in rows(name) {
        let point = Point { x: row[x].parse().unwrap(), y: row[y].parse().unwrap() };
        match groups.iter_mut().find(|(key, _)| *key == row[group]) {
            Some((_, points)) => points.push(point),
            None => groups.push((row[group].to_string(), vec![point])),
        }
    }
    groups.into_iter().map(|(_, points)| points).collect()
}

fn pool(groups: &[Vec<Point>]) -> Pooling {
    let slices: Vec<&[Point]> = groups.iter().map(Vec::as_slice).collect();
    Pooling::of(&slices, 0.25).unwrap()
}

/// Snedecor & Cochran, Statistical Methods, 6th ed. 1967, p. 422 (recalled, recomputed in R).
#[test]
fn leprosy() {
    let pooling = pool(&grouped("worked/snedecor_cochran_leprosy.csv", 0, 1, 2));
    agree(pooling.common_slope_residuals.sse, 417.2026, 1e-7, "SSE common slope");
    agree(pooling.separate_residuals.sse, 397.55795, 1e-7, "SSE separate");
    agree(pooling.common_line_residuals.sse, 485.75631, 1e-7, "SSE common line");
    agree(pooling.common_slope.unwrap(), 0.98718, 1e-5, "common slope");
    agree(pooling.slopes.unwrap().f.unwrap(), 0.59296, 1e-5, "F slopes");
    agree(pooling.slopes.unwrap().p, 0.56058, 1e-5, "p slopes");
    agree(pooling.intercepts.unwrap().f.unwrap(), 2.13613, 1e-5, "F intercepts");
    agree(pooling.intercepts.unwrap().p, 0.13838, 1e-4, "p intercepts");
    agree(pooling.intercepts_full_error().unwrap().f.unwrap(), 2.06924, 1e-5, "F intercepts, full error");
    agree(pooling.intercepts_full_error().unwrap().p, 0.14823, 1e-4, "p intercepts, full error");
    assert_eq!(pooling.model, Model::CommonSlope);
}

/// Venables & Ripley, MASS, 4th ed. 2002 (insulation).
#[test]
fn whiteside() {
    let groups = grouped("worked/mass_whiteside.csv", 0, 1, 2);
    let pooling = pool(&groups);
    agree(Line::fit(&groups[0]).unwrap().slope, -0.3932388222, 1e-9, "slope before");
    agree(Line::fit(&groups[1]).unwrap().slope, -0.2779349518, 1e-9, "slope after");
    let se = |lot: usize| (pooling.separate_residuals.mse().unwrap() / pooling.lots[lot].sxx).sqrt();
    agree(se(0), 0.02248703394, 1e-9, "se before");
    agree(se(1), 0.0229242637, 1e-9, "se after");
    agree(pooling.slopes.unwrap().f.unwrap(), 12.89287, 1e-6, "F slopes");
    agree(pooling.slopes.unwrap().p, 0.00073069, 1e-5, "p slopes");
    agree(pooling.intercepts_full_error().unwrap().f.unwrap(), 318.45059, 1e-7, "F intercepts, full error");
}

/// Check values of the requirement table for ICH Q1E (invented data, computed with scipy).
#[test]
fn req_e6_check_values() {
    let months = [0.0, 3.0, 6.0, 9.0, 12.0];
    let lots = |values: [[f64; 5]; 3]| -> Vec<Vec<Point>> {
        values.map(|lot| months.iter().zip(lot).map(|(&x, y)| Point { x, y }).collect()).to_vec()
    };
    let lower = Specification { lower: Some(90.0), upper: None, direction: Direction::Decreasing };
    let upper = Specification { lower: None, upper: Some(1.0), direction: Direction::Increasing };
    let life = |pooling: &Pooling, specification: &Specification| -> Vec<f64> {
        let found = of_model(pooling, pooling.model, specification, 0.95);
        found.per_lot.iter().map(|lot| lot.outcome.months().unwrap()).collect()
    };

    let a = pool(&lots([
        [100.2, 99.6, 99.0, 98.3, 97.9],
        [100.0, 99.6, 98.9, 98.5, 97.8],
        [100.2, 99.3, 99.1, 98.4, 97.9],
    ]));
    assert_eq!(a.model, Model::CommonLine);
    agree(a.slopes.unwrap().f.unwrap(), 0.372093, 2e-6, "A F slopes");
    agree(a.slopes.unwrap().p, 0.699417, 2e-6, "A p slopes");
    agree(a.intercepts.unwrap().f.unwrap(), 0.157518, 4e-6, "A F intercepts");
    agree(a.intercepts.unwrap().p, 0.856154, 1e-6, "A p intercepts");
    agree(life(&a, &lower)[0], 51.0899, 1e-6, "A months");

    let b = pool(&lots([
        [101.4, 100.9, 100.3, 99.6, 99.2],
        [100.1, 99.4, 98.9, 98.4, 97.7],
        [99.0, 98.5, 97.8, 97.3, 96.7],
    ]));
    assert_eq!(b.model, Model::CommonSlope);
    agree(b.intercepts.unwrap().f.unwrap(), 1856.229008, 1e-8, "B F intercepts");
    for (got, want) in life(&b, &lower).iter().zip([57.6122, 50.6785, 45.4525]) {
        agree(*got, want, 2e-6, "B months");
    }

    let c = pool(&lots([
        [100.1, 99.8, 99.6, 99.1, 98.9],
        [100.2, 99.3, 98.1, 97.2, 96.1],
        [100.0, 99.4, 98.9, 98.2, 97.8],
    ]));
    assert_eq!(c.model, Model::SeparateLines);
    agree(c.slopes.unwrap().f.unwrap(), 222.722222, 1e-8, "C F slopes");
    for (got, want) in life(&c, &lower).iter().zip([86.2897, 28.8137, 49.9258]) {
        agree(*got, want, 2e-6, "C months");
    }

    let d = pool(&lots([
        [0.11, 0.17, 0.25, 0.30, 0.38],
        [0.12, 0.18, 0.23, 0.31, 0.37],
        [0.10, 0.18, 0.24, 0.32, 0.36],
    ]));
    assert_eq!(d.model, Model::CommonLine);
    agree(life(&d, &upper)[0], 39.4337, 2e-6, "D months");
}

/// Bolton, Pharmaceutical Statistics, stability chapter (recalled; a, b, s² agree): triplicates as points.
#[test]
fn bolton_tablets() {
    let points: Vec<Point> = rows("worked/bolton_tablets.csv")
        .iter()
        .map(|row| Point { x: row[0].parse().unwrap(), y: row[1].parse().unwrap() })
        .collect();
    let pooling = pool(&[points]);
    let line = pooling.mean_line(Model::CommonLine, 0).unwrap();
    agree(line.at(0.0), 51.8, 1e-14, "a");
    agree(line.variance, 1.825, 1e-13, "s²");
    let specification = |direction| Specification { lower: Some(45.0), upper: None, direction };
    let one = of_model(&pooling, Model::CommonLine, &specification(Direction::Decreasing), 0.95);
    assert_eq!(one.months_floor, Some(20));
    agree(one.outcome.months().unwrap(), 20.596202425855736, 1e-9, "one-sided root");
    agree(one.per_lot[0].mean_line_crossing.unwrap(), 25.5, 1e-12, "mean line");
    let two = of_model(&pooling, Model::CommonLine, &specification(Direction::Either), 0.95);
    let Outcome::Crosses(months) = two.outcome else { panic!("{two:?}") };
    assert!((months - 19.8377).abs() < 5e-5, "two-sided root {months}");
}

/// Lots whose points are not kept: sums taken point by point give the same tests and model.
#[test]
fn sums_alone_give_the_tests_of_the_points() {
    for (name, group, x, y) in
        [("worked/snedecor_cochran_leprosy.csv", 0, 1, 2), ("worked/mass_whiteside.csv", 0, 1, 2)]
    {
        let groups = grouped(name, group, x, y);
        let whole = pool(&groups);
        let sums = groups.iter().map(|points| {
            let mut sums = Sums::NONE;
            points.iter().for_each(|point| sums.add(*point));
            sums
        });
        let streamed = Pooling::of_sums(sums.collect(), 0.25).unwrap();
        assert_eq!(streamed.model, whole.model, "{name}");
        agree(streamed.common_line_residuals.sse, whole.common_line_residuals.sse, 1e-10, "SSE common line");
        agree(streamed.separate_residuals.sse, whole.separate_residuals.sse, 1e-10, "SSE separate");
        if let (Some(got), Some(wanted)) = (streamed.slopes, whole.slopes) {
            agree(got.p, wanted.p, 1e-9, "p slopes");
        }
        if let (Some(got), Some(wanted)) = (streamed.intercepts, whole.intercepts) {
            agree(got.p, wanted.p, 1e-9, "p intercepts");
        }
    }
}
