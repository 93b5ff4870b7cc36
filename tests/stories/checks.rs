//! The laboratory check: a second qualified person looks before QA does.

use supernate::domain::sample::Purpose;

use crate::support::Lab;
use crate::support::samples::Bench;

#[test]
fn a_second_analyst_checks_and_the_test_leaves_the_queue() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.receives(bench.lot("TW-104-0640"), Purpose::Release, &["assay"]);
    bench.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
    let page = format!("/checks/{}", bench.test(sample, "assay"));

    lab.second_analyst().sees("/checks", "1 test waits for a second qualified person");
    let seen = lab.second_analyst().sees(&page, "99.9");
    for words in ["97.0 to 103.0", "99.6", "100.2", "Completed by Rafe Tolland", "No value was corrected."] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let after = lab.second_analyst().does(&page, &page, &[]);
    assert!(after.text().contains("No test waits for its check."), "{}", after.text());
    lab.reviewer().sees(&format!("/review/{sample}"), "checked by Ilse Brandt");
    lab.auditor().sees("/history", "checked a result");
}

#[test]
fn the_reader_and_the_unqualified_cannot_check() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.receives(bench.lot("TW-104-0640"), Purpose::Release, &["assay"]);
    bench.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
    let page = format!("/checks/{}", bench.test(sample, "assay"));

    let own = lab.analyst().sees(&page, "You read or completed Assay yourself");
    assert!(!own.html().contains("value=\"1\" name=\"version\""));
    lab.manager().sees(&page, "Maren Oddy is not qualified for AS-01 version 1");
    let mut pairs = lab.second_analyst().get(&page).form(&page);
    pairs.retain(|(name, _)| name != "form_token" && name != "submission");
    for (person, status) in [(lab.analyst(), 403), (lab.manager(), 409)] {
        let mut own = person.get("/me").form("/sign-out");
        own.extend(pairs.clone());
        own.push(("submission".to_string(), format!("{:064}", person.user_name.len())));
        let refused = person.posts(&page, &own);
        assert_eq!(refused.status, status, "{}: {}", person.user_name, refused.text());
    }
    let lot = format!("/review/{sample}");
    lab.reviewer().sees(&lot, "checked a result — refused: You read or completed Assay yourself");
    lab.reviewer().sees("/review", "1 of 1 test not checked yet");
}

#[test]
fn a_test_is_sent_back_with_a_reason_and_completed_anew() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.receives(bench.lot("TW-104-0640"), Purpose::Release, &["assay"]);
    bench.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
    let page = format!("/checks/{}", bench.test(sample, "assay"));
    let back = format!("{page}/send-back");

    let short = lab.second_analyst().submits(&page, &back, &[("why", "again")]);
    assert_eq!(short.status, 409);
    assert!(short.text().contains("Say in at least 10 characters"), "{}", short.text());
    assert!(short.html().contains(">again</textarea>"), "what was typed is kept");
    lab.second_analyst().does(&page, &back, &[("why", "the second weighing looks like the first")]);
    lab.reviewer().sees("/review", "Sent back");

    bench.corrects("rafe.tolland", sample, "assay", 1, "100.4");
    bench.completes_again("rafe.tolland", sample, "assay");
    let seen = lab.second_analyst().sees(&page, "Version 1 sent back by Ilse Brandt");
    assert!(seen.text().contains("100.2 100.4 mistyped"), "was and is: {}", seen.text());
    lab.second_analyst().does(&page, &page, &[]);
    lab.reviewer().sees("/review", "1 correction.");
}

#[test]
fn a_check_of_a_version_that_is_no_longer_the_latest_is_refused() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.receives(bench.lot("TW-104-0640"), Purpose::Release, &["assay"]);
    bench.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
    let page = format!("/checks/{}", bench.test(sample, "assay"));
    let form = lab.second_analyst().get(&page).form(&page);
    bench.corrects("rafe.tolland", sample, "assay", 1, "100.4");
    let refused = lab.second_analyst().posts(&page, &form);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("completed anew since you opened this page"), "{}", refused.text());
}
