//! Whether a result follows the trend: verdicts at the bench and in review, sealed forecasts, the history.

use supernate::acts;
use supernate::domain::moment::{plus_days, plus_months};
use supernate::domain::trend::history::History;
use supernate::domain::version::Versioned;
use supernate::store;

use crate::support::trends::{Aged, Ageing};
use crate::support::{Lab, PASSWORD, world};

/// A history of four lots and a new lot with two pulls as usual.
fn new_lot(ageing: &Ageing<'_>) -> Aged {
    ageing.history(4);
    began(ageing, "TW-104-0801", 300)
}

fn began(ageing: &Ageing<'_>, number: &str, days: i64) -> Aged {
    let lot = ageing.starts(number, days);
    ageing.reads(&lot, 0, "100.1");
    ageing.reads(&lot, 3, "99.6");
    lot
}

fn rule<'a>(judged: &'a [(String, String)], rule: &str) -> &'a str {
    &judged.iter().find(|(known, _)| known == rule).unwrap_or_else(|| panic!("no {rule}: {judged:?}")).1
}

#[test]
fn decision_a13_a_result_is_in_trend_an_alert_or_an_action_by_its_history() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let first = new_lot(&ageing);
    let table = [(&first, "99.3", "in trend"), (&began(&ageing, "TW-104-0802", 301), "98.9", "alert")];
    for (lot, value, verdict) in table {
        let sample = ageing.reads(lot, 6, value);
        assert_eq!(rule(&ageing.judged(sample), "H"), verdict, "{value}");
    }
    let third = began(&ageing, "TW-104-0803", 302);
    let sample = ageing.reads(&third, 6, "98.0");
    assert_eq!(rule(&ageing.judged(sample), "H"), "action");
    // At the bench, in review and on the pull's page.
    let test = ageing.bench.test(sample, "assay");
    let words = "Trend action: 98.0 lies outside";
    let bench = lab.analyst().sees(&format!("/tests/{test}"), words);
    assert!(
        bench.text().contains("the 99 % forecast from 6 other lots and 2 earlier pulls"),
        "{}",
        bench.text()
    );
    lab.manager().sees(&format!("/pulls/{}", ageing.pull(&third, 6).id), words);
    let review = lab.reviewer().sees(&format!("/review/{sample}"), words);
    assert!(review.text().contains("out of trend"), "{}", review.text());
    assert!(
        review.text().contains("Bracket: its forecast") || review.text().contains("bracket: its forecast")
    );
    lab.reviewer().sees("/review", words);
    let how = lab.reviewer().sees(&format!("/trend/tests/{test}"), "Lots used");
    for words in
        ["TW-104-0700", "D, common slope and own level", "this lot, earlier pulls", "HL, the lot’s trend"]
    {
        assert!(how.text().contains(words), "{words}: {}", how.text());
    }
    // An alert is a mark and an action an exception: both are answered at review.
    let flags = lab.app.db.read(|reader| store::flag::of_test(reader, test)).unwrap();
    let trend: Vec<_> = flags.iter().filter(|flag| flag.kind == "out of trend").collect();
    assert_eq!((trend.len(), trend[0].level.as_str()), (1, "exception"));
}

#[test]
fn what_a_verdict_needs_is_named_and_the_lots_own_pulls_stand_in_for_a_history() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let only = ageing.starts("TW-104-0700", 0);
    let expected = [
        (0, "A", "not evaluable"),
        (3, "A", "not evaluable"),
        (6, "A", "not evaluable"),
        (9, "A", "in trend"),
        (12, "A", "in trend"),
        (18, "A", "action"),
    ];
    for (at, (months, rule_name, verdict)) in expected.into_iter().enumerate() {
        let value = if months == 18 { "90.2".to_string() } else { Ageing::usual(0, at, months) };
        let sample = ageing.reads(&only, months, &value);
        assert_eq!(rule(&ageing.judged(sample), rule_name), verdict, "{months} months");
        let test = ageing.bench.test(sample, "assay");
        let page = lab.analyst().get(&format!("/tests/{test}")).text();
        match months {
            0 => assert!(
                page.contains("Trend not evaluable: needs 2 history lots or 4 earlier pulls of the lot."),
                "{page}"
            ),
            9 => assert!(page.contains("Weak: with so few only a gross difference is found."), "{page}"),
            12 => assert!(page.contains("the lot’s own 4 earlier pulls (rule A"), "{page}"),
            _ => {}
        }
        assert!(page.contains("Trend of the lot not evaluable: needs 3 more history lots."), "{page}");
    }
}

#[test]
fn a_sample_without_a_pull_has_no_trend() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = ageing.bench.lot("TW-104-0640");
    let sample = ageing.bench.ready(lot, supernate::domain::sample::Purpose::Release);
    assert_eq!(ageing.judged(sample), []);
    let test = ageing.bench.test(sample, "assay");
    lab.reviewer().sees(&format!("/trend/tests/{test}"), "A sample without a pull has no age");
}

#[test]
fn decision_b6_a_forecast_is_sealed_when_the_window_opens_and_hidden_until_the_reading() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    let due = plus_months(lot.started_on, 6);
    ageing.day(plus_days(due, -1));
    ageing.clock_works();
    let pull = ageing.pull(&lot, 6);
    let is_sealed = || lab.app.db.read(|reader| store::trend::forecast::is_sealed(reader, pull.id)).unwrap();
    assert!(!is_sealed(), "the window is not open yet");
    ageing.day(due);
    assert!(ageing.clock_works() > 0);
    assert!(is_sealed());
    assert_eq!(ageing.clock_works(), 0, "sealed once");
    // The history says that it was sealed, with its digest, by the clock; nobody sees the numbers.
    let history = lab.auditor().sees(&format!("/pulls/{}", pull.id), "sealed forecasts");
    assert!(history.text().contains("The clock"), "{}", history.text());
    let sample = world::take(&lab, &pull);
    let test = ageing.bench.test(sample, "assay");
    let hidden = ["/trend/tests/", "/tests/"].map(|path| format!("{path}{test}"));
    let trend = lab.auditor().get(&hidden[0]).text();
    assert!(trend.contains("No forecast was sealed before the reading"), "{trend}");
    assert!(!trend.contains("98.97"), "{trend}");
    let file = lab.auditor().get(&format!("/lots/{}/file", lot.lot)).text();
    assert!(file.contains("Forecasts sealed before their readings: none recorded."));
    let none = lab.app.db.read(|reader| store::trend::forecast::of_test(reader, test)).unwrap();
    assert!(none.is_empty());
    ageing.bench.completes("rafe.tolland", sample, "assay", &["99.3", "99.3"]);
    let page = lab.analyst().sees(&hidden[1], "Forecast sealed when the window opened, before the reading.");
    assert!(page.text().contains("In trend: 99.3 lies within 98.97 to 99.79"), "{}", page.text());
    let shown = lab.auditor().sees(&hidden[0], "98.97 to 99.79").text();
    let sealed = lab.app.db.read(|reader| store::trend::forecast::of_test(reader, test)).unwrap();
    assert_eq!(sealed.len(), 1);
    assert_eq!(
        sealed[0].digest,
        supernate::domain::digest::sha256_hex(sealed[0].content.as_bytes()),
        "the digest is over the text that was sealed"
    );
    assert!(shown.contains(&sealed[0].digest[..12]), "{shown}");
    let file = lab.auditor().get(&format!("/lots/{}/file", lot.lot)).text();
    assert!(file.contains(&sealed[0].digest), "after the reading it stands in the lot file");
}

#[test]
fn after_a_stop_the_clock_catches_up_and_says_how_late() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    // Two days after the window opened, the pull already taken, not read.
    let sample = ageing.takes(&lot, 6);
    ageing.day(plus_days(plus_months(lot.started_on, 6), 2));
    ageing.clock_works();
    ageing.bench.completes("rafe.tolland", sample, "assay", &["99.3", "99.2"]);
    let test = ageing.bench.test(sample, "assay");
    lab.analyst().sees(&format!("/tests/{test}"), "Forecast sealed 2 days late, before the reading.");
    lab.auditor().sees(&format!("/pulls/{}", ageing.pull(&lot, 6).id), "2 days late");
    // Read before the clock came: a forecast is not sealed afterwards, and that is said.
    let sample = ageing.reads(&lot, 9, "99.1");
    ageing.clock_works();
    let test = ageing.bench.test(sample, "assay");
    lab.analyst().sees(&format!("/tests/{test}"), "Forecast not sealed before the reading.");
    let sealed = lab.app.db.read(|reader| store::trend::forecast::of_test(reader, test)).unwrap();
    assert!(sealed.is_empty());
}

#[test]
fn results_that_arrive_after_the_sealing_enter_the_verdict_and_both_are_shown() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    new_lot(&ageing);
    let late = began(&ageing, "TW-104-0802", 303);
    let waiting = ageing.takes(&late, 6);
    let third = began(&ageing, "TW-104-0803", 310);
    ageing.day(plus_months(third.started_on, 6));
    ageing.clock_works();
    ageing.bench.completes("ilse.brandt", waiting, "assay", &["99.5", "99.5"]);
    let sample = ageing.takes(&third, 6);
    ageing.bench.completes("rafe.tolland", sample, "assay", &["99.2", "99.2"]);
    let test = ageing.bench.test(sample, "assay");
    let page = lab
        .auditor()
        .sees(&format!("/trend/tests/{test}"), "The history has changed since the forecast was sealed");
    assert!(
        page.text().contains("By the sealed forecast it lies within the alert limits"),
        "{}",
        page.text()
    );
    assert!(page.text().contains("sealed 7 Apr 2028"), "{}", page.text());
    assert!(page.text().contains("at the verdict on version 1"), "{}", page.text());
}

#[test]
fn a_correction_is_judged_anew_and_the_first_verdict_stays() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    let sample = ageing.reads(&lot, 6, "98.0");
    assert_eq!(rule(&ageing.judged(sample), "H"), "action");
    ageing.bench.corrects("rafe.tolland", sample, "assay", 0, "99.3");
    ageing.bench.corrects("rafe.tolland", sample, "assay", 1, "99.3");
    assert_eq!(rule(&ageing.judged(sample), "H"), "in trend");
    let versions: Vec<(i64, String)> = ageing
        .verdicts(sample)
        .into_iter()
        .filter(|one| one.rule == "H")
        .map(|one| (one.version, one.verdict))
        .collect();
    assert_eq!(versions.first(), Some(&(3, "in trend".to_string())));
    assert_eq!(versions.last(), Some(&(1, "action".to_string())));
}

#[test]
fn an_early_warning_comes_before_the_limit_is_passed_and_says_what_it_means() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    for (months, value) in [(6, "98.9"), (9, "98.0")] {
        let sample = ageing.reads(&lot, months, value);
        assert_eq!(rule(&ageing.judged(sample), "HS"), "no warning", "{months}");
    }
    let sample = ageing.reads(&lot, 12, "96.6");
    assert_eq!(rule(&ageing.judged(sample), "HS"), "very likely");
    let words = "% probable that the lot’s mean lies outside 95.0 to 105.0 % at expiry";
    for path in [format!("/tests/{}", ageing.bench.test(sample, "assay")), format!("/lots/{}", lot.lot)] {
        let page = lab.reviewer().get(&path).text().replace('\u{202f}', " ");
        assert!(page.contains(words), "{path}: {page}");
        assert!(page.contains("it is no result and no out of specification"), "{path}: {page}");
    }
    let review = lab.reviewer().sees(&format!("/review/{sample}"), "early warning");
    assert!(review.text().contains("Very likely out before expiry"), "{}", review.text());
    lab.manager().sees("/trend", "Early warning, very likely");
    // The result itself conforms.
    let review = review.text();
    assert!(review.contains("Within limits: 1 of 1"), "{review}");
}

/// A second formulation version of the bench's product, approved.
fn second_version(lab: &Lab, ageing: &Ageing<'_>) -> i64 {
    let db = &lab.app.db;
    let first = db
        .read(|reader| store::version::get(reader, Versioned::Formulation, ageing.bench.formulation_version))
        .unwrap();
    let content = first.read().unwrap();
    let author = lab.actor("tomas.reyle");
    let version =
        acts::formulation::draft(db, &author, first.parent, "another supplier of the gum", &content).unwrap();
    world::approve(lab, Versioned::Formulation, version, "tomas.reyle", "ada.whitlock");
    version
}

#[test]
fn versions_declared_one_history_with_a_signature_count_together() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    ageing.history(3);
    let version = second_version(&lab, &ageing);
    let lot = ageing.starts_of("TW-104-0901", 300, version);
    let before = ageing.reads(&lot, 0, "100.0");
    assert_eq!(rule(&ageing.judged(before), "A"), "not evaluable");
    let test = ageing.bench.test(before, "assay");
    lab.reviewer().sees(&format!("/trend/tests/{test}"), "another formulation version");
    let (one, other) =
        (format!("formulation {}", ageing.bench.formulation_version), format!("formulation {version}"));
    let qa = lab.reviewer();
    let fields = |other: &str, why: &str| {
        vec![
            ("one".to_string(), one.clone()),
            ("other".to_string(), other.to_string()),
            ("state".to_string(), "declared".to_string()),
            ("why".to_string(), why.to_string()),
            ("user_name".to_string(), "ada.whitlock".to_string()),
            ("password".to_string(), PASSWORD.to_string()),
        ]
    };
    let why = "the gum of both suppliers meets one monograph; bridging report BR-12";
    let send = |other: &str, why: &str| {
        let fields = fields(other, why);
        let pairs: Vec<(&str, &str)> =
            fields.iter().map(|(name, value)| (name.as_str(), value.as_str())).collect();
        qa.submits("/trend/alike", "/trend/alike", &pairs)
    };
    let same = send(&one, why);
    assert_eq!(same.status, 409, "{}", same.text());
    assert!(same.text().contains("Choose two different versions"), "{}", same.text());
    let short = send(&other, "alike");
    assert!(short.text().contains("at least 20 characters"), "{}", short.text());
    assert_eq!(send(&other, why).status, 303);
    let page = qa.sees("/trend/alike", "one history");
    assert!(page.text().contains("BR-12"), "{}", page.text());
    let again = send(&other, why);
    assert!(again.text().contains("declared alike already"), "{}", again.text());
    // A lab manager may look and not declare.
    let looks = lab.manager().get("/trend/alike");
    assert!(!looks.html().contains("Sign</button>"));
    let after = ageing.reads(&lot, 3, "99.7");
    assert_eq!(rule(&ageing.judged(after), "H"), "in trend");
    let test = ageing.bench.test(after, "assay");
    lab.reviewer().sees(&format!("/trend/tests/{test}"), "TW-104-0702");
    // The verdict given before stays as it is.
    assert_eq!(rule(&ageing.judged(before), "A"), "not evaluable");
    // Withdrawn, the next lot is judged by its own history again.
    let mut back = fields(&other, "the bridging report was found to be about another grade");
    back[2].1 = "withdrawn".to_string();
    let pairs: Vec<(&str, &str)> = back.iter().map(|(name, value)| (name.as_str(), value.as_str())).collect();
    assert_eq!(qa.submits("/trend/alike", "/trend/alike", &pairs).status, 303);
    let last = ageing.reads(&lot, 6, "99.4");
    assert_eq!(rule(&ageing.judged(last), "A"), "not evaluable");
    holds(&lab);
}

/// The whole folder verifies: seals, rows, signatures, trend digests.
fn holds(lab: &Lab) {
    let mut quiet = |_: &str, _: u64| {};
    let files = lab.folder.0.join("files");
    let report = lab.app.db.read(|reader| Ok(store::verify::run(reader, &files, None, &mut quiet))).unwrap();
    assert!(report.holds(), "{:?}", report.findings);
}

#[test]
fn a_person_leaves_a_result_out_of_the_history_with_a_reason_and_takes_it_back() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let history = ageing.history(3);
    let odd = ageing.reads(&history[0], 24, "92.5");
    let lot = began(&ageing, "TW-104-0801", 640);
    let test = ageing.bench.test(odd, "assay");
    let page = format!("/trend/tests/{test}");
    let action = format!("{page}/history");
    let qa = lab.reviewer();
    let short = qa.submits(&page, &action, &[("why", "odd")]);
    assert_eq!(short.status, 409);
    assert!(short.text().contains("at least 20 characters"), "{}", short.text());
    let sample = ageing.reads(&lot, 6, "99.4");
    let how = qa
        .sees(&format!("/trend/tests/{}", ageing.bench.test(sample, "assay")), "stands out: lot TW-104-0700");
    assert!(how.text().contains("It counts until a person leaves it out"), "{}", how.text());
    qa.does(&page, &action, &[("why", "the bottle had leaked, deviation DV-7 names it")]);
    let twice = qa.submits(&page, &action, &[("why", "the bottle had leaked, deviation DV-7 names it")]);
    assert!(twice.text().contains("left out already"), "{}", twice.text());
    let sample = ageing.reads(&lot, 9, "99.1");
    let how = qa.get(&format!("/trend/tests/{}", ageing.bench.test(sample, "assay"))).text();
    assert!(how.contains("left out: the bottle had leaked, deviation DV-7 names it"), "{how}");
    assert!(!how.contains("stands out"), "{how}");
    qa.does(&page, &action, &[("state", "taken back"), ("why", "the deviation was closed: another bottle")]);
    let sample = ageing.reads(&lot, 12, "98.8");
    let how = qa.get(&format!("/trend/tests/{}", ageing.bench.test(sample, "assay"))).text();
    assert!(how.contains("stands out"), "{how}");
    // Only QA decides.
    let refused = lab.manager().posts(&action, &[("component", "0"), ("state", "left out"), ("why", "x")]);
    assert_ne!(refused.status, 303);
    holds(&lab);
}

#[test]
fn the_stored_history_is_enough_to_judge_again() {
    use supernate::domain::trend::TrendLevels;
    use supernate::domain::trend::history::Scale;
    use supernate::domain::trend::judge::{Case, Seen, judge};
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    let sample = ageing.reads(&lot, 6, "98.9");
    let first = ageing.verdicts(sample).into_iter().find(|one| one.rule == "H").unwrap();
    let content =
        lab.app.db.read(|reader| store::trend::history(reader, first.history.unwrap())).unwrap().unwrap();
    assert_eq!(Some(content.digest()), first.history_digest);
    let read = History::read(&content.canonical()).unwrap();
    let case = Case {
        history: &read,
        scale: Scale::AsMeasured,
        days: first.age_days,
        seen: Seen::Exactly("98.9".parse().unwrap()),
        levels: TrendLevels::of_promise(None, 0),
        decimals: 1,
        unit: "%",
        life: None,
    };
    let again = judge(&case);
    assert_eq!(again[0].sentence, first.sentence);
    assert_eq!(again[0].probability.map(|p| p.to_string()), first.probability);
    // Verification knows a history whose text was touched.
    holds(&lab);
}

#[test]
fn expected_and_found_stand_in_one_line() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = new_lot(&ageing);
    ageing.reads(&lot, 6, "98.0");
    let page = lab.manager().sees("/trend", "results judged at 1 %");
    assert!(page.text().contains("1 found; up to"), "{}", page.text());
    assert!(page.text().contains("is ordinary (99 %)"), "{}", page.text());
    assert!(page.text().contains("not evaluable and count in neither number"), "{}", page.text());
    lab.reviewer().sees("/review", "Trend: expected and found");
}

#[test]
fn what_the_tests_suggest_together_stands_with_its_evidence_and_what_is_missing() {
    let lab = Lab::new();
    let ageing = Ageing::new(&lab);
    let lot = ageing.starts("TW-104-0801", 0);
    for (months, value) in [(0, "99.6"), (3, "98.6"), (6, "97.8"), (9, "96.7")] {
        ageing.reads(&lot, months, value);
    }
    let sample = ageing.sample(&lot, 9);
    let pages = [format!("/lots/{}", lot.lot), format!("/review/{sample}")];
    for path in &pages {
        let page = lab.reviewer().sees(path, "What the tests suggest together").text();
        for words in [
            "R14 Point passes, bound does not : suggests that the claimed expiry is not yet proven",
            "last result 96.7 at 9.0 months",
            "sedimentation ratio at two ages; shake count missing",
        ] {
            assert!(page.contains(words), "{path}: {words}: {page}");
        }
        assert!(!page.contains("fault of sampling"), "{path}");
    }
    let settings = "/settings/suggestions";
    let admin = lab.administrator();
    let outside = admin.submits(
        settings,
        settings,
        &[("suggest.r10-first", "7"), ("reason", "stricter for this site")],
    );
    assert_eq!(outside.status, 409);
    assert!(outside.text().contains("outside 10 to 100"), "{}", outside.text());
    admin.does(settings, settings, &[("suggest.r10-first", "100"), ("reason", "stricter for this site")]);
    let page = lab.reviewer().get(&pages[0]).text();
    assert!(page.contains("suggests a fault of sampling or mixing"), "{page}");
}

#[test]
fn a_promise_for_the_lot_is_spread_over_its_planned_pulls() {
    let lab = Lab::new();
    let ageing = Ageing::promising(&lab, "5");
    let lot = new_lot(&ageing);
    let sample = ageing.reads(&lot, 6, "98.0");
    let page =
        lab.analyst().sees(&format!("/tests/{}", ageing.bench.test(sample, "assay")), "the 99.36 % forecast");
    assert!(
        page.text().contains("Promised for the lot: 5 % false actions over 8 planned pulls."),
        "{}",
        page.text()
    );
    let line = lab.reviewer().sees("/trend", "results judged at their own levels").text();
    assert!(line.contains("false actions expected, 1 found"), "{line}");
    // 0.639 % of eight judged results is 0.1, of which up to one is ordinary.
    assert!(line.contains("up to 1 is ordinary (99 %)"), "{line}");
}
