//! Methods: a manager writes one, signs it, and a second person approves it.

use supernate::domain::method::TestKind;
use supernate::store;

use crate::support::{Lab, Seen, world};

/// The version page a form led to.
fn path(seen: &Seen) -> String {
    let path = seen.location.clone().unwrap();
    assert!(path.starts_with("/method-versions/"), "{path}");
    path
}

const ASSAY: [(&str, &str); 14] = [
    ("code", "M-021"),
    ("name", "Assay by weight and dilution"),
    ("unit", "%"),
    ("input.1.code", "found"),
    ("input.1.label", "Found"),
    ("input.1.unit", "mg/mL"),
    ("input.1.decimals", "2"),
    ("input.1.example", "39.50"),
    ("input.2.code", "declared"),
    ("input.2.label", "Declared"),
    ("input.2.unit", "mg/mL"),
    ("input.2.decimals", "2"),
    ("input.2.example", "40.00"),
    ("formula", "found × 100 ÷ declared"),
];

fn assay(result: &str) -> Vec<(&str, &str)> {
    ASSAY.iter().copied().chain([("example_result", result)]).collect()
}

#[test]
fn a_method_is_written_signed_and_approved_by_a_second_person() {
    let lab = Lab::new();
    lab.manager().sees("/methods", "No method is written yet");
    lab.manager().sees("/methods/new", "Choose the kind of test first");
    let made = lab.manager().does(
        "/methods/new?kind=ph",
        "/methods/new",
        &[("code", "M-014"), ("name", "pH of the whole suspension")],
    );
    let page = path(&made);
    lab.manager().sees(&page, "A draft: nothing can rest on it yet");
    lab.manager().sees(&page, "the mean, while the range is at most 0.10");
    let sign = format!("{page}/sign");
    lab.manager().signs(&page, &sign, &[]);
    let seen = lab.manager().sees(&page, "Signed by its author, waiting for a second person");
    assert!(!seen.html().contains(&format!("action=\"{sign}\"")), "the author sees no approval form");
    lab.person("otis.vane").signs(&page, &sign, &[]);
    let seen = lab.auditor().sees(&page, "Approved for use");
    assert!(seen.text().contains("Written by me and complete"));
    assert!(seen.text().contains("approved a method version"));
    lab.analyst().sees("/methods", "M-014");
    assert_eq!(lab.manager().get(&format!("{page}/edit")).status, 409);
}

#[test]
fn a_formula_is_signed_only_when_its_worked_example_reproduces() {
    let lab = Lab::new();
    let made = lab.manager().does("/methods/new?kind=numeric", "/methods/new", &assay("98.7"));
    let page = path(&made);
    lab.manager().sees(&page, "It does not reproduce yet. The worked example gives 98.8, not 98.7.");
    let sign = format!("{page}/sign");
    let refused = lab.manager().submits(
        &page,
        &sign,
        &[("user_name", "maren.oddy"), ("password", crate::support::PASSWORD)],
    );
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("The worked example gives 98.8, not 98.7"), "{}", refused.text());
    let edit = format!("{page}/edit");
    lab.manager().does(&edit, &edit, &[("example_result", "98.8")]);
    lab.manager().sees(&page, "It reproduces.");
    lab.manager().signs(&page, &sign, &[]);
    lab.person("otis.vane").signs(&page, &sign, &[]);
    let approved = lab.app.db.read(store::method::approved_versions).unwrap();
    assert_eq!((approved.len(), approved[0].code.as_str()), (1, "M-021"));
}

#[test]
fn every_fault_of_the_form_shows_at_once_and_nothing_typed_is_lost() {
    let lab = Lab::new();
    let mut fields = assay("");
    fields.push(("replicates", "two"));
    fields.push(("input.2.decimals", ""));
    fields.push(("component.1.title", "Degradation product A"));
    let seen = lab.manager().submits("/methods/new?kind=numeric", "/methods/new", &fields);
    assert_eq!(seen.status, 422);
    let text = seen.text();
    for words in [
        "Replicates: “two” is not a number",
        "Decimals, row 2 is empty",
        "Result of the worked example is empty",
        "Code, row 1 is empty",
    ] {
        assert!(text.contains(words), "{words}\n{text}");
    }
    assert!(seen.html().contains("value=\"found × 100 ÷ declared\""));
    let crossed = [("code", "M-1"), ("name", "pH"), ("possible_least", "14"), ("possible_most", "0")];
    let seen = lab.manager().submits("/methods/new?kind=ph", "/methods/new", &crossed);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("The least possible reading, 14, is not below the greatest, 0"));
    assert_eq!(lab.analyst().get("/methods/new?kind=ph").status, 403);
    assert_eq!(lab.manager().get("/methods/new?kind=smell").status, 200);
}

/// req_O10: a mean needs a greatest spread.
#[test]
fn req_o10_a_mean_without_a_greatest_spread_is_refused() {
    let lab = Lab::new();
    let fields = [("code", "M-1"), ("name", "pH"), ("range_at_most", ""), ("rsd_at_most", "")];
    let seen = lab.manager().submits("/methods/new?kind=ph", "/methods/new", &fields);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("A mean is reported only while the values agree"));
}

#[test]
fn grades_are_written_row_by_row_under_their_attribute() {
    let lab = Lab::new();
    let rows = [
        ("code", "M-002"),
        ("name", "Appearance"),
        ("grade.11.attribute", "odour"),
        ("grade.11.title", "Odour"),
        ("grade.11.code", "usual"),
        ("grade.11.word", "as usual"),
        ("grade.11.anchor", "As the retained lot smells."),
        ("grade.12.code", "foreign"),
        ("grade.12.word", "foreign"),
        ("grade.12.anchor", "Another smell is there."),
    ];
    let made = lab.manager().does("/methods/new?kind=appearance", "/methods/new", &rows);
    let page = path(&made);
    let seen = lab.manager().sees(&page, "As the retained lot smells.");
    assert!(seen.text().contains("Print reads through it."), "the usual attributes are there");
    let edit = format!("{page}/edit");
    let emptied = [("grade.12.code", ""), ("grade.12.word", ""), ("grade.12.anchor", "")];
    let refused = lab.manager().submits(&edit, &edit, &emptied);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("“Odour” has fewer than two grades"));
}

#[test]
fn a_new_version_starts_from_the_newest_and_two_writers_do_not_overwrite_each_other() {
    let lab = Lab::new();
    let first = world::approved_method(&lab, TestKind::Viscosity);
    let method = lab.app.db.read(|reader| store::method::version(reader, first)).unwrap().method;
    let draft = format!("/methods/{method}/draft");
    let made = lab.manager().does(&draft, &draft, &[("reason", "a wider cup"), ("spindle", "3")]);
    let page = path(&made);
    lab.manager().sees(&page, "Spindle 3");
    let again = lab.manager().submits(&draft, &draft, &[("reason", "another one")]);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("There is a draft already, version 2"));

    let edit = format!("{page}/edit");
    let mut stale = lab.manager().get(&edit).form(&edit);
    lab.person("otis.vane").does(&edit, &edit, &[("speed_rpm", "30")]);
    stale.retain(|(name, _)| name != "speed_rpm");
    stale.push(("speed_rpm".to_string(), "20".to_string()));
    let refused = lab.manager().posts(&edit, &stale);
    assert_eq!(refused.status, 409);
    assert!(refused.text().contains("Version 2 has changed"), "{}", refused.text());
    assert!(refused.text().contains("speed rpm: 30 Yours, not recorded"), "{}", refused.text());
    let newest = lab.app.db.read(|reader| store::method::newest_approved(reader, method)).unwrap();
    assert_eq!(newest.unwrap().number, 1, "a draft is not used");
}

/// Two versions of a method side by side, as formulations show theirs.
#[test]
fn two_versions_of_a_method_show_the_fields_that_differ() {
    let lab = Lab::new();
    let fields = [("code", "M-014"), ("name", "pH of the whole suspension")];
    let page = path(&lab.manager().does("/methods/new?kind=ph", "/methods/new", &fields));
    let sign = format!("{page}/sign");
    lab.manager().signs(&page, &sign, &[]);
    lab.person("otis.vane").signs(&page, &sign, &[]);
    let draft = "/methods/1/draft";
    let changed = [("reason", "a longer wait at the meter"), ("hands_on_minutes", "25")];
    let second = path(&lab.manager().does(draft, draft, &changed));
    let seen = lab.auditor().sees(&second, "Compare with the version before");
    let compare = seen.links().into_iter().find(|path| path.contains("/compare?")).unwrap();
    let seen =
        lab.auditor().sees(&compare, "1 difference between version 1 (approved) and version 2 (draft).");
    assert!(seen.text().contains("Hands on minutes") && seen.text().contains("25"), "{}", seen.text());
    assert!(lab.auditor().sees("/methods/1", "Compare the newest two").links().contains(&compare));
    assert_eq!(lab.auditor().get("/methods/1/compare?old=1").status, 400);
    assert_eq!(lab.auditor().get("/methods/1/compare?old=1&new=99").status, 404);
}
