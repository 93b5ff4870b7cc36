//! Appearance is one test with two parts: as stored, and after the label shake; each grade may show a photograph.

use supernate::acts;
use supernate::acts::method::NewMethod;
use supernate::domain::method::{MethodContent, TestKind, preset};
use supernate::domain::version::Versioned;
use supernate::store;

use crate::attachments::{photo, uploads_with};
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

/// Decision A15: the picture stands beside the sentence that anchors the grade, and the signature covers it.
#[test]
fn a_grade_shows_its_reference_photograph_at_the_bench() {
    let lab = Lab::new();
    let manager = lab.manager();
    let new = NewMethod {
        code: "M-APPEARANCE".to_string(),
        name: "appearance by grades".to_string(),
        content: preset::of(TestKind::Appearance),
    };
    let version = acts::method::add(&lab.app.db, &manager.actor(), &new).unwrap();
    let path = format!("/method-versions/{version}");
    let photos = format!("{path}/photos");
    manager.sees(&path, "Add a reference photograph");
    let none = manager.submits(&photos, &photos, &[("grade", "8")]);
    assert_eq!(none.status, 422, "{}", none.text());
    let pdf = uploads_with(&manager, &photos, "a.pdf", b"%PDF-1.7 ... %%EOF", ("grade", "8"));
    assert_eq!(pdf.status, 409, "{}", pdf.text());
    assert!(pdf.text().contains("Choose a photo"), "{}", pdf.text());
    let seen = uploads_with(&manager, &photos, "cake.png", &photo(40, 60), ("grade", "8"));
    assert_eq!((seen.status, seen.location.as_deref()), (303, Some(path.as_str())), "{}", seen.text());
    let replaced = uploads_with(&manager, &photos, "cake2.png", &photo(60, 60), ("grade", "8"));
    assert_eq!(replaced.status, 303, "{}", replaced.text());
    let shown = manager.sees(&path, "reference photograph of caking: hard cake");
    assert_eq!(shown.html().matches(">Photograph<").count(), 1, "{}", shown.text());

    // A form of words keeps the picture.
    let edit = format!("{path}/edit");
    manager.does(&edit, &edit, &[("reason", "clearer words for the film")]);
    assert_eq!(manager.get(&path).html().matches(">Photograph<").count(), 1);
    world::approve(&lab, Versioned::Method, version, "maren.oddy", "otis.vane");
    assert_eq!(manager.get(&photos).status, 409, "what is signed keeps its pictures");
    assert_eq!(lab.analyst().get(&photos).status, 403);

    let (_, tests, label) = at_bench(&lab, &KINDS);
    turned_over(&lab, &tests, &label);
    let bench = lab.analyst().sees(&page(tests[0], &label), "The bed stays on the base whatever is done.");
    let html = bench.html();
    assert!(html.contains("src=\"/attachments/2/preview\""), "{html}");
    assert!(html.contains("Reference photograph of hard cake"));
    assert!(!bench.text().contains("Caking: none"), "the limit stays hidden: {}", bench.text());
    assert_eq!(lab.analyst().get("/attachments/2/preview").status, 200);
    lab.analyst().sees("/attachments/2", "method");
}

/// As stored is recorded and every container is redispersed.
fn turned_over(lab: &Lab, tests: &[i64], label: &str) {
    assert_eq!(records(&lab.analyst(), &page(tests[0], label), &AS_STORED).status, 303);
    turns_all(lab, tests[1], label);
}
