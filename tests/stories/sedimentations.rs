//! Cylinders: time zero, planned readings over hours and days, F.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::benches::{at_bench, page, records};
use crate::support::Lab;

#[test]
fn a_cylinder_is_read_over_hours_and_days() {
    let lab = Lab::new();
    let (_, tests, label) = at_bench(&lab, &[TestKind::Sedimentation]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    let cylinders = format!("/tests/{}/cylinders", tests[0]);
    analyst.sees(&page, "Started now, its readings fall at: 10 min: 1 Dec 2026, 09:10");
    let full = analyst.submits(&page, &cylinders, &[("total_ml", "130")]);
    assert_eq!(full.status, 422);
    assert!(full.text().contains("it must lie between 0 and 120"), "{}", full.text());
    analyst.does(&page, &cylinders, &[("total_ml", "100.0")]);

    let seen = analyst.sees(&page, "due 1 Dec 2026, 09:30");
    assert!(seen.html().contains("data-due-at=\"2026-12-01T09:30:00"), "{}", seen.html());
    assert!(!seen.html().contains("name=\"reading.0.1.sediment_ml@30\""));
    for (minute, clock, millilitres) in [
        ("10", "2026-12-01T09:10:30Z", "99.5"),
        ("30", "2026-12-01T09:30:00Z", "98.0"),
        ("60", "2026-12-01T10:20:00Z", "96.5"),
        ("120", "2026-12-01T11:00:20Z", "95.0"),
        ("1440", "2026-12-02T09:01:00Z", "91.5"),
    ] {
        lab.clock(clock);
        let sediment = format!("reading.0.1.sediment_ml@{minute}");
        let clarity = format!("reading.0.1.clarity@{minute}");
        let seen = records(&analyst, &page, &[(&sediment, millilitres), (&clarity, "1")]);
        assert_eq!(seen.status, 303, "{minute}: {}", seen.text());
    }
    let seen = analyst.sees(&page, "20 min late");
    assert!(seen.html().contains("<output id=\"F.1440\">0.92</output>"), "{}", seen.html());
    analyst.does(&page, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    analyst.sees(&page, "The reading planned 60 min after shaking was taken 20 min late.");
    let results = lab.app.db.read(|reader| store::result::of_test(reader, tests[0])).unwrap();
    assert_eq!(
        (results[0].value.unwrap().to_string().as_str(), results[0].verdict.as_str()),
        ("0.915", "conforms")
    );
}

#[test]
fn a_planned_reading_is_not_taken_before_its_time() {
    let lab = Lab::new();
    let (_, tests, label) = at_bench(&lab, &[TestKind::Sedimentation]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    analyst.does(&page, &format!("/tests/{}/cylinders", tests[0]), &[("total_ml", "100.0")]);
    lab.later_minutes(11);
    let refused = records(
        &analyst,
        &page,
        &[("reading.0.1.sediment_ml@30", "98.0"), ("reading.0.1.sediment_ml@10", "99.5")],
    );
    assert_eq!(refused.status, 409);
    assert!(
        refused.text().contains("a reading before its time is not the planned one"),
        "{}",
        refused.text()
    );
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap();
    assert_eq!(readings.len(), 1, "all of a submit is recorded, or none of it");
    let open = analyst.submits(&page, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    assert_eq!(open.status, 409);
    assert!(open.text().contains("Still open: Sediment volume at 10 min"), "{}", open.text());
}

#[test]
fn a_ratio_above_one_and_a_rising_boundary_are_asked_about() {
    let lab = Lab::new();
    let (_, tests, label) = at_bench(&lab, &[TestKind::Sedimentation]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    analyst.does(&page, &format!("/tests/{}/cylinders", tests[0]), &[("total_ml", "100.0")]);
    lab.later_minutes(10);
    assert_eq!(records(&analyst, &page, &[("reading.0.1.sediment_ml@10", "104.0")]).status, 303);
    analyst.sees(&page, "F is 1.04: the sediment stands above the reference volume");
}
