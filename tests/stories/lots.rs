//! Lots.

use supernate::store;

use crate::support::{Lab, world};

#[test]
fn an_empty_list_of_lots_says_what_comes_first() {
    let lab = Lab::new();
    lab.manager()
        .sees("/lots", "once one is approved, the operator or the lab manager records the first lot");
    assert_eq!(lab.analyst().get("/lots/new").status, 403);
    assert_eq!(lab.manager().get("/lots/77").status, 404);
}

fn lot_fields(number: &str, presentation: i64, version: i64) -> Vec<(String, String)> {
    [
        ("number", number.to_string()),
        ("presentation", presentation.to_string()),
        ("formulation_version", version.to_string()),
        ("made_on", "30 Nov 2026".to_string()),
        ("size", "500".to_string()),
        ("size_unit", "L".to_string()),
        ("scale", "pilot".to_string()),
        ("container_closure", "amber PET bottle, 28 mm cap".to_string()),
    ]
    .map(|(name, value)| (name.to_string(), value))
    .to_vec()
}

fn makes(lab: &Lab, fields: &[(String, String)], change: &[(&str, &str)]) -> crate::support::Seen {
    let mut all: Vec<(&str, &str)> =
        fields.iter().map(|(name, value)| (name.as_str(), value.as_str())).collect();
    for (name, value) in change {
        all.retain(|(known, _)| known != name);
        all.push((name, value));
    }
    lab.operator().submits("/lots/new", "/lots/new", &all)
}

#[test]
fn a_lot_keeps_the_digest_of_the_version_it_was_made_to() {
    let lab = Lab::new();
    let presentation = world::first_presentation(&lab);
    let version = lab.app.db.read(store::lot::approved_formulations).unwrap()[0].0;
    let fields = lot_fields("TW-104-0640", presentation, version);
    let made = makes(&lab, &fields, &[]);
    assert_eq!(made.status, 303, "{}", made.text());
    let path = made.location.unwrap();
    let page = lab.auditor().sees(&path, "made, not decided on");
    let lot = lab.app.db.read(|reader| store::lot::by_number(reader, "tw-104-0640")).unwrap().unwrap();
    let digest = supernate::domain::digest::sha256_hex(lot.formulation_content.as_bytes());
    assert_eq!(lot.formulation_digest, digest);
    assert!(page.text().contains(&digest[..8]) && page.text().contains("500 L"), "{}", page.text());
    lab.manager().sees("/lots", "TW-104-0640");
    let twice = makes(&lab, &fields, &[("number", "tw-104-0640")]);
    assert_eq!(twice.status, 409);
    assert!(twice.text().contains("A lot number is never used twice"));
    let ahead = makes(&lab, &fields, &[("number", "TW-104-0641"), ("made_on", "2 Dec 2026")]);
    assert!(ahead.text().contains("The day it was made lies ahead"));
}

/// Every fault of the form at once, with what was typed.
#[test]
fn a_faulty_lot_form_comes_back_with_every_fault_and_what_was_typed() {
    let lab = Lab::new();
    let presentation = world::first_presentation(&lab);
    let version = lab.app.db.read(store::lot::approved_formulations).unwrap()[0].0;
    let fields = lot_fields("TW-104-0640", presentation, version);
    let faulty = makes(&lab, &fields, &[("number", ""), ("made_on", "soon"), ("size", "12,3,4")]);
    assert_eq!(faulty.status, 422);
    for sentence in ["Lot number is empty", "“soon” is not a date", "more than one decimal mark"] {
        assert!(faulty.text().contains(sentence), "{}", faulty.text());
    }
    assert!(faulty.html().contains("value=\"soon\"") && faulty.html().contains("value=\"12,3,4\""));
    assert!(lab.app.db.read(|reader| store::lot::before(reader, None, 10)).unwrap().is_empty());
}

#[test]
fn a_packed_lot_names_its_bulk_lot_and_the_bulk_lot_names_it() {
    let lab = Lab::new();
    let bulk = world::lot(&lab, "TW-104-B12");
    let lot = lab.app.db.read(|reader| store::lot::get(reader, bulk)).unwrap();
    let fields = lot_fields("TW-104-0640", lot.presentation, lot.formulation_version);
    let packed = makes(&lab, &fields, &[("bulk_lot", &bulk.to_string())]);
    assert_eq!(packed.status, 303, "{}", packed.text());
    lab.manager().sees(&packed.location.unwrap(), "Filled from bulk lot TW-104-B12");
    lab.manager().sees(&format!("/lots/{bulk}"), "Packed lots TW-104-0640");
}

#[test]
fn a_lot_that_is_not_released_has_no_distribution() {
    let lab = Lab::new();
    let lot = world::lot(&lab, "TW-104-0640");
    let page = lab.reviewer().get(&format!("/lots/{lot}"));
    assert!(!page.text().contains("Record the distribution"));
    let actor = lab.actor("ada.whitlock");
    let new = supernate::domain::lot::NewDistribution {
        first_on: "2026-12-01".parse().unwrap(),
        markets: "Ireland".to_string(),
    };
    let refused = supernate::acts::lot::distribute(&lab.app.db, &actor, lot, &new).unwrap_err();
    assert!(refused.to_string().contains("The lot is not released"));
}

#[test]
fn lots_are_paged_by_key() {
    let lab = Lab::new();
    for number in 1..=51 {
        world::lot(&lab, &format!("TW-104-{number:04}"));
    }
    let first = lab.manager().sees("/lots", "TW-104-0051");
    assert!(!first.text().contains("TW-104-0001"));
    let older = first.links().into_iter().find(|path| path.starts_with("/lots?before=")).unwrap();
    let second = lab.manager().sees(&older, "TW-104-0001");
    assert!(!second.text().contains("TW-104-0051") && !second.text().contains("Older lots"));
}
