//! Worked examples of suspension science; the source of each stands beside it.

use supernate::science::deliverable_volume::{Container, judge, volume};
use supernate::science::density::undissolved_share;
use supernate::science::hindered;
use supernate::science::ph::theoretical_slope;
use supernate::science::regression::MeanLine;
use supernate::science::sedimentation::{self, flocculation, ratio, smallest_ratio};
use supernate::science::settling::{
    GRAVITY, Particle, Range, held_radius, phi_diameter, power_law, stokes_diameter,
};
use supernate::science::shelf_life::{Outcome, Side, crossing};
use supernate::science::uniformity::{Decision, acceptance_value, dosage_units, reference_value};
use supernate::science::warning_rules::facts::{Lot, Pull};
use supernate::science::warning_rules::{Level, Rule, Settings, all};
use supernate::science::yields::{accountable_percent, potency_corrected, yield_percent};
use supernate::science::{redispersion, viscosity};

use crate::support::{agree, rows};

fn particle(micrometres: f64, solid: f64, liquid: f64, millipascal_seconds: f64) -> Particle {
    Particle {
        diameter: micrometres * 1e-6,
        solid_density: solid,
        liquid_density: liquid,
        viscosity: millipascal_seconds * 1e-3,
        gravity: GRAVITY,
    }
}

/// A keyed examination question: 10 µm, 2.44 against 1.01 g/cm³, 2700 cP, g 980: 2.9e-6 cm/s.
#[test]
fn stokes_of_a_thick_liquid() {
    let velocity = Particle { gravity: 9.80, ..particle(10.0, 2440.0, 1010.0, 2700.0) }.stokes().unwrap();
    agree(velocity * 100.0, 2.8835e-6, 2e-5, "cm/s");
    assert_eq!(format!("{:.1e}", velocity * 100.0), "2.9e-6");
}

/// Three velocities of a public teaching page: Δρ 500, in m/s (2.7e-5, 1.4e-6, 6.8e-6 as printed).
#[test]
fn stokes_with_a_difference_of_500() {
    for (d, eta, want) in [(10.0, 1.0, 2.725e-5), (10.0, 20.0, 1.3625e-6), (5.0, 1.0, 6.8125e-6)] {
        let settle = Particle { gravity: 9.81, ..particle(d, 1500.0, 1000.0, eta) }.settle().unwrap();
        agree(settle.velocity, want, 1e-4, "velocity");
        assert_eq!(settle.range, Range::Valid);
    }
}

/// Martin, Physical Pharmacy (recalled): ZnO 5.60, medium 1.01, 0.01 P, 7.30e-3 cm/s, g 981: 5.40 µm.
#[test]
fn stokes_diameter_of_zinc_oxide() {
    let medium = Particle { gravity: 9.81, ..particle(1.0, 5600.0, 1010.0, 1.0) };
    agree(stokes_diameter(&medium, 7.30e-5).unwrap(), 5.402e-6, 2e-4, "diameter");
}

/// USGS Open-File Report 00-358, chapter 1, table 2: pipette withdrawal times of quartz, within 2.5 %.
/// The first class is a fixed start time, not a settling time.
#[test]
fn usgs_withdrawal_times() {
    let mut checked = 0;
    for row in rows("suspensions/settling_usgs_withdrawal_times.csv") {
        let number = |i: usize| row[i].parse::<f64>().ok();
        let (Some(phi), Some(depth)) = (number(0), number(1)) else { continue };
        if phi < 5.0 {
            continue;
        }
        for (column, water, eta) in [(2, 998.2, 1.002), (3, 997.3, 0.9107)] {
            let Some(seconds) = number(column) else { continue };
            let mut quartz = particle(0.0, 2650.0, water, eta);
            quartz.diameter = phi_diameter(phi);
            let got = depth / 100.0 / quartz.settle().unwrap().velocity;
            agree(got, seconds, 0.025, &format!("phi {phi}, column {column}"));
            checked += 1;
        }
    }
    assert!(checked >= 9, "{checked}");
}

/// Martin, Physical Pharmacy (recalled): 30 of 100 mL, β 1.3.
#[test]
fn sedimentation_of_martin() {
    let f = ratio(30.0, 100.0).unwrap();
    agree(f, 0.30, 1e-15, "F");
    agree(f / 1.3, 0.2308, 2e-4, "F∞");
    agree(flocculation(f, 0.3 / 1.3).unwrap(), 1.3, 1e-14, "β");
    agree(smallest_ratio(0.0186).unwrap(), 0.0290625, 1e-12, "smallest F");
    assert_eq!(sedimentation::supernatant(f), Some(0.7));
}

/// A published exercise: 1.7 against 17 mm/s with n 4.5 (computed: ε 0.5995).
#[test]
fn richardson_zaki() {
    let phi = hindered::volume_fraction(0.1, 4.5).unwrap();
    agree(1.0 - phi, 0.5995, 1e-4, "voidage");
    assert_eq!(format!("{phi:.2}"), "0.40");
    agree(hindered::velocity(17.0, phi, 4.5).unwrap(), 1.7, 1e-12, "and back");
}

/// Computed from the smooth forms as printed.
#[test]
fn exponents() {
    for (ar, n) in [(1.0, 4.701), (10.0, 4.469), (1000.0, 3.149), (1e6, 2.421)] {
        assert!((hindered::exponent_archimedes(ar, 0.0).unwrap() - n).abs() < 5.1e-4, "{ar}");
    }
    assert_eq!(hindered::exponent(0.1), Some(4.65));
    assert_eq!(hindered::exponent(1000.0), Some(2.39));
    agree(hindered::exponent_smooth(0.0).unwrap(), 5.09, 1e-15, "at rest");
    agree(hindered::exponent_in_tube(0.1, 0.01).unwrap(), 4.845, 1e-12, "with wall");
    agree(hindered::flux_maximum(4.608).unwrap(), 0.1783, 2e-4, "largest flux");
}

/// Beris et al. 1985 criterion as quoted: dΔρg/21.
#[test]
fn yield_stress_that_holds_a_particle() {
    for (d, difference, millipascal) in [(10.0, 290.0, 1.35), (50.0, 1000.0, 23.4), (100.0, 1000.0, 46.7)] {
        let stress = particle(d, 1000.0 + difference, 1000.0, 1.0).holding_yield_stress(1.0).unwrap();
        assert!((stress * 1000.0 - millipascal).abs() < 0.06, "{d}: {stress}");
    }
    let stress = particle(50.0, 2000.0, 1000.0, 1.0).holding_yield_stress(1.0).unwrap();
    agree(held_radius(stress, 1000.0, GRAVITY).unwrap(), 25e-6, 1e-12, "and back");
}

/// Beyond Stokes, against diffusion, and in a power-law liquid (computed).
#[test]
fn other_ranges_of_settling() {
    let sand = particle(500.0, 2650.0, 1000.0, 1.0).settle().unwrap();
    assert!(sand.range == Range::Drag && sand.velocity < 0.08 && sand.velocity > 0.06, "{sand:?}");
    let drop = particle(10.0, 900.0, 1000.0, 1.0).settle().unwrap();
    assert!(drop.velocity < 0.0, "a light drop rises");
    let fine = particle(1.0, 1300.0, 1000.0, 1.0).peclet(298.15).unwrap();
    assert!((fine - 0.19).abs() < 0.005, "{fine}");
    let p = particle(10.0, 1500.0, 1000.0, 20.0);
    agree(power_law(&p, 0.020, 1.0).unwrap(), p.stokes().unwrap(), 1e-12, "n = 1 is Stokes");
    assert_eq!(power_law(&p, 0.020, 0.3), None);
    assert_eq!(particle(0.0, 1500.0, 1000.0, 1.0).stokes(), None);
}

/// Krieger–Dougherty with φm 0.64 and [η] 2.5 (computed).
#[test]
fn viscosity_of_suspensions() {
    agree(viscosity::krieger_dougherty(0.05, 2.5, 0.64).unwrap(), 1.1390, 5e-5, "0.05");
    agree(viscosity::krieger_dougherty(0.10, 2.5, 0.64).unwrap(), 1.3124, 5e-5, "0.10");
    assert_eq!(viscosity::einstein(0.02), Some(1.05));
    assert_eq!(viscosity::krieger_dougherty(0.64, 2.5, 0.64), None);
    // A published table prints 1.25 P.
    assert_eq!(1.25 * viscosity::MILLIPASCAL_SECONDS_PER_POISE, 125.0);
}

/// USP ⟨905⟩, frequently asked questions: mean 105.9, s 5.0.
#[test]
fn acceptance_value_of_the_pharmacopoeia() {
    assert_eq!(reference_value(105.9, 100.0), 101.5);
    agree(acceptance_value(105.9, 5.0, 2.4, 100.0), 16.4, 1e-12, "stage 1");
    agree(acceptance_value(105.9, 5.0, 2.0, 100.0), 14.4, 1e-12, "with k of stage 2");
    agree(0.75 * 101.5, 76.125, 1e-15, "window of stage 2");
    agree(1.25 * 101.5, 126.875, 1e-15, "window of stage 2");
}

/// USP ⟨905⟩, two sets of ten (computed).
#[test]
fn ten_dosage_units() {
    let good = [97.2, 101.4, 99.8, 95.6, 103.1, 98.7, 100.9, 96.4, 102.2, 99.1];
    let found = dosage_units(&good, 100.0).unwrap();
    agree(found.mean, 99.44, 1e-12, "mean");
    agree(found.sd, 2.5118, 2e-5, "sd");
    agree(found.acceptance_value, 6.03, 1e-3, "AV");
    assert_eq!((found.reference, found.decision), (found.mean, Decision::Pass));
    let low = [88.0, 94.5, 91.2, 96.8, 90.1, 93.7, 89.5, 95.9, 92.4, 97.3];
    let found = dosage_units(&low, 100.0).unwrap();
    agree(found.mean, 92.94, 1e-12, "mean");
    agree(found.sd, 3.2198, 2e-5, "sd");
    agree(found.acceptance_value, 13.29, 5e-4, "AV");
    assert_eq!((found.reference, found.decision), (98.5, Decision::Pass));
}

/// USP ⟨698⟩, multiple-dose scheme (computed from the text of USP 31).
#[test]
fn deliverable_volumes() {
    let with = |rest: f64, odd: &[f64]| {
        let mut percents = vec![rest; 10 - odd.len()];
        percents.extend(odd);
        judge(Container::MultipleDose, &percents).unwrap()
    };
    assert_eq!(with(101.0, &[]), Decision::Pass);
    assert_eq!(with((1004.0 - 93.0) / 9.0, &[93.0]), Decision::TestTwentyMore, "mean 100.4, one at 93");
    assert_eq!(with(99.8, &[]), Decision::TestTwentyMore, "mean 99.8, none below 95");
    assert_eq!(with((1005.0 - 188.0) / 8.0, &[94.0, 94.0]), Decision::Fail, "two below 95");
    assert_eq!(with(102.0, &[89.0]), Decision::Fail, "one at 89");
    assert_eq!(with((995.0 - 94.0) / 9.0, &[94.0]), Decision::Fail, "mean 99.5 and one at 94");
    let mut thirty = vec![100.5; 29];
    thirty.push(92.0);
    assert_eq!(judge(Container::MultipleDose, &thirty), Some(Decision::Pass));
    thirty[0] = 92.0;
    assert_eq!(judge(Container::MultipleDose, &thirty), Some(Decision::Fail));
    let mut single = vec![101.0; 9];
    single.push(112.0);
    assert_eq!(judge(Container::SingleUnit, &single), Some(Decision::TestTwentyMore));
    assert_eq!(judge(Container::SingleUnit, &single[..5]), None);
    assert_eq!(volume(103.0, 1.03), Some(100.0));
}

/// USP ⟨791⟩: slope by temperature; the table and the linear form differ in the fifth decimal.
#[test]
fn electrode_slope() {
    for (celsius, table) in
        [(15.0, 0.05718), (20.0, 0.05817), (25.0, 0.05916), (30.0, 0.06016), (35.0, 0.06115)]
    {
        assert!((theoretical_slope(celsius).unwrap() - table).abs() < 1.1e-5, "{celsius}");
    }
    agree(theoretical_slope(30.0).unwrap(), 0.060152, 1e-12, "30 °C by the formula");
    agree(theoretical_slope(35.0).unwrap(), 0.061144, 1e-12, "35 °C by the formula");
}

/// PMC7527999, table 3 (viscosity of a herbal ghee): where three printed lines meet their limits.
#[test]
fn printed_lines_meet_their_limits() {
    for (start, slope, limit, months) in
        [(8673.0, 108.3, 7827.3, 7.81), (10565.0, 105.8, 9531.0, 9.77), (9668.0, 89.24, 8721.9, 10.60)]
    {
        let line =
            MeanLine { n: 5, mean_x: 0.0, mean_y: start, sxx: 1.0, slope: -slope, variance: 0.0, df: 3 };
        let Outcome::Crosses(found) = crossing(&line, limit, Side::Lower, 2.0) else { panic!() };
        assert!((found - months).abs() < 0.0051, "{found} for {months}");
    }
}

/// Batch arithmetic (computed from the numbers beside it).
#[test]
fn yields_and_potency() {
    agree(yield_percent(985.0 * 100.0, 100_000.0).unwrap(), 98.5, 1e-12, "yield");
    let accountable = accountable_percent(98_500.0, 1000.0, 0.0, 300.0, 100_000.0).unwrap();
    agree(accountable, 99.8, 1e-12, "accountable");
    let mass = potency_corrected(24.0 * 100.0, 98.5, 2.0, 1.0).unwrap();
    assert!((mass - 2486.3).abs() < 0.05, "{mass}");
    assert_eq!(potency_corrected(1.0, 0.0, 2.0, 1.0), None);
}

/// A published table truncates 1.198 % to 1.20 and the like; hydrocortisone 2 mg/mL, solubility 0.23.
#[test]
fn shares_degraded_and_undissolved() {
    let degraded = 100.0 - redispersion::percent(7.42, 7.51).unwrap();
    assert_eq!(format!("{degraded:.3}"), "1.198");
    agree(undissolved_share(2.0, 0.23).unwrap(), 0.885, 1e-12, "undissolved");
}

/// Can. J. Hosp. Pharm. 2017;70(1):51: percent of initial from printed means agrees within 0.16.
#[test]
fn tacrolimus_percent_of_initial() {
    let rows = rows("suspensions/tacrolimus_cjhp2017.csv");
    let value = |formulation: &str, condition: &str, container: &str, time: &str, test: &str| {
        let row = rows.iter().find(|row| {
            &row[1] == formulation
                && &row[2] == condition
                && &row[3] == container
                && &row[4] == time
                && &row[6] == test
        });
        row.unwrap()[7].parse::<f64>().unwrap()
    };
    let mut checked = 0;
    for row in rows.iter().filter(|row| &row[6] == "assay_percent_of_initial") {
        let mean = |time: &str| value(&row[1], &row[2], &row[3], time, "assay_concentration");
        let got = 100.0 * mean(&row[4]) / mean("0");
        assert!((got - row[7].parse::<f64>().unwrap()).abs() <= 0.16, "{row:?}: {got}");
        checked += 1;
    }
    assert_eq!(checked, 64);
}

/// Pulls of every formulation of a published file, by one test.
fn lots(file: &str, test: &str, fill: impl Fn(&mut Pull, f64)) -> Vec<(String, Lot)> {
    let mut lots: Vec<(String, Lot)> = Vec::new();
    for row in rows(file).iter().filter(|row| &row[6] == test) {
        let name = format!("{} {} {}", &row[1], &row[2], &row[3]);
        let mut pull = Pull { age_days: row[4].parse().unwrap(), ..Pull::default() };
        fill(&mut pull, row[7].parse().unwrap());
        match lots.iter_mut().find(|(known, _)| *known == name) {
            Some((_, lot)) => lot.pulls.push(pull),
            None => lots.push((name, Lot { pulls: vec![pull], falling_boundary: true, ..Lot::default() })),
        }
    }
    lots
}

/// Adv. Pharmacol. Pharm. Sci. 2021, 6634275: no shake counts, one delayed collapse in nine, two small rises.
#[test]
fn warning_rules_on_zinc_oxide() {
    let lots =
        lots("suspensions/zno_aloe_weloensis_sedimentation.csv", "sedimentation_volume_ratio", |pull, f| {
            pull.f = Some(f);
        });
    assert_eq!(lots.len(), 9);
    let mut collapsed = Vec::new();
    for (name, lot) in &lots {
        let findings = all(lot, &Settings::default());
        let of = |rule: Rule| findings.iter().find(|finding| finding.rule == rule).unwrap();
        assert_eq!(of(Rule::R1).level, Level::NotEvaluable, "{name}");
        assert!(of(Rule::R1).missing.contains(&"shake count missing"), "{name}");
        assert_eq!(of(Rule::R15).level, Level::Quiet, "{name}");
        if of(Rule::R2).speaks() {
            collapsed.push((name.clone(), of(Rule::R2).evidence.clone()));
        }
    }
    assert_eq!(collapsed.len(), 1, "{collapsed:?}");
    let (name, evidence) = &collapsed[0];
    assert!(name.contains("acacia 4%"), "{name}");
    assert_eq!((evidence[0].value, evidence[0].age_days), (0.90, Some(14.0)));
    assert_eq!((evidence[1].value, evidence[1].age_days), (0.50, Some(21.0)));
}

/// Can. J. Hosp. Pharm. 2017;70(1):51: every arm peaks above 100 % and returns, so water loss is not
/// suggested.
#[test]
fn warning_rules_on_tacrolimus() {
    let lots = lots("suspensions/tacrolimus_cjhp2017.csv", "assay_percent_of_initial", |pull, assay| {
        pull.assay = Some(assay);
        pull.weight_loss = Some(0.0);
    });
    assert_eq!(lots.len(), 8);
    for (name, lot) in &lots {
        let findings = all(lot, &Settings::default());
        let water = findings.iter().find(|finding| finding.rule == Rule::R9).unwrap();
        assert_eq!(water.level, Level::Quiet, "{name}: {water:?}");
    }
}
