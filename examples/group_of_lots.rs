//! One group of 6 lots of 8 pulls: fits, analysis of covariance, roots. Prints nanoseconds a group and the numbers.
//!
//! `examples/against_statsmodels.sh` runs it beside the same computation by statsmodels OLS on arrays.

use std::hint::black_box;
use std::time::Instant;

use supernate::science::pooling::Pooling;
use supernate::science::regression::Point;
use supernate::science::shelf_life::{Direction, Specification, of_model};

const AGES: [f64; 8] = [0.0, 3.0, 6.0, 9.0, 12.0, 18.0, 24.0, 36.0];
/// Batches and groups in each; the fastest batch counts, as the fastest round does on the other side.
const BATCHES: u32 = 60;
const GROUPS: u32 = 5_000;

fn main() {
    let lots: Vec<Vec<Point>> = (0..6_u32).map(lot).collect();
    let slices: Vec<&[Point]> = lots.iter().map(Vec::as_slice).collect();
    let specification = Specification { lower: Some(95.0), upper: None, direction: Direction::Decreasing };
    let batch = |_| {
        let began = Instant::now();
        for _ in 0..GROUPS {
            let pooling = Pooling::of(black_box(&slices), 0.25);
            let _ = black_box(pooling.map(|one| of_model(&one, one.model, &specification, 0.95)));
        }
        began.elapsed().as_nanos() as f64 / f64::from(GROUPS)
    };
    let nanoseconds = (0..BATCHES).map(batch).fold(f64::INFINITY, f64::min);
    let Ok(pooling) = Pooling::of(&slices, 0.25) else { return };
    let life = of_model(&pooling, pooling.model, &specification, 0.95);
    let p = |test: Option<supernate::science::pooling::FTest>| test.map_or(f64::NAN, |test| test.p);
    println!("{nanoseconds:.1}");
    println!("{:.12} {:.12}", p(pooling.slopes), p(pooling.intercepts));
    println!("{:.10}", life.outcome.months().unwrap_or(f64::NAN));
}

/// The same invented lots as in the script beside.
fn lot(i: u32) -> Vec<Point> {
    let scatter = |j: usize| 0.4 * ((f64::from(i) * 31.0 + j as f64 * 17.0) * 1.7).sin();
    let level = 100.5 + 0.3 * f64::from(i).cos();
    AGES.iter().enumerate().map(|(j, &x)| Point { x, y: level - 0.1 * x + scatter(j) }).collect()
}
