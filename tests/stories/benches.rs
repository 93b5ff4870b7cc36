//! The bench: label, instrument, readings, completing a test.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::support::{Lab, Person, Seen, world};

/// A release sample with one test of this kind, its page with the right label.
pub fn at_bench(lab: &Lab, kinds: &[TestKind]) -> (i64, Vec<i64>, String) {
    let lot = world::lot_for_market(lab, "TW-640", "GB");
    let (sample, tests) = world::release_sample(lab, lot, kinds);
    (sample, tests, "TW-640-R1".to_string())
}

pub fn page(test: i64, label: &str) -> String {
    format!("/tests/{test}?label={label}")
}

/// Types readings into the boxes of a test page and presses "Record readings".
pub fn records(person: &Person<'_>, page: &str, fields: &[(&str, &str)]) -> Seen {
    let action = page.split('?').next().unwrap();
    person.submits(page, action, fields)
}

pub const PH: [(&str, &str); 4] = [
    ("reading.0.1.value", "6.83"),
    ("reading.0.1.temperature_c", "22.0"),
    ("reading.0.2.value", "6.81"),
    ("reading.0.2.temperature_c", "22.1"),
];

#[test]
fn readings_are_recorded_and_the_completed_test_is_judged() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (sample, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    analyst.sees(&page, "buffers 4.01, 7.00; slope 98.6");
    let seen = records(&analyst, &page, &PH);
    assert_eq!(seen.status, 303, "{}", seen.text());
    let seen = analyst.sees(&page, "6.20 to 7.20");
    assert!(seen.html().contains(">6.820</output>"), "{}", seen.html());
    let action = format!("/tests/{}", tests[0]);
    let done = analyst.does(&page, &action, &[("then", "complete")]);
    assert_eq!(done.location.as_deref(), Some(format!("/samples/{sample}").as_str()));
    assert!(done.text().contains("Waiting for check"), "{}", done.text());
    let seen = analyst.sees(&page, "conforms");
    assert!(seen.text().contains("6.82"), "{}", seen.text());
    lab.auditor().sees(&page, "completed a test: TW-640-R1, pH: version 1, 6.82 conforms");
}

#[test]
fn a_wrong_label_shows_no_grid_and_records_nothing() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (sample, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let analyst = lab.analyst();
    for (path, status) in [
        (format!("/tests/{}", tests[0]), 200),
        (page(tests[0], "TW-999-R1"), 409),
        (page(tests[0], "R1"), 409),
        (format!("/samples/{sample}?label=nonsense"), 409),
    ] {
        let seen = analyst.get(&path);
        assert_eq!(seen.status, status, "{path}");
        assert!(!seen.html().contains("data-record-each"), "{path}");
    }
    let right = analyst.get(&page(tests[0], &label));
    let mut pairs = right.form(&format!("/tests/{}", tests[0]));
    pairs.retain(|(name, _)| name != "label" && name != "reading.0.1.value");
    pairs.push(("label".to_string(), "TW-999-R1".to_string()));
    pairs.push(("reading.0.1.value".to_string(), "6.83".to_string()));
    let seen = analyst.posts(&format!("/tests/{}", tests[0]), &pairs);
    assert_eq!(seen.status, 409, "{}", seen.text());
    assert!(seen.text().contains("is not of this sample"), "{}", seen.text());
    assert!(lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap().is_empty());
}

#[test]
fn every_error_comes_at_once_and_what_was_typed_stays() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let page = page(tests[0], &label);
    let seen = records(
        &lab.analyst(),
        &page,
        &[
            ("reading.0.1.value", "68.3"),
            ("reading.0.1.temperature_c", "warm"),
            ("reading.0.2.value", "6.8.1"),
            ("reading.0.2.temperature_c.unread", "no"),
        ],
    );
    assert_eq!(seen.status, 422);
    let text = seen.text();
    for words in [
        "68.3 cannot be; it must lie between 0 and 14",
        "“warm” is not a number",
        "“6.8.1” has more than one decimal mark",
        "Say why in at least 10 characters",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
    assert!(seen.html().contains("value=\"6.8.1\""));
    assert!(seen.title().starts_with("Error: "));
}

#[test]
fn unknown_fields_are_refused() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let page = page(tests[0], &label);
    for field in ["account", "reading.0.3.value", "reading.0.1.spindle", "hint_answer", "act"] {
        let seen = records(&lab.analyst(), &page, &[("reading.0.1.value", "6.83"), (field, "1")]);
        assert_eq!(seen.status, 400, "{field}");
    }
    assert!(lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap().is_empty());
}

#[test]
fn an_unqualified_person_and_an_unchecked_meter_are_stopped_by_name() {
    let lab = Lab::new();
    let meter = world::instrument(&lab, "PH-03", "pH meter").to_string();
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (page, action) = (page(tests[0], &label), format!("/tests/{}", tests[0]));
    let shown = lab.analyst().get(&page);
    lab.clock("2026-12-02T09:00:00Z");
    let seen = lab.analyst().get(&page);
    assert!(!seen.html().contains("data-record-each"), "{}", seen.text());
    let send = |person: &Person<'_>| {
        let mut pairs = shown.form(&action);
        let token = person.get("/me").form("/sign-out")[0].1.clone();
        pairs.retain(|(name, _)| !["form_token", "submission", "instrument"].contains(&name.as_str()));
        pairs.retain(|(name, _)| !name.starts_with("reading.0.1.value"));
        pairs.push(("form_token".to_string(), token));
        pairs.push(("instrument".to_string(), meter.clone()));
        pairs.push(("reading.0.1.value".to_string(), "6.83".to_string()));
        person.posts(&action, &pairs)
    };
    let refused = send(&lab.analyst());
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("PH-03"), "{}", refused.text());
    lab.clock("2027-12-03T09:00:00Z");
    let refused = send(&lab.analyst());
    assert_eq!(refused.status, 409, "{}", refused.text());
    assert!(refused.text().contains("ended on 1 Dec 2027"), "{}", refused.text());
    assert!(lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap().is_empty());
}

#[test]
fn a_value_that_draws_a_question_holds_back_only_completion() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, page) = (lab.analyst(), page(tests[0], &label));
    let action = format!("/tests/{}", tests[0]);
    let mut fields = PH.to_vec();
    fields[2] = ("reading.0.2.value", "6.8");
    assert_eq!(records(&analyst, &page, &fields).status, 303);
    let seen = analyst.sees(&page, "Is 6.8 right? This method reads to 0.01");
    let refused = analyst.submits(&page, &action, &[("then", "complete")]);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("A value drew a question"), "{}", refused.text());
    let reading = lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap();
    let asked = reading.iter().find(|one| one.has_open_question()).unwrap().id.to_string();
    let questions = format!("{action}/questions");
    let mut pairs = seen.form(&questions);
    pairs.push(("answer".to_string(), asked));
    assert_eq!(analyst.posts(&questions, &pairs).status, 303);
    analyst.does(&page, &action, &[("then", "complete")]);
    analyst.sees(&page, "Kept as it is by Rafe Tolland");
}

#[test]
fn the_same_submit_five_times_makes_one_record() {
    let lab = Lab::new();
    world::instrument(&lab, "PH-03", "pH meter");
    let (_, tests, label) = at_bench(&lab, &[TestKind::Ph]);
    let (analyst, action) = (lab.analyst(), format!("/tests/{}", tests[0]));
    let mut pairs = analyst.get(&page(tests[0], &label)).form(&action);
    pairs.retain(|(name, _)| !name.starts_with("reading.0.1.value"));
    pairs.push(("reading.0.1.value".to_string(), "6.83".to_string()));
    let answers: Vec<_> = (0..5).map(|_| analyst.posts(&action, &pairs)).collect();
    for answer in &answers {
        assert_eq!((answer.status, &answer.location), (303, &answers[0].location), "{}", answer.text());
    }
    assert_eq!(lab.app.db.read(|reader| store::reading::of_test(reader, tests[0])).unwrap().len(), 1);
}

#[test]
fn a_pulled_container_is_found_by_its_label_in_a_bench_session() {
    let lab = Lab::new();
    let kinds = [TestKind::Appearance, TestKind::Redispersibility];
    let study = world::study(&lab, "TW-700", &kinds);
    let pull = world::pull(&lab, study, 1, "Initial");
    let sample = world::take(&lab, &pull);
    for kind in kinds {
        let version = world::approved_method(&lab, kind);
        world::qualify(&lab, "rafe.tolland", version);
    }
    let bench = lab.app.db.read(|reader| store::bench::sample(reader, sample)).unwrap();
    let analyst = lab.analyst();
    analyst.sees("/bench", &bench.number);
    let (appearance, turning) = (&bench.tests[0], &bench.tests[1]);
    let session = format!("/bench/session?method={}", appearance.method_version);
    let wrong = analyst.get(&format!("{session}&label=ZZ-9999"));
    assert_eq!(wrong.status, 409, "{}", wrong.text());
    let label = &bench.containers[0].label;
    let found = analyst.get(&format!("{session}&label={label}"));
    assert_eq!(found.status, 303, "{}", found.text());
    let page = found.location.unwrap();
    let fields: Vec<(String, &str)> = bench
        .slots(appearance)
        .iter()
        .filter(|slot| slot.is_required)
        .map(|slot| {
            let grade = if slot.key.field == "colour" { "match" } else { "0" };
            (slot.key.name(), grade)
        })
        .collect();
    let mut fields: Vec<(&str, &str)> = fields.iter().map(|(name, grade)| (name.as_str(), *grade)).collect();
    fields.push(("then", "complete"));
    let seen = records(&analyst, &page, &fields);
    assert_eq!((seen.status, seen.location.as_deref()), (303, Some(session.as_str())), "{}", seen.text());
    let readings = lab.app.db.read(|reader| store::reading::of_test(reader, appearance.id)).unwrap();
    assert_eq!(readings[0].container, Some(bench.containers[0].id));
    assert!(analyst.get(&format!("/tests/{}?label={label}", turning.id)).html().contains("data-counter"));
}
