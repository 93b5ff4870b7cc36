//! Certificates of analysis: from reviewed results, signed, one version after another.

use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Seen, world};

fn bench_and_lot(lab: &Lab) -> (Bench<'_>, i64) {
    let bench = Bench::new(lab);
    bench.assigns_shelf_life();
    lab.later_days(2);
    let lot = bench.lot_made_on("TW-104-0640", "2026-12-02".parse().unwrap());
    world::record_elsewhere(lab, lot);
    (bench, lot)
}

fn reviewed(bench: &Bench<'_>, lot: i64) {
    let sample = bench.ready(lot, Purpose::Release);
    let (qa, page) = (bench.lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
}

fn signs(lab: &Lab, lot: i64, fields: &[(&str, &str)]) -> Seen {
    let page = format!("/lots/{lot}/certificate");
    let mut all = vec![("user_name", "ada.whitlock"), ("password", PASSWORD)];
    all.extend_from_slice(fields);
    lab.reviewer().submits(&page, &page, &all)
}

#[test]
fn a_certificate_states_results_limits_and_reviewers_and_a_new_version_says_what_is_new() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    let page = format!("/lots/{lot}/certificate");
    lab.reviewer().sees(&page, "It cannot be signed now. No sample of TW-104-0640 was received for release.");
    reviewed(&bench, lot);
    let draft = lab.reviewer().sees(&page, "It is a draft until QA signs it.");
    let words = [
        "Assay AS-01 version 1 97.0 to 103.0 % 99.9 % conforms TW-104-0640-R1",
        "Every result conforms to its release limit.",
        "TW-104-0640-R1 3 Dec 2026 Ada Whitlock",
        "Use by not decided yet",
    ];
    for words in words {
        assert!(draft.text().contains(words), "{words}: {}", draft.text());
    }
    let first = signs(&lab, lot, &[]);
    assert_eq!(first.status, 303, "{}", first.text());
    let first = first.location.unwrap();
    let signed = lab.auditor().sees(&first, "Version 1, signed.");
    assert!(signed.text().contains("Certified by me from the reviewed results"), "{}", signed.text());
    assert!(!signed.text().contains("does not match"), "{}", signed.text());
    lab.reviewer().sees(&page, "Version 1 states exactly this.");

    let looked = [("is_reviewed", "yes")];
    lab.reviewer().signs(&format!("/lots/{lot}/decision"), &format!("/lots/{lot}/release"), &looked);
    let silent = signs(&lab, lot, &[("why", "expiry")]);
    assert_eq!(silent.status, 409);
    assert!(silent.text().contains("Say what is new in this version"), "{}", silent.text());
    let second = signs(&lab, lot, &[("why", "the lot is released and has its expiry")]);
    assert_eq!(second.status, 303, "{}", second.text());
    let second = lab.auditor().get(&second.location.unwrap());
    for words in [
        "Version 2, signed.",
        "Use by 30 Nov 2028",
        "Decision released on 3 Dec 2026",
        "New in this version:",
    ] {
        assert!(second.text().contains(words), "{words}: {}", second.text());
    }
    lab.auditor().sees(&first, "Version 1, replaced by version 2.");
    let decision = lab.reviewer().get(&format!("/lots/{lot}/decision"));
    assert!(!decision.text().contains("does not match"), "{}", decision.text());
    let files = lab.folder.0.join("files");
    let report = lab
        .app
        .db
        .read(|reader| Ok(supernate::store::verify::run(reader, &files, None, &mut |_, _| ())))
        .unwrap();
    assert!(report.findings.is_empty() && report.recomputed == report.signatures, "{report:?}");
}

#[test]
fn what_was_not_seen_is_not_certified_and_nothing_is_certified_twice() {
    let lab = Lab::new();
    let (bench, lot) = bench_and_lot(&lab);
    reviewed(&bench, lot);
    let stale = signs(&lab, lot, &[("seen", "0000")]);
    assert_eq!(stale.status, 409);
    assert!(stale.text().contains("Results or facts have changed since this page was shown."));
    let wrong = signs(&lab, lot, &[("password", "not mine at all")]);
    assert_eq!(wrong.status, 409);

    // The form of the first signing, sent once more under a new key.
    let page = format!("/lots/{lot}/certificate");
    let mut again = lab.reviewer().get(&page).form(&page);
    assert_eq!(signs(&lab, lot, &[]).status, 303);
    again.retain(|(name, _)| !["submission", "user_name", "password"].contains(&name.as_str()));
    for (name, value) in [("submission", "6".repeat(64)), ("user_name", "ada.whitlock".to_string())] {
        again.push((name.to_string(), value));
    }
    again.push(("password".to_string(), PASSWORD.to_string()));
    let twice = lab.reviewer().posts(&page, &again);
    assert_eq!(twice.status, 409, "{}", twice.text());
    assert!(twice.text().contains("Version 1 states exactly this."), "{}", twice.text());
    let pairs = lab.manager().get("/me").form("/sign-out");
    assert_eq!(lab.manager().posts(&page, &pairs).status, 403);
}
