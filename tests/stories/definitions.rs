//! Customers, products, presentations, materials and shelf lives.

use crate::support::{Lab, world};

#[test]
fn a_product_gets_its_presentations_and_says_what_is_recommended_for_it() {
    let lab = Lab::new();
    lab.manager().does("/customers/new", "/customers/new", &[("code", "C-07"), ("name", "Hollin & Moss")]);
    lab.manager().sees("/customers", "Hollin & Moss");
    let fields = [
        ("code", "TW-211"),
        ("name", "Powder for oral suspension"),
        ("dosage_form", "powder for oral suspension"),
        ("customer", "1"),
    ];
    let product = lab.formulator().does("/products/new", "/products/new", &fields);
    assert!(product.text().contains("C-07, Hollin & Moss"));
    assert!(product.text().contains("water content, reconstitution time"));
    let path = product.location.clone().unwrap();
    let id = path.rsplit('/').next().unwrap();

    let page = format!("/presentations/new?product={id}");
    let fields = [
        ("code", "TW-211-100"),
        ("strength", "250 mg/5 mL"),
        ("pack", "100 mL HDPE bottle, child-resistant closure"),
        ("container_word", "Bottle"),
        ("fill_ml", "60,5"),
        ("market", "United Kingdom"),
        ("permeability", "semi-permeable"),
    ];
    let shown = lab.manager().does(&page, "/presentations/new", &fields);
    assert!(shown.text().contains("Container bottle Fill, mL 60.5"), "{}", shown.text());
    lab.auditor().sees(&path, "TW-211-100");
    lab.auditor().sees("/presentations", "HDPE");
    lab.auditor().sees("/products", "powder for oral suspension");
}

#[test]
fn every_fault_of_a_presentation_is_told_at_once_and_nothing_typed_is_lost() {
    let lab = Lab::new();
    world::product(&lab, "TW-104");
    let fields = [("strength", "400 mg/5 mL"), ("fill_ml", "two hundred"), ("product", "77")];
    let seen = lab.manager().submits("/presentations/new", "/presentations/new", &fields);
    assert_eq!(seen.status, 422);
    let text = seen.text();
    for words in ["Product: choose one", "Code is empty", "“two hundred” is not a number", "Market is empty"]
    {
        assert!(text.contains(words), "{words}: {text}");
    }
    assert!(seen.html().contains("value=\"two hundred\"") && seen.html().contains("value=\"400 mg/5 mL\""));
    let zero = [
        ("product", "1"),
        ("code", "TW-104-200"),
        ("strength", "x"),
        ("pack", "y"),
        ("container_word", "bottle"),
        ("fill_ml", "0"),
        ("market", "UK"),
        ("permeability", "not stated"),
    ];
    let seen = lab.manager().submits("/presentations/new", "/presentations/new", &zero);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("more than 0 mL"));
}

#[test]
fn a_code_is_never_used_twice_in_any_spelling() {
    let lab = Lab::new();
    world::product(&lab, "TW-104");
    let fields = [("code", "tw-104"), ("name", "another"), ("dosage_form", "lotion")];
    let seen = lab.manager().submits("/products/new", "/products/new", &fields);
    assert_eq!(seen.status, 409);
    assert!(seen.text().contains("Codes are never used twice"));
    assert_eq!(lab.analyst().submits("/products/new", "/products/new", &fields).status, 403);
}

#[test]
fn a_material_has_a_function_of_the_trade_and_says_where_it_is_used() {
    let lab = Lab::new();
    let fields = [
        ("code", "M-001"),
        ("name", "aluminium hydroxide gel"),
        ("function", "active"),
        ("density_g_per_ml", "2.42"),
    ];
    let material = lab.formulator().does("/materials/new", "/materials/new", &fields);
    assert!(material.text().contains("No formulation version names it yet."));
    let heavy = [("code", "M-002"), ("name", "lead?"), ("function", "other"), ("density_g_per_ml", "113")];
    let seen = lab.formulator().submits("/materials/new", "/materials/new", &heavy);
    assert_eq!(seen.status, 422);
    assert!(seen.text().contains("113 cannot be; it must lie between 0 and 25"));
    let product = world::product(&lab, "TW-104");
    world::approved_formulation(&lab, product);
    let list = lab.auditor().sees("/materials", "xanthan gum");
    let path = list.links().into_iter().filter(|link| link.starts_with("/materials/")).nth(2).unwrap();
    lab.auditor().sees(&path, &format!("F-{product} version 1"));
}

/// Decision A12: assigned by QA, earlier lots untouched.
#[test]
fn qa_assigns_a_shelf_life_with_a_signature() {
    let lab = Lab::new();
    let product = world::product(&lab, "TW-104");
    let presentation = world::presentation(&lab, product, "TW-104-200");
    let path = format!("/presentations/{presentation}/shelf-life");
    let fields = [
        ("storage_statement", "Do not store above 25 °C"),
        ("months", "24"),
        ("in_use_days", ""),
        ("basis", "tentative"),
        ("reference", "report SR-014"),
        ("expiry_format", "month"),
    ];
    let shown = lab.reviewer().signs(&path, &path, &fields);
    assert!(shown.text().contains("30 Nov 2028"), "made 1 Dec 2026: {}", shown.text());
    let words = "24 months, Do not store above 25 °C, from 1 Dec 2026";
    lab.auditor().sees(&format!("/presentations/{presentation}"), words);
    lab.later_days(3);
    let late: Vec<_> = fields
        .iter()
        .copied()
        .chain([
            ("effective_from", "1 dec 2026"),
            ("user_name", "ada.whitlock"),
            ("password", crate::support::PASSWORD),
        ])
        .collect();
    let seen = lab.reviewer().submits(&path, &path, &late);
    assert_eq!(seen.status, 409, "{}", seen.text());
    assert!(seen.text().contains("earlier lots stay as they are"));
    assert!(!lab.manager().get(&path).html().contains("Sign and assign"));
}

#[test]
fn a_presentation_lists_what_hangs_on_it() {
    let lab = Lab::new();
    let product = world::product(&lab, "TW-104");
    let presentation = world::presentation(&lab, product, "TW-104-200");
    let path = format!("/presentations/{presentation}");
    lab.auditor().sees(&path, "Nothing yet. QA writes a specification");
    world::approved_specification(&lab, presentation, &[supernate::domain::method::TestKind::Ph]);
    let page = lab.auditor().sees(&path, "specification its limits");
    assert!(page.links().iter().any(|link| link == "/specifications/1"), "{:?}", page.links());
}
