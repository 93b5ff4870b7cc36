//! Computes every line, test, root and cap of a data set anew in one pass, beside merely stepping through its rows.
//!
//! `cargo run --release --example evaluate_all -- FOLDER`, a folder made by `make_data_set`. Goal G6: at most 2.0 times
//! the scan, at most 120 MB at data set L. Medians of alternating rounds; the peak is that of the whole process.

use std::path::PathBuf;
use std::time::Instant;

use supernate::cli::folder;
use supernate::domain::failure::Failure;
use supernate::science::extrapolation::{Node, Storage, limit, proposal};
use supernate::science::pooling::Pooling;
use supernate::science::regression::{Point, Sums};
use supernate::science::shelf_life::{Direction, Specification, of_model};
use supernate::store::door::{Db, Durability};
use supernate::store::sweep;

const ROUNDS: usize = 7;
/// The limit of every invented series: so much below its mean.
const LIMIT_SHARE: f64 = 0.9;

/// What one pass came to.
#[derive(Default)]
struct Found {
    results: u64,
    series: usize,
    lots: usize,
    roots: usize,
    months: u64,
}

fn main() -> Result<(), Failure> {
    let Some(path) = std::env::args().nth(1).map(PathBuf::from) else {
        return Err(Failure::Held("Name a folder made by make_data_set.".to_string()));
    };
    let db = folder::open(&path, Durability::Full)?.db;
    let (mut alone, mut all, mut computed) = (Vec::new(), Vec::new(), Vec::new());
    let mut found = Found::default();
    let mut rows = 0;
    for _ in 0..ROUNDS {
        alone.push(timed(|| db.read(|reader| sweep::scan(reader, false)).map(|_| ()))?);
        all.push(timed(|| db.read(|reader| sweep::scan(reader, true)).map(|read| rows = read))?);
        computed.push(timed(|| evaluate(&db).map(|one| found = one))?);
    }
    println!(
        "{rows} rows; {} results in {} series of {} lots; {} roots; at most {} months by all caps together",
        found.results, found.series, found.lots, found.roots, found.months
    );
    let (alone, all, computed) = (median(alone), median(all), median(computed));
    println!("stepping the results alone, three columns: {alone:.0} ms");
    println!("stepping every row that places a result: {all:.0} ms");
    println!("all fits, tests, roots and caps: {computed:.0} ms");
    println!(
        "ratio to all rows {:.2} (G6: at most 2.0), to the results alone {:.2}",
        computed / all,
        computed / alone
    );
    println!("peak resident memory: {} MiB (G6: at most 120 MB at data set L)", peak_mib());
    Ok(())
}

fn evaluate(db: &Db) -> Result<Found, Failure> {
    db.read(|reader| {
        let ground = sweep::ground(reader)?;
        let width = ground.tests.len();
        let mut sums = vec![Sums::NONE; ground.arms.len() * width];
        let mut last_months = vec![0.0_f32; ground.arms.len() * width];
        // The last value of each test that has a later version, so that it can be taken out again.
        let mut kept: std::collections::HashMap<i64, Point> = std::collections::HashMap::new();
        let mut found = Found::default();
        sweep::results(reader, &ground, |place, sample_test, version, value| {
            let Ok(y) = value.parse::<f64>() else { return };
            let point = Point { x: f64::from(place.age_months), y };
            let at = place.arm as usize * width + usize::from(place.test);
            last_months[at] = last_months[at].max(place.age_months);
            let sum = &mut sums[at];
            if version > 1
                && let Some(before) = kept.insert(sample_test, point)
            {
                sum.take_out(before);
            }
            sum.add(point);
            found.results += 1;
        })?;
        let mut series: Vec<(Vec<Sums>, f32)> = vec![(Vec::new(), f32::INFINITY); ground.groups * width];
        for (arm, place) in ground.arms.iter().enumerate().filter(|(_, place)| place.lot > 0) {
            for test in 0..width {
                let sum = sums[arm * width + test];
                if sum.n > 0 {
                    let (lots, covered) = &mut series[place.group as usize * width + test];
                    lots.push(sum);
                    *covered = covered.min(last_months[arm * width + test]);
                }
            }
        }
        drop((sums, last_months));
        for (lots, covered) in series.into_iter().filter(|(lots, _)| !lots.is_empty()) {
            conclude(lots, f64::from(covered), &mut found);
        }
        Ok(found)
    })
}

/// Fits, tests, the root of the chosen model and what the tree would allow at best.
fn conclude(lots: Vec<Sums>, covered: f64, found: &mut Found) {
    found.series += 1;
    found.lots += lots.len();
    let Ok(pooling) = Pooling::of_sums(lots, 0.25) else { return };
    let lower = Some(pooling.all.mean_y * LIMIT_SHARE);
    let specification = Specification { lower, upper: None, direction: Direction::Decreasing };
    let life = of_model(&pooling, pooling.model, &specification, 0.95);
    found.roots += usize::from(life.outcome.months().is_some());
    let cap = limit(covered, Node::N2, Storage::RoomTemperature);
    found.months += cap.and_then(|cap| proposal(life.outcome.months(), cap)).unwrap_or_default();
}

fn timed(work: impl FnOnce() -> Result<(), Failure>) -> Result<f64, Failure> {
    let began = Instant::now();
    work()?;
    Ok(began.elapsed().as_secs_f64() * 1e3)
}

fn median(mut values: Vec<f64>) -> f64 {
    values.sort_by(f64::total_cmp);
    values[values.len() / 2]
}

/// The high-water mark of this process, where the system tells it.
fn peak_mib() -> u64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find(|line| line.starts_with("VmHWM"));
    let kib = line.and_then(|line| line.split_whitespace().nth(1)).and_then(|text| text.parse::<u64>().ok());
    kib.unwrap_or_default() / 1024
}
