//! Retain samples: kept twice what all tests take, looked at once a year, discarded after their day.

use crate::support::{Lab, Seen, world};

const KEPT: [(&str, &str); 5] = [
    ("containers", "4"),
    ("quantity", "800"),
    ("unit", "mL"),
    ("test_quantity", "400"),
    ("location", "retain room, shelf 4"),
];

fn kept(lab: &Lab) -> (i64, String) {
    let lot = world::lot(lab, "TW-104-0640");
    let page = format!("/lots/{lot}/retains/new");
    (lot, lab.operator().does(&page, &page, &KEPT).location.unwrap())
}

fn records(lab: &Lab, path: &str, fields: &[(&str, &str)]) -> Seen {
    lab.analyst().submits(path, &format!("{path}/events"), fields)
}

#[test]
fn a_retain_is_looked_at_each_year_and_a_change_opens_a_deviation() {
    let lab = Lab::new();
    let (lot, path) = kept(&lab);
    lab.operator().sees(&path, "Next look 1 Dec 2027, due in 365 days");
    lab.operator().sees(&format!("/lots/{lot}"), "TW-104-0640-K1");
    lab.clock("2027-12-02T09:00:00Z");
    lab.manager().sees("/retains", "1 are late");
    let looked = [("kind", "looked at"), ("is_changed", "unchanged")];
    assert_eq!(records(&lab, &path, &looked).status, 303);
    lab.manager().sees("/retains", "none is late");
    let taken = [("kind", "taken"), ("containers", "1"), ("note", "for a complaint")];
    assert_eq!(records(&lab, &path, &taken).status, 303);
    lab.operator().sees(&path, "Left 3 of 4 (bottle)");
    let changed = [("kind", "looked at"), ("is_changed", "changed"), ("note", "a hard cake on the bottom")];
    assert_eq!(records(&lab, &path, &changed).status, 303);
    lab.reviewer().sees("/deviations", "Retain TW-104-0640-K1 has changed");
    lab.reviewer().sees(&path, "looked at 2 Dec 2027 changed");
}

#[test]
fn every_fault_of_a_retain_has_its_sentence() {
    let lab = Lab::new();
    let (lot, path) = kept(&lab);
    let page = format!("/lots/{lot}/retains/new");
    let keep = |change: &[(&str, &str)]| {
        let mut fields = KEPT.to_vec();
        fields.retain(|(name, _)| !change.iter().any(|(other, _)| other == name));
        fields.extend_from_slice(change);
        lab.operator().submits(&page, &page, &fields)
    };
    let small = keep(&[("quantity", "799")]);
    assert_eq!(small.status, 409);
    assert!(small.text().contains("at least twice what all tests take: 800 mL, and this is 799 mL"));
    assert!(keep(&[("stored_on", "2 Dec 2026")]).text().contains("The day it was stored lies ahead."));
    assert!(keep(&[("stored_on", "1 Jan 2020")]).text().contains("lies before the lot was made"));
    let bad = keep(&[("containers", "none"), ("quantity", ""), ("location", "")]);
    assert_eq!(bad.status, 422);
    for words in ["“none” is not a number", "Quantity is empty", "Where it stands is empty"] {
        assert!(bad.text().contains(words), "{words}: {}", bad.text());
    }
    let table = [
        (vec![("kind", "looked at")], "Say whether anything has changed."),
        (vec![("kind", "looked at"), ("is_changed", "changed")], "Say what has changed in at least ten"),
        (vec![("kind", "taken"), ("containers", "5")], "Say how many containers were taken: 1 to 4."),
        (vec![("kind", "discarded")], "The lot has no expiry yet"),
        (vec![("kind", "taken"), ("containers", "1"), ("happened_on", "2 Dec 2026")], "This day lies ahead"),
    ];
    for (fields, words) in table {
        let seen = records(&lab, &path, &fields);
        assert_eq!(seen.status, 409, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
}
