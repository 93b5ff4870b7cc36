//! QA reviews samples, answers exceptions, and signs.

use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Person, Seen, world};

const WHY: &str = "the reading was taken twice and the balance log agrees";

fn agrees(person: &Person<'_>, sample: i64) -> Seen {
    let page = format!("/review/{sample}");
    person.does(&page, &format!("{page}/agree"), &[])
}

fn signs(person: &Person<'_>, fields: &[(&str, &str)]) -> Seen {
    person.signs("/review/sign", "/review/sign", fields)
}

#[test]
fn req_p11_samples_without_exceptions_are_agreed_to_one_by_one_and_signed_together() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let (first, second) = (bench.ready(lot, Purpose::Release), bench.ready(lot, Purpose::RetainCheck));
    let qa = lab.reviewer();
    let queue = qa.sees("/review", "Without exceptions (2)");
    assert!(queue.text().contains("0 samples with exceptions, 2 without"), "{}", queue.text());
    let page = qa.sees(&format!("/review/{first}"), "No exception.");
    for words in [
        "What was checked",
        "Within limits: 2 of 2",
        "Checked by a second person: 2 of 2",
        "Corrections: none",
    ] {
        assert!(page.text().contains(words), "{words}: {}", page.text());
    }
    agrees(&qa, first);
    agrees(&qa, second);
    let list = qa.sees("/review/sign", "2 samples agreed to, not signed yet.");
    assert!(list.text().contains("Assay 99.9"), "one line of significant data: {}", list.text());
    let receipt = signs(&qa, &[]);
    let text = receipt.text();
    for words in [
        "Signed: 2 samples",
        "Reviewed, agrees with the raw readings",
        "Ada Whitlock",
        "1 Dec 2026, 09:00 (+00:00)",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
    let signed = qa.sees(&format!("/review/{first}"), "Reviewed, agrees with the raw readings");
    assert!(!signed.text().contains("does not match"), "{}", signed.text());
    qa.sees("/review", "Nothing waits.");
    lab.auditor().sees("/history", "signed pulls");
}

#[test]
fn screen_u72_what_changed_since_it_was_agreed_drops_out_and_the_rest_is_signed() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let (first, second) = (bench.ready(lot, Purpose::Release), bench.ready(lot, Purpose::RetainCheck));
    let qa = lab.reviewer();
    agrees(&qa, first);
    agrees(&qa, second);
    let mut form = qa.get("/review/sign").form("/review/sign");
    form.retain(|(name, _)| name != "user_name" && name != "password");
    form.push(("user_name".to_string(), qa.user_name.clone()));
    form.push(("password".to_string(), PASSWORD.to_string()));
    bench.corrects("rafe.tolland", second, "assay", 1, "100.4");
    let done = qa.posts("/review/sign", &form);
    assert_eq!(done.status, 303, "{}", done.text());
    let receipt = qa.get(&done.location.unwrap());
    assert!(receipt.text().contains("Signed: 1 sample "), "{}", receipt.text());
    assert!(receipt.text().contains("Changed since you looked"), "{}", receipt.text());
    let list = qa.sees("/review/sign", "Changed since you looked: 1");
    assert!(!list.html().contains(&format!("name=\"sample.{second}\"")));
    qa.sees("/review", "With exceptions (1)");
}

#[test]
fn screen_u74_a_sample_never_opened_by_this_reviewer_cannot_be_agreed_to_or_signed() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let sample = bench.ready(lot, Purpose::Release);
    let (ada, per) = (lab.reviewer(), lab.person("per.lindqvist"));
    let (page, action) = (format!("/review/{sample}"), format!("/review/{sample}/agree"));
    // Another reviewer's proof of having opened it is worth nothing.
    let mut pairs = ada.get(&page).form(&action);
    pairs.retain(|(name, _)| name == "opened" || name == "content");
    let mut own = per.get("/me").form("/sign-out");
    own.push(("submission".to_string(), "7".repeat(64)));
    own.extend(pairs);
    let refused = per.posts(&action, &own);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("You have not opened this sample"), "{}", refused.text());
    // Nor can it be signed without having been agreed to.
    let digest = lab.app.db.read(|reader| supernate::store::review::digest(reader, sample)).unwrap();
    let mut own = per.get("/me").form("/sign-out");
    own.push(("submission".to_string(), "8".repeat(64)));
    own.push((format!("sample.{sample}"), digest));
    own.push(("user_name".to_string(), per.user_name.clone()));
    own.push(("password".to_string(), PASSWORD.to_string()));
    let refused = per.posts("/review/sign", &own);
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("You have not opened this sample"), "{}", refused.text());
    ada.sees("/review", "Without exceptions (1)");
}

#[test]
fn a_decision_on_a_page_that_is_out_of_date_is_refused() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    let action = format!("/review/{sample}/agree");
    let form = qa.get(&format!("/review/{sample}")).form(&action);
    bench.corrects("rafe.tolland", sample, "assay", 1, "100.4");
    let refused = qa.posts(&action, &form);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("It has changed since you looked at it"), "{}", refused.text());
}

#[test]
fn decision_a7_a_result_outside_its_limit_is_verified_with_its_investigation_or_goes_back() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.outside(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    qa.sees("/review", "With exceptions (1)");
    let page = format!("/review/{sample}");
    let seen = qa.sees(&page, "1 result outside the limit");
    assert!(seen.text().contains("107.9"), "{}", seen.text());
    let unanswered = qa.submits(&page, &format!("{page}/agree"), &[]);
    assert_eq!(unanswered.status, 409);
    assert!(unanswered.text().contains("Answer these first"), "{}", unanswered.text());
    let after = qa.does(&page, &format!("{page}/answers"), &[]);
    assert!(after.text().contains("Reading verified, investigation 1 open."), "{}", after.text());
    let mut rounds = 0;
    while qa.get(&page).html().contains("Acceptable, because …") && rounds < 6 {
        answers_acceptable(&qa, &page);
        rounds += 1;
    }
    agrees(&qa, sample);
    let short = qa.submits(
        "/review/sign",
        "/review/sign",
        &[("statement", "fine"), ("user_name", &qa.user_name), ("password", PASSWORD)],
    );
    assert_eq!(short.status, 409);
    assert!(short.text().contains("Say in at least 20 characters why the sample"), "{}", short.text());
    let receipt = signs(&qa, &[("statement", WHY)]);
    assert!(receipt.text().contains(WHY), "{}", receipt.text());
    lab.auditor().sees("/history", "answered an exception");
}

/// Answers the first exception of the page that asks why it is acceptable.
fn answers_acceptable(person: &Person<'_>, page: &str) {
    let action = format!("{page}/answers");
    let form = person.get(page).form(&action);
    let field = form.iter().find(|(name, _)| name.starts_with("because.")).unwrap().0.clone();
    person.does(page, &action, &[(&field, WHY)]);
}

#[test]
fn screen_u75_a_sample_with_exceptions_is_signed_alone() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let clean = bench.ready(lot, Purpose::Release);
    let marked = bench.ready(lot, Purpose::RetainCheck);
    bench.corrects("rafe.tolland", marked, "assay", 1, "100.4");
    bench.checks("ilse.brandt", marked, "assay");
    let qa = lab.reviewer();
    let page = format!("/review/{marked}");
    let short = {
        let form = qa.get(&page).form(&format!("{page}/answers"));
        let field = form.iter().find(|(name, _)| name.starts_with("because.")).unwrap().0.clone();
        qa.submits(&page, &format!("{page}/answers"), &[(&field, "it is fine")])
    };
    assert_eq!(short.status, 409);
    assert!(short.html().contains("value=\"it is fine\""), "what was typed is kept");
    answers_acceptable(&qa, &page);
    agrees(&qa, clean);
    agrees(&qa, marked);
    // A list put together by hand with both is refused whole.
    let mut form = qa.get("/review/sign").form("/review/sign");
    form.retain(|(name, _)| name != "user_name" && name != "password");
    let digest = lab.app.db.read(|reader| supernate::store::review::digest(reader, marked)).unwrap();
    form.push((format!("sample.{marked}"), digest));
    form.push(("user_name".to_string(), qa.user_name.clone()));
    form.push(("password".to_string(), PASSWORD.to_string()));
    form.push(("statement".to_string(), WHY.to_string()));
    let mixed = qa.posts("/review/sign", &form);
    assert_eq!(mixed.status, 409, "{}", mixed.text());
    assert!(mixed.text().contains("it is signed alone"), "{}", mixed.text());
    qa.sees("/review", "With exceptions (1)");
    signs(&qa, &[]);
    let receipt = signs(&qa, &[("statement", WHY)]);
    assert!(receipt.text().contains(WHY), "{}", receipt.text());
}

#[test]
fn screen_u76_nobody_signs_own_work() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let id = lab.actor("rafe.tolland").account;
    let page = format!("/people/{id}");
    lab.administrator().does(
        &page,
        &format!("{page}/roles"),
        &[("role.analyst", "yes"), ("role.QA-reviewer", "yes"), ("reason", "stands in for the reviewer")],
    );
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let page = format!("/review/{sample}");
    lab.analyst().sees(&page, "You read or checked something of TW-104-0640");
    let refused = lab.analyst().submits(&page, &format!("{page}/agree"), &[]);
    assert_eq!(refused.status, 403);
    assert!(refused.text().contains("Another QA reviewer takes it"), "{}", refused.text());
    let who = "With a role for it and no part in the work: Ada Whitlock, Per Lindqvist.";
    assert!(refused.text().contains(who), "{}", refused.text());
    lab.reviewer().sees(&page, "decided on a pull — refused: You read or checked something of TW-104-0640");
}

#[test]
fn a_correction_after_signing_is_shown_and_needs_a_new_review_and_signature() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    agrees(&qa, sample);
    signs(&qa, &[]);
    bench.corrects("rafe.tolland", sample, "assay", 1, "100.4");
    let queue = qa.sees("/review", "Changed after signing.");
    assert!(queue.text().contains("With exceptions (1)"), "{}", queue.text());
    let page = format!("/review/{sample}");
    let seen = qa.sees(&page, "Changed after signing: the signature stands over the content as it was");
    assert!(!seen.text().contains("does not match"), "the signature still matches what it was given over");
    bench.checks("ilse.brandt", sample, "assay");
    for _ in 0..2 {
        answers_acceptable(&qa, &page);
    }
    agrees(&qa, sample);
    signs(&qa, &[("statement", WHY)]);
    let again = qa.sees(&page, "Version 2 by correction of Rafe Tolland");
    assert_eq!(again.text().matches("Reviewed, agrees with the raw readings").count(), 2);
}

#[test]
fn screen_u79_wrong_passwords_wait_and_the_list_is_kept() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    agrees(&qa, sample);
    for _ in 0..6 {
        let fields = [("user_name", qa.user_name.as_str()), ("password", "not the password at all")];
        let seen = qa.submits("/review/sign", "/review/sign", &fields);
        assert_eq!(seen.status, 409);
        assert!(seen.text().contains("The user name or the password is not right"), "{}", seen.text());
    }
    let fields = [("user_name", qa.user_name.as_str()), ("password", PASSWORD)];
    assert_eq!(qa.submits("/review/sign", "/review/sign", &fields).status, 409, "also the right one waits");
    qa.sees("/review/sign", "1 sample agreed to, not signed yet.");
    lab.later_minutes(20);
    signs(&qa, &[]);
}

#[test]
fn a_reviewer_sends_named_tests_back_and_may_still_sign_later() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    let page = format!("/review/{sample}");
    let action = format!("{page}/send-back");
    let none = qa.submits(&page, &action, &[("why", "read the second weighing again")]);
    assert_eq!(none.status, 409);
    assert!(none.text().contains("Tick at least one test"), "{}", none.text());
    let test = format!("test.{}", bench.test(sample, "assay"));
    let queue = qa.does(&page, &action, &[(&test, "yes"), ("why", "read the second weighing again")]);
    assert!(queue.text().contains("Sent back"), "{}", queue.text());
    qa.sees(
        &page,
        "sent back by Ada Whitlock, 1 Dec 2026, 09:00 (+00:00), because read the second weighing again",
    );
    bench.completes_again("rafe.tolland", sample, "assay");
    bench.checks("ilse.brandt", sample, "assay");
    agrees(&qa, sample);
    signs(&qa, &[]);
}

#[test]
fn not_yet_takes_a_sample_off_the_list() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let qa = lab.reviewer();
    agrees(&qa, sample);
    qa.sees("/review/sign", "1 sample agreed to");
    let page = format!("/review/{sample}");
    qa.does(&page, &format!("{page}/agree"), &[("decision", "not yet")]);
    qa.sees("/review/sign", "You have agreed to nothing");
}

#[test]
fn an_analyst_reads_the_review_but_decides_nothing() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let seen = lab.analyst().sees(&format!("/review/{sample}"), "A QA reviewer decides.");
    assert!(!seen.html().contains("/agree"));
    assert_eq!(lab.analyst().get("/review/sign").status, 403);
}

#[test]
fn screen_u111_a_pull_is_reviewed_with_the_charts_of_its_lot_and_condition() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let study = world::study_of(&lab, lot, &[]);
    let readings = [
        ("Initial", "2026-12-01T10:00:00Z", ["100.1", "100.3"], ["1.11", "1.13"]),
        ("3 months", "2027-03-01T10:00:00Z", ["99.9", "100.2"], ["1.12", "1.11"]),
        ("6 months", "2027-06-01T10:00:00Z", ["99.8", "99.9"], ["1.10", "1.12"]),
        ("9 months", "2027-09-01T10:00:00Z", ["91.2", "90.8"], ["1.12", "1.13"]),
    ];
    let mut last = 0;
    for (age, at, assay, density) in readings {
        lab.clock(at);
        last = world::take(&lab, &world::pull(&lab, study, 1, age));
        bench.completes("rafe.tolland", last, "assay", &assay);
        bench.completes("rafe.tolland", last, "density", &density);
        bench.checks("ilse.brandt", last, "assay");
        bench.checks("ilse.brandt", last, "density");
    }
    let qa = lab.reviewer();
    let page = qa.sees(&format!("/review/{last}"), "TW-104-0640, 9 months, 25 °C/60 % RH upright");
    let finding = "Assay, lot TW-104-0640, 25 °C/60 % RH upright: 4 pulls, 0–9 months. Last 91.0, limits 95.0–105.0. \
                   1 out of specification: 91.0 at 9 months.";
    for words in [
        finding,
        "▼ 91.0 below 95.0",
        "The 4 numbers behind this chart",
        "Pulled in its window",
        "Right container",
    ] {
        assert!(page.text().contains(words), "{words}: {}", page.text());
    }
    assert!(!page.text().contains("Without a value"), "pulls to come are no gaps: {}", page.text());
    let html = page.html();
    assert!(
        html.contains("id=\"exception-0-chart-assay--title\"") && html.contains("id=\"chart-assay--title\"")
    );
    let ids: Vec<&str> = html.split(" id=\"").skip(1).filter_map(|rest| rest.split('"').next()).collect();
    let mut once = ids.clone();
    once.sort();
    once.dedup();
    assert_eq!(ids.len(), once.len(), "every id stands once: {ids:?}");
    let queue = qa.sees("/review", "With exceptions (1)");
    assert!(queue.text().contains("Without exceptions (3)"), "{}", queue.text());
    assert!(queue.text().find("91.0").unwrap() < queue.text().find("Without exceptions").unwrap());
}
