//! Cost of one evaluation: a group of 6 lots of 8 pulls, and the trend rules for 10 history lots of 8 pulls.
//!
//! `cargo bench --bench evaluation`. The same three models by explicit design matrices stand beside it, in
//! the same run.

use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use supernate::science::least_squares;
use supernate::science::pooling::Pooling;
use supernate::science::regression::Point;
use supernate::science::shelf_life::{Direction, Specification, of_model};
use supernate::science::trend::{Levels, early_warning, lot_trend, single_result};

const AGES: [f64; 8] = [0.0, 3.0, 6.0, 9.0, 12.0, 18.0, 24.0, 36.0];

/// Lots that differ a little and scatter a little, the same in every run.
fn lots(n: usize) -> Vec<Vec<Point>> {
    let scatter = |i: usize, j: usize| 0.4 * ((i * 31 + j * 17) as f64 * 1.7).sin();
    let lot = |i: usize| {
        let level = 100.5 + 0.3 * (i as f64).cos();
        let points = AGES.iter().enumerate();
        points.map(|(j, &x)| Point { x, y: level - 0.1 * x + scatter(i, j) }).collect()
    };
    (0..n).map(lot).collect()
}

fn group(c: &mut Criterion) {
    let lots = lots(6);
    let slices: Vec<&[Point]> = lots.iter().map(Vec::as_slice).collect();
    let specification = Specification { lower: Some(95.0), upper: None, direction: Direction::Decreasing };
    c.bench_function("6 lots x 8 pulls: fits, tests and roots", |b| {
        b.iter(|| {
            let pooling = Pooling::of(black_box(&slices), 0.25);
            pooling.map(|pooling| of_model(&pooling, pooling.model, &specification, 0.95))
        })
    });
    c.bench_function("6 lots x 8 pulls: the three models by design matrices", |b| {
        b.iter(|| designs(black_box(&lots)))
    });
}

/// Separate lines, common slope, common line, each by Householder reflections on its design matrix.
fn designs(lots: &[Vec<Point>]) -> Vec<Option<least_squares::Fit>> {
    let k = lots.len();
    let y: Vec<f64> = lots.iter().flatten().map(|p| p.y).collect();
    let matrix = |columns: usize, fill: &dyn Fn(&mut [f64], usize, f64)| {
        let mut rows = vec![0.0; y.len() * columns];
        let points = lots.iter().enumerate().flat_map(|(lot, points)| points.iter().map(move |p| (lot, p.x)));
        for (row, (lot, x)) in rows.chunks_exact_mut(columns).zip(points) {
            fill(row, lot, x);
        }
        least_squares::fit(&rows, columns, &y)
    };
    vec![
        matrix(2 * k, &|row, lot, x| (row[lot], row[k + lot]) = (1.0, x)),
        matrix(k + 1, &|row, lot, x| (row[lot], row[k]) = (1.0, x)),
        matrix(2, &|row, _, x| (row[0], row[1]) = (1.0, x)),
    ]
}

fn trend(c: &mut Criterion) {
    let mut lots = lots(11);
    let own = lots.split_off(10).remove(0);
    let history: Vec<&[Point]> = lots.iter().map(Vec::as_slice).collect();
    c.bench_function("rule H: 10 lots x 8 pulls, one verdict", |b| {
        b.iter(|| {
            let found = single_result::forecast(black_box(&history), &own[..5], 18.0);
            found.and_then(|found| found.judge(own[5].y, Levels::default()))
        })
    });
    c.bench_function("rule H: forecast with limits", |b| {
        b.iter(|| {
            single_result::forecast(black_box(&history), &own[..5], 18.0).map(|found| found.limits(0.01))
        })
    });
    c.bench_function("rule HL: 10 lots x 8 pulls", |b| {
        b.iter(|| lot_trend::judge(black_box(&history), &own[..6], Levels::default()))
    });
    c.bench_function("rule HS: 10 lots x 8 pulls, warning", |b| {
        b.iter(|| {
            let outlook = early_warning::outlook(black_box(&history), &own[..6], 36.0);
            outlook.map(|outlook| outlook.warning(Some(95.0), None))
        })
    });
}

criterion_group! {
    name = benches;
    config = Criterion::default().without_plots().sample_size(30)
        .measurement_time(std::time::Duration::from_secs(2));
    targets = group, trend
}
criterion_main!(benches);
