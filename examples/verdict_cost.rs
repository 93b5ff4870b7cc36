//! What the trend verdicts add to completing a test, and both sides of it: a pull with a history of ten lots, and the
//! same test of a received sample, which has no age and no verdict.
//!
//! `cargo run --release --example verdict_cost`. Alternating, medians; commits are not synced on either side.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::print_stdout)]

#[path = "../tests/support/mod.rs"]
mod support;

use std::time::Instant;

use supernate::acts;
use supernate::domain::sample::Purpose;
use support::Lab;
use support::trends::Ageing;

const LOTS: usize = 10;
const NEW_LOTS: usize = 12;

fn main() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    ageing.history(LOTS);
    let (mut with, mut without) = (Vec::new(), Vec::new());
    for place in 0..NEW_LOTS {
        let lot = ageing.starts(&format!("TW-104-09{place:02}"), 560 + place as i64);
        for (at, months) in [0, 3, 6].into_iter().enumerate() {
            let sample = ageing.takes(&lot, months);
            ageing.clock_works();
            let value = Ageing::usual(place, at, months);
            with.push(completes(&ageing, sample, &value));
            let other = ageing.bench.receives(lot.lot, Purpose::RetainCheck, &["assay"]);
            without.push(completes(&ageing, other, &value));
        }
    }
    let (with, without) = (median(with), median(without));
    println!(
        "completing a test with its verdicts {with:.3} ms, without {without:.3} ms: the verdicts add {:.3} ms (at most \
         2); {LOTS} history lots of 6 pulls and up to {} more of 3",
        with - without,
        NEW_LOTS - 1
    );
}

/// Milliseconds of the completion alone; the readings are recorded before.
fn completes(ageing: &Ageing<'_>, sample: i64, value: &str) -> f64 {
    ageing.bench.records("rafe.tolland", sample, "assay", &[value, value]);
    let test = ageing.bench.test(sample, "assay");
    let actor = ageing.bench.lab.actor("rafe.tolland");
    let began = Instant::now();
    acts::result::complete(&ageing.bench.lab.app.db, &actor, test).unwrap();
    began.elapsed().as_secs_f64() * 1e3
}

fn median(mut times: Vec<f64>) -> f64 {
    times.sort_by(f64::total_cmp);
    times[times.len() / 2]
}
