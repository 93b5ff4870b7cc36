//! Material lots: received, released, weighed out of, counted, and stopped where they must be.

use supernate::acts;
use supernate::acts::material_lot::NewTake;
use supernate::domain::act::Act;
use supernate::domain::failure::Failure;
use supernate::domain::reason::Reason;
use supernate::store;

use crate::support::{Lab, PASSWORD, world};

const DELIVERY: [(&str, &str); 8] = [
    ("number", "ML-0042"),
    ("supplier", "Fellside Minerals"),
    ("supplier_lot", "F-118"),
    ("quantity", "25.000"),
    ("unit", "kg"),
    ("retest_on", "1 Jun 2027"),
    ("expires_on", "1 Dec 2028"),
    ("location", "cage 2"),
];

fn received(lab: &Lab) -> (i64, String) {
    let material = world::material(lab, "M-01", "xanthan gum", "suspending agent");
    let id = material.to_string();
    let fields: Vec<(&str, &str)> = DELIVERY.into_iter().chain([("material", id.as_str())]).collect();
    let page = lab.operator().does("/material-lots/new", "/material-lots/new", &fields);
    (material, page.location.unwrap())
}

fn id_of(path: &str) -> i64 {
    path.rsplit('/').next().unwrap().parse().unwrap()
}

fn sign(lab: &Lab, path: &str, status: &str, fields: &[(&str, &str)]) -> crate::support::Seen {
    let page = format!("{path}/status");
    let mut all = vec![("status", status), ("why", "certificate C-118 and identity test agree")];
    all.extend_from_slice(fields);
    all.push(("user_name", "ada.whitlock"));
    all.push(("password", PASSWORD));
    lab.reviewer().submits(&page, &page, &all)
}

/// Weighs out of a material lot as a step does, inside an act of its own.
fn take(
    lab: &Lab,
    material: i64,
    path: &str,
    lot: i64,
    quantity: &str,
    unit: &str,
) -> Result<String, String> {
    let new = NewTake {
        material_lot: id_of(path),
        material,
        lot,
        quantity: quantity.parse().unwrap(),
        unit: unit.to_string(),
    };
    let actor = lab.actor("bea.skelton");
    let taken = lab.app.db.change(&actor, Act::MoveStock, &Reason::none(), |change| {
        acts::material_lot::take_inside(change, &new)
    });
    match taken {
        Ok(taken) => Ok(format!("{} {}, balance {}", taken.quantity, taken.unit, taken.balance)),
        Err(Failure::Refused(refusal)) => Err(refusal.sentence),
        Err(other) => panic!("{other}"),
    }
}

#[test]
fn a_delivery_waits_in_quarantine_until_qa_releases_it_and_its_ledger_follows() {
    let lab = Lab::new();
    let (material, path) = received(&lab);
    let seen = lab.operator().sees(&path, "xanthan gum: is in quarantine.");
    assert!(seen.text().contains("25.000"), "{}", seen.text());
    let lot = world::lot_for_market(&lab, "TW-104-0640", "UK");
    let stopped = take(&lab, material, &path, lot, "400", "g").unwrap_err();
    assert!(stopped.starts_with("ML-0042 is in quarantine. Take a released lot"), "{stopped}");
    lab.auditor().sees("/history", "ML-0042 is in quarantine.");

    assert_eq!(sign(&lab, &path, "released", &[]).status, 303);
    let seen = lab.operator().sees(&path, "xanthan gum: may be dispensed.");
    assert!(seen.text().contains("Status of this material lot set by me, for the stated reason"));
    assert!(!seen.text().contains("does not match"), "{}", seen.text());

    assert_eq!(take(&lab, material, &path, lot, "400.5", "g"), Ok("0.4005 kg, balance 24.5995".to_string()));
    let seen = lab.operator().sees(&path, "dispensed");
    assert!(seen.text().contains("-0.4005 24.5995 TW-104-0640"), "{}", seen.text());
    assert!(lab.app.db.read(|reader| store::stock::of_lot(reader, lot)).unwrap()[0].number == "ML-0042");
    lab.reviewer().sees("/material-lots", "1 of them may be dispensed today");
}

#[test]
fn a_scan_opens_the_material_lot_and_its_label_has_both_codes() {
    let lab = Lab::new();
    let (_, path) = received(&lab);
    let scanned = lab.operator().get("/find?q=ml-0042");
    assert_eq!(scanned.location.as_deref(), Some(path.as_str()));
    let label = lab.operator().sees(&format!("{path}/label"), "xanthan gum (M-01)");
    assert!(label.html().contains("aria-label=\"QR code of ML-0042\""));
    assert!(label.html().contains("aria-label=\"Code 128 of ML-0042\""));
}

#[test]
fn wrong_expired_unreleased_or_too_little_material_is_a_hard_stop() {
    let lab = Lab::new();
    let (material, path) = received(&lab);
    let other = world::material(&lab, "M-02", "bentonite", "suspending agent");
    let lot = world::lot_for_market(&lab, "TW-104-0640", "UK");
    assert_eq!(sign(&lab, &path, "released", &[]).status, 303);
    let table = [
        (
            other,
            "1",
            "kg",
            "ML-0042 is xanthan gum, and the step asks for bentonite. Fetch a lot of bentonite.",
        ),
        (material, "0", "g", "A quantity that moves is more than 0 g."),
        (material, "1", "mL", "ML-0042 is kept in kg and the quantity is in mL. Type it in kg."),
        (
            material,
            "25.001",
            "kg",
            "ML-0042 holds 25 kg and 25.001 kg are asked for. Take another lot for the rest.",
        ),
    ];
    for (asked, quantity, unit, expected) in table {
        let stopped = take(&lab, asked, &path, lot, quantity, unit).unwrap_err();
        assert!(stopped.starts_with(expected), "{stopped}");
    }
    lab.clock("2027-06-02T09:00:00Z");
    let retest = take(&lab, material, &path, lot, "1", "kg").unwrap_err();
    assert!(retest.starts_with("ML-0042 was to be retested on 1 Jun 2027."), "{retest}");
    let again = sign(&lab, &path, "released", &[]);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("ML-0042 is released already."), "{}", again.text());
    assert_eq!(sign(&lab, &path, "released", &[("retest_on", "1 Jun 2028")]).status, 303);
    assert!(take(&lab, material, &path, lot, "1", "kg").is_ok());
    lab.clock("2028-12-02T09:00:00Z");
    let expired = take(&lab, material, &path, lot, "1", "kg").unwrap_err();
    assert!(expired.starts_with("ML-0042 expired on 1 Dec 2028."), "{expired}");
    assert_eq!(sign(&lab, &path, "rejected", &[]).status, 303);
    let rejected = take(&lab, material, &path, lot, "1", "kg").unwrap_err();
    assert!(rejected.starts_with("ML-0042 was rejected."), "{rejected}");
    let back = sign(&lab, &path, "released", &[]);
    assert_eq!(back.status, 409);
    assert!(back.text().contains("A rejected lot stays rejected."), "{}", back.text());
    assert!(back.html().contains("certificate C-118"), "the typed reason is kept");
}

#[test]
fn a_delivery_with_every_fault_comes_back_with_all_its_sentences_and_values() {
    let lab = Lab::new();
    let (material, _) = received(&lab);
    let id = material.to_string();
    let bad = [
        ("material", "99"),
        ("number", ""),
        ("supplier", ""),
        ("supplier_lot", "F-119"),
        ("received_on", "soon"),
        ("quantity", "two"),
        ("location", "cage 2"),
    ];
    let seen = lab.operator().submits("/material-lots/new", "/material-lots/new", &bad);
    assert_eq!(seen.status, 422);
    let words = [
        "Material: choose one of the listed.",
        "as on its label is empty",
        "Supplier is empty",
        "“soon” is not a date",
        "“two” is not a number",
        "Unit: choose one of the listed.",
    ];
    for words in words {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    assert!(seen.html().contains("value=\"F-119\""));
    let refusals = [
        (("number", "ml-0042"), "The number ml-0042 is in use already."),
        (("received_on", "2 Dec 2026"), "The day it was received lies ahead."),
        (("quantity", "0"), "A delivery is more than 0 kg."),
        (("expires_on", "30 Nov 2026"), "The expiry 30 Nov 2026 lies before the day it was received."),
    ];
    for (change, words) in refusals {
        let mut fields: Vec<(&str, &str)> = DELIVERY.to_vec();
        fields.retain(|(name, _)| *name != "number" && *name != change.0);
        fields.extend([("material", id.as_str()), change]);
        if change.0 != "number" {
            fields.push(("number", "ML-0043"));
        }
        let seen = lab.operator().submits("/material-lots/new", "/material-lots/new", &fields);
        assert_eq!(seen.status, 409, "{}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let none: Vec<(&str, &str)> = DELIVERY
        .into_iter()
        .filter(|(name, _)| !["number", "retest_on", "expires_on"].contains(name))
        .chain([("material", id.as_str()), ("number", "ML-0043")])
        .collect();
    let seen = lab.operator().submits("/material-lots/new", "/material-lots/new", &none);
    assert!(seen.text().contains("Fill in the retest date or the expiry"), "{}", seen.text());
    let pairs = lab.analyst().get("/me").form("/sign-out");
    assert_eq!(lab.analyst().posts("/material-lots/new", &pairs).status, 403);
}

#[test]
fn what_is_found_destroyed_or_brought_back_stands_in_the_ledger_with_its_reason() {
    let lab = Lab::new();
    let (material, path) = received(&lab);
    let page = format!("{path}/stock");
    let lot = world::lot_for_market(&lab, "TW-104-0640", "UK");
    assert_eq!(sign(&lab, &path, "released", &[]).status, 303);
    take(&lab, material, &path, lot, "2", "kg").unwrap();
    let bea = lab.actor("bea.skelton").account.to_string();
    let maren = lab.actor("maren.oddy").account.to_string();
    let why = ("why", "counted at the end of the week");
    let refused = [
        (vec![("kind", "adjusted"), ("quantity", "-1"), why], "Type what was found, 0 kg or more"),
        (vec![("kind", "adjusted"), ("quantity", "23"), why], "ML-0042 holds exactly that already."),
        (
            vec![("kind", "adjusted"), ("quantity", "22"), ("why", "lost")],
            "Say why in at least ten characters",
        ),
        (vec![("kind", "destroyed"), ("quantity", "1"), why], "Name who saw it destroyed"),
        (vec![("kind", "destroyed"), ("quantity", "1"), ("witness", &bea), why], "You cannot witness"),
        (vec![("kind", "destroyed"), ("quantity", "24"), ("witness", &maren), why], "ML-0042 holds 23 kg"),
        (vec![("kind", "returned"), ("quantity", "1"), why], "Name the lot it comes back from."),
        (
            vec![("kind", "returned"), ("quantity", "2.5"), ("lot", "TW-104-0640"), why],
            "TW-104-0640 had 2 kg of ML-0042, so 2.5 kg cannot come back from it.",
        ),
    ];
    for (fields, words) in refused {
        let seen = lab.operator().submits(&page, &page, &fields);
        assert_eq!(seen.status, 409, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let unknown = [("kind", "returned"), ("quantity", "1"), ("lot", "TW-999"), why];
    let seen = lab.operator().submits(&page, &page, &unknown);
    assert_eq!(seen.status, 422);
    assert!(seen.text().contains("There is no lot TW-999. Check its number."), "{}", seen.text());

    let back = [("kind", "returned"), ("quantity", "0.5"), ("lot", "tw-104-0640"), why];
    assert!(lab.operator().does(&page, &page, &back).text().contains("0.5 23.500 TW-104-0640"));
    let found = [("kind", "adjusted"), ("quantity", "23.4"), why];
    assert!(lab.operator().does(&page, &page, &found).text().contains("-0.100 23.400"));
    let destroyed = [("kind", "destroyed"), ("quantity", "23.4"), ("witness", maren.as_str()), why];
    let seen = lab.operator().does(&page, &page, &destroyed);
    assert!(seen.text().contains("seen by Maren Oddy"), "{}", seen.text());
    assert_eq!(sign(&lab, &path, "used up", &[]).status, 303);
    let used = take(&lab, material, &path, lot, "1", "kg").unwrap_err();
    assert!(used.starts_with("ML-0042 is used up."), "{used}");
}

#[test]
fn a_lot_that_still_holds_something_is_not_used_up_and_assay_and_water_are_kept_with_units() {
    let lab = Lab::new();
    let (_, path) = received(&lab);
    let full = sign(&lab, &path, "used up", &[]);
    assert_eq!(full.status, 409);
    assert!(full.text().contains("ML-0042 still holds 25 kg. Adjust or destroy the rest first."));
    let page = format!("{path}/assay");
    let none = lab.analyst().submits(&page, &page, &[("reference", "T-12")]);
    assert_eq!(none.status, 422);
    assert!(none.text().contains("Type the assay, the water, or both."), "{}", none.text());
    let fields = [
        ("assay", "98.7"),
        ("assay_unit", "% (w/w)"),
        ("assay_basis", "dried"),
        ("water", "6.2"),
        ("reference", "test record T-12"),
    ];
    let seen = lab.analyst().does(&page, &page, &fields);
    for words in ["98.7", "dried", "6.2", "test record T-12"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let wrong = [
        ("status", "released"),
        ("why", "certificate agrees"),
        ("user_name", "ada.whitlock"),
        ("password", "not it"),
    ];
    let page = format!("{path}/status");
    assert_eq!(lab.reviewer().submits(&page, &page, &wrong).status, 409);
}

/// The database itself holds the balance to the one before it and above zero.
#[test]
fn the_ledger_refuses_a_balance_that_does_not_follow() {
    use supernate::domain::stock::EntryKind;
    use supernate::store::stock::NewStockEntry;
    let lab = Lab::new();
    let (_, path) = received(&lab);
    let entry = |kind, quantity: &str, balance: &str| NewStockEntry {
        material_lot: id_of(&path),
        kind,
        quantity: quantity.parse().unwrap(),
        balance: balance.parse().unwrap(),
        lot: None,
        why: None,
        witness: None,
    };
    let table = [
        (entry(EntryKind::Adjusted, "-26", "-1"), "never holds less than nothing"),
        (entry(EntryKind::Destroyed, "-1", "24.5"), "does not follow from the one before"),
        (entry(EntryKind::Destroyed, "1", "26"), "what goes out less"),
    ];
    let actor = lab.actor("bea.skelton");
    for (new, words) in table {
        let done = lab
            .app
            .db
            .change(&actor, Act::MoveStock, &Reason::none(), |change| store::stock::insert(change, &new));
        let fault = done.unwrap_err().to_string();
        assert!(fault.contains(words), "{fault}");
    }
}
