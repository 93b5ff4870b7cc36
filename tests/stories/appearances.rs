//! Appearance is one test with two parts: as stored, and after the label shake; each grade may show a photograph.

use supernate::domain::method::{MethodContent, TestKind, preset};
use supernate::store;

use crate::benches::{at_bench, page, records};
use crate::support::{Lab, world};

const KINDS: [TestKind; 2] = [TestKind::Appearance, TestKind::Redispersibility];
const AS_STORED: [(&str, &str); 2] =
    [("reading.0.1.clarity", "1"), ("reading.0.1.remarks", "a thin clear layer on top")];
const SHAKEN: [(&str, &str); 3] = [
    ("reading.0.1.caking", "1"),
    ("reading.0.1.colour", "match"),
    ("reading.0.1.remarks_after_shake", "smooth"),
];

/// A release sample whose appearance has two parts; colour and caking are graded after the label shake.
fn two_parts(lab: &Lab) -> (i64, Vec<i64>, String) {
    let content = preset::of(TestKind::Appearance);
    world::method_with(lab, "M-APPEARANCE", "appearance by grades", content);
    at_bench(lab, &KINDS)
}

fn turns_all(lab: &Lab, test: i64, label: &str) {
    for container in ["1", "2", "3"] {
        let page = format!("{}&container={container}", page(test, label));
        let fields = [("inversions", "5"), ("end", "uniform")];
        let seen = lab.analyst().submits(&page, &format!("/tests/{test}/inversions"), &fields);
        assert_eq!(seen.status, 303, "{}", seen.text());
    }
}

/// Decision A4: two tasks of one test, opened in their order, judged apart.
#[test]
fn an_appearance_is_graded_as_stored_and_again_after_the_label_shake() {
    let lab = Lab::new();
    let (sample, tests, label) = two_parts(&lab);
    let (analyst, appearance) = (lab.analyst(), page(tests[0], &label));
    let seen = analyst.sees(&appearance, "As stored");
    for words in ["After the label shake", "as stored, then after the label shake"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let why = "comes after appearance by grades, as stored, which is still open";
    assert_eq!(seen.text().matches(why).count(), 1, "said once: {}", seen.text());
    let early = records(&analyst, &appearance, &SHAKEN);
    assert_eq!(early.status, 409, "{}", early.text());
    assert_eq!(records(&analyst, &appearance, &AS_STORED).status, 303);
    let unfinished = records(&analyst, &appearance, &[("then", "complete")]);
    assert_eq!(unfinished.status, 409);
    assert!(unfinished.text().contains("Caking (after the label shake)"), "{}", unfinished.text());

    let tasks = analyst.get(&format!("/samples/{sample}?label={label}"));
    for words in
        ["appearance by grades, as stored 1 of 1 readings", "appearance by grades, after the label shake"]
    {
        assert!(tasks.text().contains(words), "{words}: {}", tasks.text());
    }
    turns_all(&lab, tests[1], &label);
    assert_eq!(records(&analyst, &appearance, &SHAKEN).status, 303);
    analyst.does(&appearance, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    let results = lab.app.db.read(|reader| store::result::of_test(reader, tests[0])).unwrap();
    let told: Vec<_> = results.iter().map(|one| (one.component.as_str(), one.verdict.as_str())).collect();
    assert_eq!(told, [("as stored", "no limit"), ("after the label shake", "out of specification")]);
    analyst.sees(&appearance, "Caking: slight (1), not none (0)");
    lab.second_analyst().sees(&format!("/checks/{}", tests[0]), "after the label shake");
}

/// Once the container was shaken, what it looked like as stored is past.
#[test]
fn the_part_as_stored_is_past_once_the_container_was_shaken() {
    let lab = Lab::new();
    let (sample, tests, label) = two_parts(&lab);
    let analyst = lab.analyst();
    let (path, action) = (format!("/samples/{sample}"), format!("/samples/{sample}/stages"));
    analyst.does(&path, &action, &[("stage", "before disturbance"), ("why", "the crate fell over")]);
    turns_all(&lab, tests[1], &label);
    let appearance = page(tests[0], &label);
    let late = records(&analyst, &appearance, &AS_STORED);
    assert_eq!(late.status, 409, "{}", late.text());
    assert_eq!(records(&analyst, &appearance, &SHAKEN).status, 303);
    analyst.does(&appearance, &format!("/tests/{}", tests[0]), &[("then", "complete")]);
    let results = lab.app.db.read(|reader| store::result::of_test(reader, tests[0])).unwrap();
    assert_eq!(results[0].verdict, "no reportable value");
    assert_eq!(results[1].verdict, "out of specification");
}

/// A method of one part is written, read and judged as before.
#[test]
fn a_method_of_one_part_keeps_its_document() {
    let content = world::method_content(TestKind::Appearance);
    let written = serde_json::to_string(&content).unwrap();
    assert!(!written.contains("is_after_shake") && !written.contains("photo"), "{written}");
    assert_eq!(serde_json::from_str::<MethodContent>(&written).unwrap(), content);
    assert_eq!(content.stages().len(), 1);
}
