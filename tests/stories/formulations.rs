//! Formulations: drafts, signatures, stale drafts, comparison.

use crate::support::{Lab, Person, Seen, world};

/// A product, three materials and a formulation without a version; answers with the formulation's path.
fn prepared(lab: &Lab) -> String {
    let product = world::product(lab, "TW-104");
    world::material(lab, "M-001", "magnesium hydroxide", "active");
    world::material(lab, "M-002", "xanthan gum", "suspending agent");
    world::material(lab, "M-003", "purified water", "vehicle");
    let fields = [("product", &*product.to_string()), ("code", "F-104"), ("name", "Xanthan")];
    let page = lab.formulator().does("/formulations/new", "/formulations/new", &fields);
    page.location.unwrap()
}

const RECIPE: [(&str, &str); 12] = [
    ("reason", "first version of the recipe"),
    ("quantity_basis", "100 g"),
    ("target_total", "100.00"),
    ("ingredient.1.material", "1"),
    ("ingredient.1.quantity", "8.00"),
    ("ingredient.1.unit", "g"),
    ("ingredient.3.material", "2"),
    ("ingredient.3.quantity", "0.40"),
    ("ingredient.3.unit", "g"),
    ("ingredient.4.material", "3"),
    ("ingredient.4.quantity", "91.58"),
    ("ingredient.4.unit", "g"),
];

fn writes(person: &Person<'_>, path: &str, changes: &[(&str, &str)]) -> Seen {
    let action = format!("{path}/draft");
    person.submits(&action, &action, &merged(changes))
}

fn merged<'a>(changes: &[(&'a str, &'a str)]) -> Vec<(&'a str, &'a str)> {
    let mut fields: Vec<(&str, &str)> = RECIPE.to_vec();
    fields.retain(|(name, _)| !changes.iter().any(|(changed, _)| changed == name));
    fields.extend(changes);
    fields
}

/// req_U5: immutable after two different people signed; anything else is a new version.
#[test]
fn a_version_is_written_signed_by_its_author_and_approved_by_a_second_person() {
    let lab = Lab::new();
    let path = prepared(&lab);
    lab.formulator().sees(&path, "No version is written yet");
    let written = writes(&lab.formulator(), &path, &[]);
    assert_eq!(written.status, 303, "{}", written.text());
    let version = written.location.unwrap();
    assert!(version.starts_with("/formulation-versions/"));
    let page = lab.formulator().sees(&version, "Total 99.98 g of 100.00 g, 0.02 g short");
    assert!(page.text().contains("suspending agent"), "the material's own function is taken");

    let edit = format!("{version}/edit");
    lab.formulator().does(&edit, &edit, &[("ingredient.3.quantity", "91.60")]);
    lab.formulator().sees(&version, "Total 100.00 g of 100.00 g.");

    let sign = format!("{version}/sign");
    assert!(!lab.reviewer().get(&version).html().contains("Approve this version"));
    lab.formulator().signs(&version, &sign, &[]);
    assert!(!lab.formulator().get(&version).html().contains("Approve this version"));
    assert_eq!(lab.formulator().get(&edit).status, 409);
    lab.reviewer().signs(&version, &sign, &[]);
    let page = lab.auditor().sees(&version, "Approved for use");
    assert!(page.text().contains("Written by me and complete") && page.text().contains("Ada Whitlock"));
    lab.auditor().sees("/formulations", "version 1");

    let next = lab.formulator().get(&format!("{path}/draft"));
    assert!(next.text().contains("write version 2"));
    assert!(next.html().contains("value=\"91.60\""), "a new version begins as a copy");
}

#[test]
fn a_recipe_that_cannot_be_is_refused_in_its_row_with_everything_kept() {
    let lab = Lab::new();
    let path = prepared(&lab);
    let doubled = writes(&lab.formulator(), &path, &[("ingredient.4.material", "1")]);
    assert_eq!(doubled.status, 409, "{}", doubled.text());
    assert!(doubled.text().contains("magnesium hydroxide stands twice"));
    assert!(doubled.html().contains("href=\"#ingredient.4.material\""), "the row it was typed in");
    assert!(doubled.html().contains("value=\"91.58\""));

    let faults = writes(
        &lab.formulator(),
        &path,
        &[
            ("reason", "short"),
            ("ingredient.1.quantity", "eight"),
            ("ingredient.3.unit", ""),
            ("ingredient.7.quantity", "3"),
            ("particle_size", "tiny"),
        ],
    );
    assert_eq!(faults.status, 422);
    let text = faults.text();
    for words in [
        "Say why in at least 10 characters",
        "“eight” is not a number",
        "Unit, ingredient 3: choose one",
        "Ingredient 7 has no material",
        "“tiny” is not a number",
    ] {
        assert!(text.contains(words), "{words}: {text}");
    }
    assert!(faults.html().contains("value=\"eight\"") && faults.html().contains("value=\"tiny\""));

    let zero = writes(&lab.formulator(), &path, &[("ingredient.3.quantity", "0")]);
    assert!(zero.html().contains("href=\"#ingredient.3.quantity\""), "{}", zero.text());
    let two = [
        ("ingredient.3.qs", "yes"),
        ("ingredient.3.quantity", ""),
        ("ingredient.4.qs", "yes"),
        ("ingredient.4.quantity", ""),
    ];
    let two = writes(&lab.formulator(), &path, &two);
    assert!(two.text().contains("purified water is the second ingredient marked as quantity sufficient"));
    assert_eq!(lab.reviewer().get(&format!("{path}/draft")).status, 403);
}

#[test]
fn water_makes_up_to_the_total() {
    let lab = Lab::new();
    let path = prepared(&lab);
    let fields = [
        ("quantity_basis", "100 mL"),
        ("target_total", "100"),
        ("ingredient.4.qs", "yes"),
        ("ingredient.4.quantity", ""),
        ("ingredient.4.unit", ""),
        ("ingredient.4.function", "vehicle"),
    ];
    let version = writes(&lab.formulator(), &path, &fields).location.unwrap();
    lab.formulator().sees(&version, "Total 8.40 g, made up to 100 mL with purified water.");
}

/// screen_U89: two people, one draft: the second sees both and chooses.
#[test]
fn a_draft_changed_by_another_is_shown_with_both_contents() {
    let lab = Lab::new();
    let path = prepared(&lab);
    let version = writes(&lab.formulator(), &path, &[]).location.unwrap();
    let edit = format!("{version}/edit");
    let mut first = lab.formulator().get(&edit).form(&edit);
    let other = lab.person("lena.marsh");
    other.does(&edit, &edit, &[("ingredient.2.quantity", "0.45")]);
    let set = |pairs: &mut Vec<(String, String)>, name: &str, value: &str| {
        pairs.retain(|(known, _)| known != name);
        pairs.push((name.to_string(), value.to_string()));
    };
    // A fault in between does not make the form forget what it was filled from.
    set(&mut first, "target_total", "much");
    let faulty = lab.formulator().posts(&edit, &first);
    assert_eq!(faulty.status, 422);
    let mut again = faulty.form(&edit);
    set(&mut again, "target_total", "100.00");
    set(&mut again, "ingredient.2.quantity", "0.50");
    let seen = lab.formulator().posts(&edit, &again);
    assert_eq!(seen.status, 409, "{}", seen.text());
    let text = seen.text();
    assert!(text.contains("Version 1 has changed") && text.contains("Lena Marsh"), "{text}");
    assert!(text.contains("xanthan gum 0.45 g") && text.contains("xanthan gum 0.50 g"), "{text}");
    let chosen = lab.formulator().posts(&edit, &seen.form(&edit));
    assert_eq!(chosen.status, 303, "{}", chosen.text());
    lab.formulator().sees(&version, "0.50 g");
}

#[test]
fn two_versions_are_compared_and_only_differences_shown_at_first() {
    let lab = Lab::new();
    let path = prepared(&lab);
    let first = writes(&lab.formulator(), &path, &[]).location.unwrap();
    lab.formulator().signs(&first, &format!("{first}/sign"), &[]);
    lab.reviewer().signs(&first, &format!("{first}/sign"), &[]);
    let draft = format!("{path}/draft");
    let changes = [("reason", "more gum against settling"), ("ingredient.2.quantity", "0.50")];
    let second = lab.formulator().does(&draft, &draft, &changes).location.unwrap();
    let id = |path: &str| path.rsplit('/').next().unwrap().to_string();
    let compare = format!("{path}/compare?old={}&new={}", id(&first), id(&second));
    let page =
        lab.auditor().sees(&compare, "1 difference between version 1 (approved) and version 2 (draft).");
    assert!(page.text().contains("xanthan gum 0.40 g 0.50 g +25.00 %"), "{}", page.text());
    assert!(!page.text().contains("magnesium hydroxide"));
    let all = lab.auditor().sees(&format!("{compare}&show=all"), "magnesium hydroxide 8.00 g 8.00 g same");
    assert!(all.text().contains("Show only what differs"));
    assert_eq!(lab.auditor().get(&format!("{path}/compare")).status, 400);
    let page = lab.formulator().get(&second);
    assert!(page.links().iter().any(|link| link == &compare), "{:?}", page.links());
}

#[test]
fn a_draft_that_is_open_is_continued_and_a_second_one_refused() {
    let lab = Lab::new();
    let path = prepared(&lab);
    let draft = format!("{path}/draft");
    let before = lab.person("lena.marsh").get(&draft).form(&draft);
    let first = writes(&lab.formulator(), &path, &[]).location.unwrap();
    assert_eq!(lab.formulator().get(&draft).location.unwrap(), format!("{first}/edit"));
    let mut fields: Vec<(String, String)> =
        RECIPE.iter().map(|(name, value)| (name.to_string(), value.to_string())).collect();
    fields.extend(before.into_iter().filter(|(name, _)| !RECIPE.iter().any(|(known, _)| known == name)));
    let second = lab.person("lena.marsh").posts(&draft, &fields);
    assert_eq!(second.status, 409, "{}", second.text());
    assert!(second.text().contains("There is a draft already, version 1."));
}
