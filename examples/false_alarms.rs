//! Do the trend rules keep their promise? Simulated lots with fixed seeds: false alarms and power per rule.
//!
//! `cargo run --release --example false_alarms [studies]` (3,000 studies if nothing is said, about a minute).
//! Truth: 8 pulls from 0 to 36 months, lot levels with standard deviation 1.5, slopes 0.02 per month,
//! results 1;
//! means over 1, 3, 5 and 7 earlier pulls. "Finds 4 sd": a result 4 standard deviations off, at the 1 %
//! level.

use supernate::science::regression::Point;
use supernate::science::trend::context::{self, RULES};
use supernate::science::trend::single_result::forecast;
use supernate::science::trend::{Levels, history_screen, lot_trend};
use supernate::science::warning_rules::facts::{
    ArmPair, Attribute, FirstDay, Label, Limits, Lot, Pull, Viscosity,
};
use supernate::science::warning_rules::{Level, Settings, all};

const AGES: [f64; 8] = [0.0, 3.0, 6.0, 9.0, 12.0, 18.0, 24.0, 36.0];
const EARLIER: [usize; 4] = [1, 3, 5, 7];

/// A small generator with a fixed start (SplitMix64, public domain algorithm) and normal numbers from it.
struct Chance(u64);

impl Chance {
    fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64 + 0.5 / (1u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.next().ln()).sqrt() * (std::f64::consts::TAU * self.next()).cos()
    }

    /// Student's t with five degrees of freedom, brought to standard deviation 1.
    fn heavy(&mut self) -> f64 {
        let squares: f64 = (0..5).map(|_| self.normal().powi(2)).sum();
        self.normal() / (squares / 5.0).sqrt() / (5.0_f64 / 3.0).sqrt()
    }

    fn below(&mut self, n: usize) -> usize {
        ((self.next() * n as f64) as usize).min(n - 1)
    }
}

#[derive(Clone, Copy, PartialEq)]
enum Truth {
    Normal,
    Outlier,
    Heavy,
}

fn lot(chance: &mut Chance, truth: Truth) -> Vec<Point> {
    let (level, slope) = (100.0 + 1.5 * chance.normal(), -0.1 + 0.02 * chance.normal());
    let result = |x: f64| {
        let noise = if truth == Truth::Heavy { chance.heavy() } else { chance.normal() };
        Point { x, y: level + slope * x + noise }
    };
    AGES.map(result).to_vec()
}

/// Counts of one rule.
#[derive(Clone, Copy, Default)]
struct Count {
    judged: u32,
    at_one: u32,
    at_five: u32,
    found: u32,
    off: u32,
}

impl Count {
    fn add(&mut self, p: Option<f64>) {
        let Some(p) = p else { return };
        self.judged += 1;
        self.at_one += u32::from(p < 0.01);
        self.at_five += u32::from(p < 0.05);
    }

    fn add_off(&mut self, p: Option<f64>) {
        let Some(p) = p else { return };
        self.off += 1;
        self.found += u32::from(p < 0.01);
    }

    fn print(&self, name: &str) {
        let percent = |part: u32, whole: u32| 100.0 * f64::from(part) / f64::from(whole.max(1));
        let (one, five) = (percent(self.at_one, self.judged), percent(self.at_five, self.judged));
        print!("| {name} | {one:.2} % | {five:.1} % |");
        if self.off > 0 { println!(" {:.0} % |", percent(self.found, self.off)) } else { println!(" – |") }
    }
}

fn judge(history: &[&[Point]], earlier: &[Point], new: Point, counts: &mut Count) {
    let Ok(found) = forecast(history, earlier, new.x) else { return };
    let p = |y: f64| found.judge(y, Levels::default()).ok().map(|judged| judged.p);
    counts.add(p(new.y));
    counts.add_off(p(new.y - 4.0));
}

fn cell(truth: Truth, lots: usize, studies: usize) {
    let mut chance = Chance(1_000 * lots as u64 + truth as u64);
    let (mut h, mut screened, mut hl) = (Count::default(), Count::default(), Count::default());
    let (mut rules, mut flagged) = ([Count::default(); 5], 0u32);
    for _ in 0..studies {
        let mut history: Vec<Vec<Point>> = (0..lots).map(|_| lot(&mut chance, truth)).collect();
        if truth == Truth::Outlier {
            let sign = if chance.next() < 0.5 { -6.0 } else { 6.0 };
            let (which, pull) = (chance.below(lots), chance.below(AGES.len()));
            history[which][pull].y += sign;
        }
        let new = lot(&mut chance, if truth == Truth::Outlier { Truth::Normal } else { truth });
        let slices: Vec<&[Point]> = history.iter().map(Vec::as_slice).collect();
        let findings = history_screen::screen(&slices, 0.01);
        flagged += u32::from(!findings.is_empty());
        let cleaned = history_screen::without(&slices, &findings);
        let cleaned: Vec<&[Point]> = cleaned.iter().map(Vec::as_slice).collect();
        for m in EARLIER {
            judge(&slices, &new[..m], new[m], &mut h);
            judge(&cleaned, &new[..m], new[m], &mut screened);
            hl.add(lot_trend::judge(&slices, &new[..=m], Levels::default()).ok().map(|trend| trend.p));
            for (rule, count) in RULES.into_iter().zip(&mut rules) {
                let p = |y: f64| {
                    let point = Point { x: new[m].x, y };
                    context::test(rule, &slices, &new[..m], point).ok().map(|test| test.p)
                };
                count.add(p(new[m].y));
                count.add_off(p(new[m].y - 4.0));
            }
        }
    }
    let name = match truth {
        Truth::Normal => "normal",
        Truth::Outlier => "one 6-sd outlier in the history",
        Truth::Heavy => "t(5) residuals",
    };
    println!("\n{lots} history lots, {name}, {studies} studies; history flagged in {:.0} %", {
        100.0 * f64::from(flagged) / studies as f64
    });
    println!("| rule | false alarms at 1 % | at 5 % | finds 4 sd |\n|---|---|---|---|");
    h.print("H");
    screened.print("H, history screened");
    hl.print("HL");
    for (count, name) in rules.iter().zip(["A", "B", "C", "D", "E"]) {
        count.print(name);
    }
}

/// A lot in which nothing happens: every test scatters about a constant, as a good method does.
fn clean(chance: &mut Chance) -> Lot {
    let pull = |chance: &mut Chance, x: f64| {
        let mut around = |centre: f64, sd: f64| centre + sd * chance.normal();
        Pull {
            age_days: x * 30.4375,
            f: Some(around(0.85, 0.015)),
            inversions: Some(around(8.0, 1.0).round().max(1.0)),
            residue: Some(false),
            seconds: Some(around(12.0, 1.5)),
            settling_rate: Some(around(0.5, 0.04)),
            d10: Some(around(2.0, 0.05)),
            d90: Some(around(25.0, 0.6)),
            mean_size: Some(around(9.0, 0.2)),
            size_spread: Some(around(2.5, 0.1)),
            zeta: Some(around(-18.0, 2.0)),
            viscosity: Some(Viscosity { value: around(900.0, 30.0), method: 1, low_shear: true }),
            ph: Some(around(5.6, 0.05)),
            assay: Some(around(99.5, 0.8)),
            assay_rsd: Some(around(1.0, 0.25).abs()),
            other_assays: vec![around(100.0, 0.8)],
            top_bottom: Some(around(0.0, 1.0)),
            density: Some(around(1.05, 0.002)),
            weight_loss: Some(around(0.01 * x, 0.02)),
            preservative: Some(around(99.0, 1.0)),
            log_count: Some(around(0.5, 0.2)),
            odour_changed: Some(false),
            colour_changed: Some(false),
        }
    };
    let pulls: Vec<Pull> = AGES.iter().map(|&x| pull(chance, x)).collect();
    let warm = AGES[..5].iter().map(|&x| pull(chance, x)).collect();
    let mut three =
        |centre: f64, sd: f64| (0..3).map(|_| centre + sd * chance.normal()).collect::<Vec<f64>>();
    let arms = vec![
        ArmPair { upright: three(0.3, 0.02), inverted: three(0.3, 0.02) },
        ArmPair { upright: three(0.85, 0.015), inverted: three(0.85, 0.015) },
    ];
    let results = pulls.iter().filter_map(|pull| Some((pull.age_days, pull.assay?))).collect();
    Lot {
        warm,
        first_day: FirstDay { turbid: Some(false), f: Some(0.9), sharp_interface: Some(true) },
        label: Label { inversions: Some(20.0), seconds: Some(30.0) },
        formula: supernate::science::warning_rules::facts::Formula {
            thickener_ph: Some((3.0, 12.0)),
            preservative_highest_ph: Some(8.0),
            binds_preservative: Some(false),
            effectiveness_tested: Some(true),
            incompatible_ions: Some(false),
            solids: Some(0.04),
        },
        limits: Limits { ph_lower: Some(5.0), ph_upper: Some(6.5), preservative_lower: Some(80.0) },
        repeatability: Default::default(),
        expiry_days: Some(36.0 * 30.4375),
        arms,
        attributes: vec![Attribute { results, lower: Some(95.0), upper: None }],
        doubts: Vec::new(),
        falling_boundary: true,
        pulls,
    }
}

/// How often each of the fifteen rules speaks where nothing happens.
fn warnings(lots: usize) {
    let mut chance = Chance(15);
    let mut counts = [[0u32; 3]; 15];
    for _ in 0..lots {
        let findings = all(&clean(&mut chance), &Settings::default());
        for (finding, count) in findings.iter().zip(&mut counts) {
            let kind = match finding.level {
                Level::Watch | Level::Fail => 0,
                Level::Note => 1,
                Level::Quiet => continue,
                Level::NotEvaluable => 2,
            };
            count[kind] += 1;
        }
    }
    println!("\nwarning rules on {lots} clean lots of 8 pulls (R3 always names a state; R14 never warns)");
    println!("| rule | warns | notes | not evaluable |\n|---|---|---|---|");
    for (index, count) in counts.iter().enumerate() {
        let percent = count.map(|part| format!("{:.2} %", 100.0 * f64::from(part) / lots as f64));
        println!("| R{} | {} | {} | {} |", index + 1, percent[0], percent[1], percent[2]);
    }
}

fn main() {
    let studies = std::env::args().nth(1).and_then(|text| text.parse().ok()).unwrap_or(3_000);
    for lots in [3, 6, 10] {
        for truth in [Truth::Normal, Truth::Outlier, Truth::Heavy] {
            cell(truth, lots, studies);
        }
    }
    warnings(10_000);
}
