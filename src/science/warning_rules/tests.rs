use super::facts::{ArmPair, Attribute, Doubt, FirstDay, Pull, Viscosity};
use super::*;

/// Pulls at 0, 30, 60 … days, each made from its index.
fn pulls(n: usize, fill: impl Fn(usize, &mut Pull)) -> Vec<Pull> {
    let one = |index: usize| {
        let mut pull = Pull { age_days: 30.0 * index as f64, ..Pull::default() };
        fill(index, &mut pull);
        pull
    };
    (0..n).map(one).collect()
}

fn lot(pulls: Vec<Pull>) -> Lot {
    Lot { pulls, ..Lot::default() }
}

fn finding(rule: Rule, lot: &Lot) -> Finding {
    all(lot, &Settings::default()).into_iter().find(|finding| finding.rule == rule).unwrap()
}

fn level(rule: Rule, lot: &Lot) -> Level {
    finding(rule, lot).level
}

#[test]
fn an_empty_lot_is_never_judged() {
    let findings = all(&Lot::default(), &Settings::default());
    assert_eq!(findings.len(), 15);
    for finding in &findings {
        assert_eq!(finding.level, Level::NotEvaluable, "{finding:?}");
        assert!(!finding.missing.is_empty() && finding.suggests.is_empty(), "{finding:?}");
    }
    assert!(findings.windows(2).all(|pair| pair[0].rule < pair[1].rule));
}

#[test]
fn r1_needs_both_and_a_rise() {
    let caking = |f: [f64; 4], n: [f64; 4]| {
        lot(pulls(4, |i, pull| (pull.f, pull.inversions) = (Some(f[i]), Some(n[i]))))
    };
    let mut bad = caking([0.9, 0.85, 0.8, 0.75], [6.0, 7.0, 9.0, 12.0]);
    assert_eq!(level(Rule::R1, &bad), Level::Watch);
    bad.label.inversions = Some(10.0);
    assert_eq!(level(Rule::R1, &bad), Level::Fail);
    assert!(finding(Rule::R1, &bad).suggests.starts_with("suggests"));
    assert_eq!(level(Rule::R1, &caking([0.9, 0.9, 0.9, 0.9], [6.0, 7.0, 9.0, 12.0])), Level::Quiet);
    assert_eq!(level(Rule::R1, &caking([0.9, 0.8, 0.7, 0.6], [6.0, 6.0, 7.0, 7.0])), Level::Quiet);
    assert_eq!(level(Rule::R1, &caking([0.9, 0.8, 0.7, 0.6], [6.0, 12.0, 11.0, 10.0])), Level::Quiet);
    let without = lot(pulls(4, |i, pull| pull.f = Some(0.9 - 0.1 * i as f64)));
    assert_eq!(finding(Rule::R1, &without).missing, ["shake count missing"]);
}

#[test]
fn r2_is_a_sudden_fall_from_a_plateau() {
    let of = |f: [f64; 4]| level(Rule::R2, &lot(pulls(4, |i, pull| pull.f = Some(f[i]))));
    assert_eq!(of([1.0, 0.95, 0.9, 0.5]), Level::Watch);
    assert_eq!(of([1.0, 0.75, 0.5, 0.3]), Level::Quiet, "steady");
    assert_eq!(of([0.7, 0.7, 0.7, 0.4]), Level::Quiet, "low before");
}

#[test]
fn r3_names_a_state() {
    let mut charged = lot(pulls(3, |i, pull| pull.f = Some([0.95, 0.6, 0.3][i])));
    charged.first_day = FirstDay { turbid: Some(true), f: Some(0.95), sharp_interface: Some(false) };
    assert!(finding(Rule::R3, &charged).suggests.contains("deflocculated"));
    let mut flocs = lot(pulls(11, |i, pull| {
        (pull.f, pull.inversions) = (Some(if i == 0 { 1.0 } else { 0.6 }), Some(4.0));
    }));
    flocs.first_day = FirstDay { turbid: Some(false), f: Some(0.7), sharp_interface: Some(true) };
    assert!(finding(Rule::R3, &flocs).suggests.contains("a flocculated"));
    flocs.first_day.sharp_interface = Some(false);
    assert!(finding(Rule::R3, &flocs).suggests.contains("mixed"));
}

/// Ratios of published series: ×1.91 and ×2.40 with |ζ| down 53 and 46 %, ×1.16 with 59 %.
#[test]
fn r4_and_r5_on_published_growth() {
    let grown = |ratio: f64, zeta: f64| {
        lot(pulls(2, |i, pull| {
            let last = i == 1;
            pull.mean_size = Some(if last { 100.0 * ratio } else { 100.0 });
            pull.zeta = Some(if last { -30.0 * zeta } else { -30.0 });
        }))
    };
    for (ratio, zeta, wanted) in [
        (1.91, 0.47, Level::Fail),
        (2.40, 0.54, Level::Fail),
        (1.16, 0.41, Level::Watch),
        (1.05, 0.4, Level::Quiet),
    ] {
        assert_eq!(level(Rule::R4, &grown(ratio, zeta)), wanted, "{ratio}");
        let cause = finding(Rule::R5, &grown(ratio, zeta));
        let expected = if wanted == Level::Quiet { Level::Quiet } else { Level::Watch };
        assert_eq!(
            (cause.level, cause.suggests.contains("aggregation")),
            (expected, expected == Level::Watch)
        );
    }
}

#[test]
fn r5_tells_ripening_from_clusters() {
    let cubic = |rate: f64| {
        pulls(5, |i, pull| {
            pull.d90 = Some((1000.0 + rate * i as f64).cbrt());
            pull.d10 = Some(1.0 + 0.1 * i as f64);
            pull.zeta = Some(-30.0);
        })
    };
    let mut ripe = lot(cubic(300.0));
    assert_eq!(finding(Rule::R5, &ripe).missing, ["particle size of a warm or cycled arm"]);
    ripe.warm = cubic(600.0);
    assert!(finding(Rule::R5, &ripe).suggests.contains("ripening"));
    let clusters = lot(pulls(3, |i, pull| {
        (pull.d90, pull.d10, pull.size_spread) =
            (Some(10.0 + 3.0 * i as f64), Some(1.0), Some(1.0 + 0.5 * i as f64));
    }));
    assert!(finding(Rule::R5, &clusters).suggests.contains("aggregates"));
}

fn thinning(method: u32, low_shear: bool) -> Lot {
    lot(pulls(5, |i, pull| {
        let share = 1.0 - 0.1 * i as f64;
        pull.viscosity = Some(Viscosity { value: 800.0 * share, method, low_shear });
        pull.settling_rate = Some(0.2 / share);
        pull.f = Some(0.95 - 0.08 * i as f64);
    }))
}

#[test]
fn r6_needs_low_shear_viscosity() {
    assert_eq!(level(Rule::R6, &thinning(1, true)), Level::Watch);
    assert_eq!(level(Rule::R6, &thinning(1, false)), Level::NotEvaluable);
    let mut other = thinning(1, true);
    other.pulls.iter_mut().skip(1).for_each(|pull| {
        if let Some(viscosity) = &mut pull.viscosity {
            viscosity.method = 2;
        }
    });
    assert_eq!(level(Rule::R6, &other), Level::NotEvaluable, "another spindle does not compare");
}

#[test]
fn r7_looks_for_causes_in_order() {
    let suggests = |lot: &Lot| finding(Rule::R7, lot).suggests;
    let mut lot = thinning(1, true);
    assert!(suggests(&lot).contains("do not show"));
    lot.warm = thinning(1, true).pulls;
    assert!(suggests(&lot).contains("thermal"));
    lot.formula.incompatible_ions = Some(true);
    assert!(suggests(&lot).contains("ions"));
    lot.pulls[4].odour_changed = Some(true);
    assert!(suggests(&lot).contains("microbial"));
    lot.formula.thickener_ph = Some((5.0, 10.0));
    lot.pulls[4].ph = Some(3.8);
    assert!(suggests(&lot).contains("pH"));
}

#[test]
fn r8_by_content_ph_or_binding() {
    let content = |slope: f64| {
        let mut lot = lot(pulls(5, |i, pull| {
            pull.preservative = Some(100.0 - slope * i as f64 + [0.1, -0.1, 0.1, -0.1, 0.1][i]);
        }));
        lot.limits.preservative_lower = Some(80.0);
        lot.expiry_days = Some(730.0);
        lot
    };
    assert_eq!(level(Rule::R8, &content(1.0)), Level::Watch);
    assert_eq!(level(Rule::R8, &content(0.1)), Level::Quiet);
    let mut bound = content(0.1);
    bound.formula.binds_preservative = Some(true);
    assert_eq!(level(Rule::R8, &bound), Level::Watch);
    bound.formula.effectiveness_tested = Some(true);
    assert_eq!(level(Rule::R8, &bound), Level::Quiet);
    bound.formula.preservative_highest_ph = Some(5.0);
    bound.pulls[4].ph = Some(5.6);
    assert_eq!(level(Rule::R8, &bound), Level::Watch);
}

#[test]
fn r9_wants_a_rise_that_lasts_and_a_loss() {
    let of = |assay: [f64; 4], loss: f64| {
        let lot = lot(pulls(4, |i, pull| {
            (pull.assay, pull.weight_loss) = (Some(assay[i]), Some(loss * i as f64 / 3.0));
        }));
        finding(Rule::R9, &lot)
    };
    let found = of([100.0, 101.5, 103.0, 104.5], 4.0);
    assert_eq!(found.level, Level::Watch);
    let corrected = found.evidence.iter().find(|e| e.name == "assay corrected for the loss").unwrap();
    assert!((corrected.value - 104.5 * 0.96).abs() < 1e-9);
    assert_eq!(of([100.0, 106.0, 108.0, 100.5], 4.0).level, Level::Quiet, "a peak between is none");
    assert_eq!(of([100.0, 101.5, 103.0, 104.5], 0.2).level, Level::Quiet, "no loss");
}

#[test]
fn r10_scatter_with_hard_redispersion() {
    let of = |rsd: [f64; 3], n: [f64; 3], first: f64| {
        let lot = lot(pulls(3, |i, pull| {
            (pull.assay_rsd, pull.inversions) = (Some(rsd[i]), Some(n[i]));
            pull.assay = Some(if i == 0 { first } else { 99.0 });
        }));
        level(Rule::R10, &lot)
    };
    assert_eq!(of([1.0, 2.0, 4.0], [5.0, 10.0, 15.1], 100.0), Level::Watch);
    assert_eq!(of([1.0, 2.0, 4.0], [5.0, 5.0, 5.0], 100.0), Level::Quiet);
    assert_eq!(of([1.0, 1.0, 1.0], [5.0, 5.0, 5.0], 83.35), Level::Watch, "83.35 % of theory at the start");
}

#[test]
fn r11_against_the_label() {
    let of = |n: f64| {
        let mut lot = lot(pulls(2, |_, pull| pull.inversions = Some(n)));
        lot.label.inversions = Some(20.0);
        level(Rule::R11, &lot)
    };
    assert_eq!(
        (of(15.9), of(16.0), of(20.0), of(21.0)),
        (Level::Quiet, Level::Watch, Level::Watch, Level::Fail)
    );
}

/// Omeprazole suspension: pH 9.0 to 7.7 over 70 days with the assay within 10 %: a watch, no failure.
#[test]
fn r12_watches_a_drift() {
    let mut lot = lot(vec![
        Pull { age_days: 0.0, ph: Some(9.0), ..Pull::default() },
        Pull { age_days: 70.0, ph: Some(7.7), ..Pull::default() },
    ]);
    assert_eq!(level(Rule::R12, &lot), Level::Watch);
    assert!(finding(Rule::R12, &lot).suggests.contains("hold"));
    lot.pulls[1].colour_changed = Some(true);
    assert!(finding(Rule::R12, &lot).suggests.contains("colour move"));
    lot.pulls[1].ph = Some(8.8);
    assert_eq!(level(Rule::R12, &lot), Level::Quiet);
}

#[test]
fn r13_compares_orientations() {
    let of = |inverted: Vec<f64>| {
        let arms = vec![ArmPair { upright: vec![0.10, 0.12, 0.11], inverted }];
        level(Rule::R13, &Lot { arms, ..Lot::default() })
    };
    assert_eq!(of(vec![0.4, 0.45, 0.42]), Level::Watch);
    assert_eq!(of(vec![0.11, 0.12, 0.10]), Level::Quiet);
    assert_eq!(of(vec![0.4]), Level::NotEvaluable);
    // 2.5 pooled standard deviations of three and three: t = 3.06 on 4 degrees of freedom, p = 0.038.
    assert_eq!(of(vec![0.125, 0.135, 0.145]), Level::Quiet);
}

/// A change that the method itself may make is no change, where its repeatability is known.
#[test]
fn a_change_within_the_repeatability_is_none() {
    let mut drift = lot(pulls(6, |i, pull| pull.ph = Some(6.0 - 0.05 * i as f64)));
    (drift.limits.ph_lower, drift.expiry_days) = (Some(5.5), Some(2000.0));
    assert_eq!(level(Rule::R12, &drift), Level::Watch);
    drift.repeatability.ph = Some(0.3);
    assert_eq!(level(Rule::R12, &drift), Level::Quiet);
}

#[test]
fn r14_never_warns() {
    let noise = [0.3, -0.3, 0.2, -0.2, 0.3];
    let results =
        |slope: f64| (0..5).map(|i| (30.0 * i as f64, 96.0 - slope * i as f64 + noise[i])).collect();
    let of = |slope: f64| {
        let attributes = vec![Attribute { results: results(slope), lower: Some(90.0), upper: None }];
        finding(Rule::R14, &Lot { attributes, expiry_days: Some(365.0), ..Lot::default() })
    };
    let found = of(0.7);
    assert_eq!(found.level, Level::Note);
    assert!(found.suggests.contains("not yet proven"));
    assert_eq!(of(-0.5).level, Level::Quiet);
}

#[test]
fn r15_queries_readings() {
    let mut lot = lot(pulls(3, |i, pull| pull.f = Some([1.0, 0.80, 0.83][i])));
    lot.falling_boundary = true;
    assert_eq!(level(Rule::R15, &lot), Level::Quiet, "a rise of 0.03 is noise");
    lot.pulls[2].f = Some(0.86);
    assert_eq!(level(Rule::R15, &lot), Level::Note);
    lot.falling_boundary = false;
    assert_eq!(level(Rule::R15, &lot), Level::Quiet, "a rising bed may rise");
    lot.formula.solids = Some(0.0186);
    lot.pulls[2].f = Some(0.02);
    assert_eq!(level(Rule::R15, &lot), Level::Note, "below what packing allows");
    lot.pulls[2].f = Some(0.5);
    lot.doubts = vec![Doubt::Torque(50.0), Doubt::Stress(1.0)];
    assert_eq!(level(Rule::R15, &lot), Level::Quiet);
    for doubt in [
        Doubt::Torque(5.0),
        Doubt::Stress(-0.2),
        Doubt::PhWithoutCalibration,
        Doubt::UnreadableSpread,
        Doubt::InterfaceAboveLiquid,
    ] {
        lot.doubts = vec![doubt];
        assert_eq!(level(Rule::R15, &lot), Level::Note, "{doubt:?}");
    }
    lot.doubts.clear();
    lot.pulls[2].age_days = 10.0;
    assert_eq!(level(Rule::R15, &lot), Level::Note, "time goes back");
}
