//! QA releases or rejects a lot on reviewed results.

use chrono::NaiveDate;
use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, world};

/// A bench with an assigned shelf life and a lot made the day after, on the third day.
fn bench_and_lot(lab: &Lab) -> (Bench<'_>, i64) {
    let bench = Bench::new(lab);
    bench.assigns_shelf_life();
    lab.later_days(2);
    let lot = bench.lot_made_on("TW-104-0640", NaiveDate::from_ymd_opt(2026, 12, 2).unwrap());
    world::record_elsewhere(lab, lot);
    (bench, lot)
}

/// The tick that corrections and history were looked through.
const LOOKED: [(&str, &str); 1] = [("is_reviewed", "yes")];

fn reviewed(bench: &Bench<'_>, lot: i64) -> i64 {
    let sample = bench.ready(lot, Purpose::Release);
    let qa = bench.lab.reviewer();
    let page = format!("/review/{sample}");
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    sample
}

#[test]
fn a_lot_is_released_on_reviewed_results_with_the_expiry_of_the_assigned_shelf_life() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    let page = format!("/lots/{lot}/decision");
    let qa = lab.reviewer();
    qa.sees(&page, "Release is not possible now. No sample of TW-104-0640 was received for release");
    reviewed(&bench, lot);
    let seen =
        qa.sees(&page, "30 Nov 2028 (24 months from the release, which comes 1 day after it was made, within 30 days; month: never");
    for words in ["Assay", "99.9", "conforms", "are decisions of the authorised person"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let released = qa.signs(&page, &format!("/lots/{lot}/release"), &LOOKED);
    assert!(released.text().contains("TW-104-0640 is released."), "{}", released.text());
    assert!(released.text().contains("Released by me as the authorised person"), "{}", released.text());
    assert!(!released.text().contains("does not match"), "{}", released.text());
    qa.sees(&format!("/lots/{lot}"), "released");
    qa.sees(&page, "TW-104-0640 is released already.");
    lab.auditor().sees("/history", "TW-104-0640 released, use by 30 Nov 2028");
}

#[test]
fn a_released_lot_is_distributed_from_a_day_on() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    reviewed(&bench, lot);
    let qa = lab.reviewer();
    qa.signs(&format!("/lots/{lot}/decision"), &format!("/lots/{lot}/release"), &LOOKED);
    let (page, action) = (format!("/lots/{lot}"), format!("/lots/{lot}/distribution"));
    let none = qa.submits(&page, &action, &[("first_on", "yesterday"), ("markets", "")]);
    assert_eq!(none.status, 422, "{}", none.text());
    assert!(none.text().contains("“yesterday” is not a date"), "{}", none.text());
    let before = qa.submits(&page, &action, &[("first_on", "1 Dec 2026"), ("markets", "Ireland")]);
    assert_eq!(before.status, 409, "{}", before.text());
    let seen = qa.does(&page, &action, &[("first_on", "3 Dec 2026"), ("markets", "Ireland")]);
    assert!(seen.text().contains("Distributed from 3 Dec 2026: Ireland"), "{}", seen.text());
    assert!(bench.sample(bench.receives(lot, Purpose::Complaint, &["assay"])).is_distributed);
}

#[test]
fn a_release_without_complete_checked_reviewed_and_conforming_results_is_refused() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    let page = format!("/lots/{lot}/decision");
    let qa = lab.reviewer();
    let sample = bench.receives(lot, Purpose::Release, &["assay", "density"]);
    bench.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
    qa.sees(&page, "No release result yet for: Density.");
    bench.completes("rafe.tolland", sample, "density", &["1.11", "1.12"]);
    qa.sees(&page, "These release samples are not complete and checked yet: TW-104-0640");
    bench.checks("ilse.brandt", sample, "assay");
    bench.checks("ilse.brandt", sample, "density");
    qa.sees(&page, "These release samples are not reviewed and signed as they are now: TW-104-0640");

    // Sent by hand while the page offers no such form.
    let mut pairs = qa.get("/me").form("/sign-out");
    pairs.push(("submission".to_string(), "5".repeat(64)));
    pairs.push(("user_name".to_string(), qa.user_name.clone()));
    pairs.push(("password".to_string(), PASSWORD.to_string()));
    let refused = qa.posts(&format!("/lots/{lot}/release"), &pairs);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("not reviewed and signed"), "{}", refused.text());
    assert_eq!(lab.analyst().get(&format!("/lots/{lot}/reject")).status, 403);
}

#[test]
fn a_release_with_a_result_outside_or_an_open_investigation_is_refused_and_the_lot_rejected() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    reviewed(&bench, lot);
    bench.outside(lot, Purpose::RetainCheck);
    let qa = lab.reviewer();
    let page = format!("/lots/{lot}/decision");
    qa.sees(&page, "These investigations are open: 1. Conclude them first.");
    let reject = format!("/lots/{lot}/reject");
    let fields = [("reason", "leaks"), ("user_name", qa.user_name.as_str()), ("password", PASSWORD)];
    let short = qa.submits(&reject, &reject, &fields);
    assert_eq!(short.status, 409);
    assert!(short.text().contains("Say why in at least 20 characters"), "{}", short.text());
    let why = "assay far above its limit in two samples";
    let rejected = qa.signs(&reject, &reject, &[("reason", why)]);
    assert!(rejected.text().contains("TW-104-0640 is rejected."), "{}", rejected.text());
    assert!(
        rejected.text().contains(why) && rejected.text().contains("Rejected by me as the authorised person")
    );
    qa.sees(&page, "A rejected lot is not released.");
}

#[test]
fn without_an_assigned_shelf_life_there_is_no_expiry_and_no_release() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    world::record_elsewhere(&lab, lot);
    reviewed(&bench, lot);
    lab.reviewer()
        .sees(&format!("/lots/{lot}/decision"), "No shelf life is assigned for a lot of this presentation");
}

#[test]
fn a_correction_after_review_takes_the_ground_from_under_a_release() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    let sample = reviewed(&bench, lot);
    bench.corrects("rafe.tolland", sample, "assay", 1, "100.4");
    bench.checks("ilse.brandt", sample, "assay");
    let words = "These release samples are not reviewed and signed as they are now";
    lab.reviewer().sees(&format!("/lots/{lot}/decision"), words);
}
