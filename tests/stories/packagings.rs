//! Containers and labels: counted, corrected, reconciled, checked by a second person.

use crate::support::{Lab, Seen, world};

fn labels(lab: &Lab) -> (i64, String) {
    let lot = world::lot(lab, "TW-104-0640");
    let page = format!("/lots/{lot}/packaging");
    lab.operator().sees(&page, "Nothing is counted yet.");
    let fields = [("kind", "label"), ("name", "label 60 x 40, version 3")];
    (lot, lab.operator().does(&page, &page, &fields).location.unwrap())
}

fn counts(lab: &Lab, path: &str, fields: &[(&str, &str)]) -> Seen {
    lab.operator().submits(path, &format!("{path}/counts"), fields)
}

#[test]
fn labels_are_counted_reconciled_and_checked_by_a_second_person() {
    let lab = Lab::new();
    let (lot, path) = labels(&lab);
    for (kind, count) in [("issued", "3000"), ("used", "2900"), ("destroyed", "40")] {
        assert_eq!(counts(&lab, &path, &[("kind", kind), ("count", count)]).status, 303);
    }
    let seen = lab.operator().sees(&path, "Accounted for: 98.00");
    assert!(seen.text().contains("To be checked by a second person."), "{}", seen.text());
    let own = lab.operator().submits(&path, &format!("{path}/check"), &[]);
    assert_eq!(own.status, 403);
    assert!(own.text().contains("A second person checks the reconciliation."), "{}", own.text());
    let fields =
        [("kind", "destroyed"), ("count", "60"), ("supersedes", "3"), ("why", "twenty lay under the table")];
    assert_eq!(counts(&lab, &path, &fields).status, 303);
    let seen = lab.operator().sees(&path, "60, was 40");
    assert!(seen.text().contains("98.67"), "{}", seen.text());
    let checked = lab.manager().does(&path, &format!("{path}/check"), &[]);
    assert!(checked.text().contains("Checked by Maren Oddy."), "{}", checked.text());
    lab.reviewer().sees(&format!("/lots/{lot}/packaging"), "All counts are reconciled and checked.");
    let label = lab.operator().sees(&format!("/lots/{lot}/label"), "Lot TW-104-0640");
    assert!(label.html().contains("Code 128 of TW-104-0640"));
    assert_eq!(counts(&lab, &path, &[("kind", "returned"), ("count", "1")]).status, 303);
    lab.operator().sees(&path, "To be checked by a second person.");
}

#[test]
fn a_reconciliation_outside_its_limits_opens_a_deviation() {
    let lab = Lab::new();
    let (lot, path) = labels(&lab);
    counts(&lab, &path, &[("kind", "issued"), ("count", "3000")]);
    counts(&lab, &path, &[("kind", "used"), ("count", "2900")]);
    let seen = lab.manager().does(&path, &format!("{path}/check"), &[]);
    let words = "2900 of 3000 issued are accounted for, 96.67 % (limits 98.0 to 100.0 %).";
    assert!(seen.text().contains(words), "{}", seen.text());
    lab.operator().sees(&format!("/lots/{lot}"), "open: blocks the release");
    lab.reviewer().sees(&path, "outside: deviation 1");
}

#[test]
fn faulty_counts_and_limits_come_back_with_their_sentences() {
    let lab = Lab::new();
    let (lot, path) = labels(&lab);
    let page = format!("/lots/{lot}/packaging");
    let bad = [("name", ""), ("material_lot", "ML-9"), ("least_percent", "most")];
    let seen = lab.operator().submits(&page, &page, &bad);
    assert_eq!(seen.status, 422);
    for words in
        ["Kind: choose one", "printed item is empty", "There is no material lot ML-9", "“most” is not"]
    {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let turned = [("kind", "label"), ("name", "label"), ("least_percent", "101"), ("most_percent", "100")];
    let seen = lab.operator().submits(&page, &page, &turned);
    assert!(seen.text().contains("Limits lie between 0 and 200 %, the lower one first."), "{}", seen.text());

    assert!(!lab.manager().get(&path).html().contains("/check\""), "nothing to check yet");
    counts(&lab, &path, &[("kind", "issued"), ("count", "10")]);
    let table = [
        (vec![("kind", "used"), ("count", "-1")], 409, "A count is 0 or more."),
        (vec![("kind", "used"), ("count", "1.5")], 422, "Count is a count."),
        (
            vec![("kind", "used"), ("count", "9"), ("supersedes", "1")],
            409,
            "A corrected count keeps its kind",
        ),
        (
            vec![("kind", "issued"), ("count", "9"), ("supersedes", "1")],
            409,
            "Say why the count is corrected",
        ),
    ];
    for (fields, status, words) in table {
        let seen = counts(&lab, &path, &fields);
        assert_eq!(seen.status, status, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
}
