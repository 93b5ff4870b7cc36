//! Specifications: limits typed for a presentation, signed by the manager, approved by QA.

use supernate::domain::method::TestKind;
use supernate::domain::specification::{Limit, LimitSet};
use supernate::store;

use crate::support::{Lab, Person, Seen, world};

/// A laboratory with a presentation and approved methods; the presentation's id.
fn ready(lab: &Lab) -> (i64, String, String) {
    let product = world::product(lab, "TW-104");
    let presentation = world::presentation(lab, product, "TW-104-200");
    let method = |kind| {
        let version = world::approved_method(lab, kind);
        lab.app.db.read(|reader| store::method::version(reader, version)).unwrap().method.to_string()
    };
    (presentation, method(TestKind::Ph), method(TestKind::Appearance))
}

fn fields<'a>(presentation: &'a str, ph: &'a str, appearance: &'a str) -> Vec<(&'a str, &'a str)> {
    vec![
        ("presentation", presentation),
        ("code", "S-104"),
        ("test.1.method", ph),
        ("test.1.code", "ph"),
        ("test.1.title", "pH"),
        ("test.1.release_lower", "6.20"),
        ("test.1.release_upper", "7.20"),
        ("test.1.shelf_life_lower", "6.00"),
        ("test.1.shelf_life_upper", "7.50"),
        ("test.1.way", "rounding"),
        ("test.3.method", appearance),
        ("test.3.code", "appearance"),
        ("test.3.title", "Appearance"),
        ("test.3.way", "rounding"),
        ("grade.1.test", "appearance"),
        ("grade.1.part", "caking"),
        ("grade.1.release", "0"),
        ("grade.1.shelf_life", "0, 1"),
    ]
}

fn with<'a>(mut fields: Vec<(&'a str, &'a str)>, more: &[(&'a str, &'a str)]) -> Vec<(&'a str, &'a str)> {
    for (name, value) in more {
        fields.retain(|(known, _)| known != name);
        fields.push((name, value));
    }
    fields
}

fn writes(person: &Person<'_>, fields: &[(&str, &str)]) -> Seen {
    person.submits("/specifications/new", "/specifications/new", fields)
}

#[test]
fn a_specification_is_written_signed_and_approved_by_qa() {
    let lab = Lab::new();
    let (presentation, ph, appearance) = ready(&lab);
    let presentation_text = presentation.to_string();
    lab.manager().sees("/specifications", "No specification is written yet");
    let typed = fields(&presentation_text, &ph, &appearance);
    let made = lab.manager().does("/specifications/new", "/specifications/new", &typed);
    let page = made.location.clone().unwrap();
    assert!(page.starts_with("/specification-versions/"), "{page}");
    for words in ["6.20 to 7.20", "6.00 to 7.50", "Caking: none or slight", "no limit"] {
        assert!(made.text().contains(words), "{words}: {}", made.text());
    }
    let found = |lab: &Lab| {
        lab.app.db.read(|reader| store::specification::approved_of(reader, presentation)).unwrap()
    };
    let sign = format!("{page}/sign");
    lab.manager().signs(&page, &sign, &[]);
    assert!(found(&lab).is_none(), "signed by its author alone it is not approved");
    assert!(!lab.person("otis.vane").get(&page).html().contains(&sign), "a second manager cannot approve");
    lab.reviewer().signs(&page, &sign, &[]);
    let version = found(&lab).unwrap();
    let content = lab.app.db.read(|reader| store::specification::content(reader, version.id)).unwrap();
    let limits = content.of("ph").unwrap();
    let expected = world::between("6.00", "7.50");
    assert_eq!((limits.unit.as_str(), limits.limit(LimitSet::ShelfLife)), ("pH units", &expected));
    assert_eq!(content.of("appearance").unwrap().in_use, Limit::None);
    lab.auditor().sees("/specifications", "S-104");
    lab.auditor().sees(&page, "approved a specification version");
}

#[test]
fn faults_and_refusals_stand_at_the_row_they_belong_to() {
    let lab = Lab::new();
    let (presentation, ph, appearance) = ready(&lab);
    let presentation = presentation.to_string();
    let good = || fields(&presentation, &ph, &appearance);
    type Case<'a> = (&'a [(&'a str, &'a str)], u16, &'a str, &'a str);
    let table: [Case<'_>; 6] = [
        (&[("test.1.shelf_life_lower", "seven")], 422, "test.1.shelf_life_lower", "is not a number"),
        (&[("test.1.title", "")], 422, "test.1.title", "Title, row 1 is empty"),
        (&[("grade.1.test", "appearence")], 422, "grade.1.test", "No test above has the code"),
        (
            &[("test.1.shelf_life_lower", "7.60")],
            409,
            "test.1.shelf_life_lower",
            "7.60, is above the upper one, 7.50",
        ),
        (&[("test.3.code", "ph"), ("grade.1.test", "ph")], 409, "test.3.code", "stands twice"),
        (&[("grade.1.shelf_life", "0, 7")], 409, "", "“7” is not known to its method"),
    ];
    for (change, status, field, words) in table {
        let seen = writes(&lab.manager(), &with(good(), change));
        assert_eq!(seen.status, status, "{words}: {}", seen.text());
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
        assert!(field.is_empty() || seen.html().contains(&format!("id=\"{field}-error\"")), "{field}");
        assert!(seen.html().contains("value=\"S-104\""), "what was typed is kept");
    }
    let none = [("presentation", presentation.as_str()), ("code", "S-1")];
    assert!(writes(&lab.manager(), &none).text().contains("at least one test"));
    assert_eq!(lab.analyst().get("/specifications/new").status, 403);
}

#[test]
fn a_presentation_has_one_specification_and_wider_release_limits_are_noted() {
    let lab = Lab::new();
    let (presentation, ph, appearance) = ready(&lab);
    let presentation = presentation.to_string();
    let wider = with(fields(&presentation, &ph, &appearance), &[("test.1.release_upper", "7.80")]);
    let made = lab.manager().does("/specifications/new", "/specifications/new", &wider);
    assert!(
        made.text().contains("pH: a release limit is wider than the shelf-life limit"),
        "{}",
        made.text()
    );
    let again = writes(&lab.manager(), &with(wider, &[("code", "S-105")]));
    assert_eq!(again.status, 409);
    assert!(again.text().contains("This presentation has the specification S-104"));
}

#[test]
fn limits_of_components_are_kept_through_a_new_version() {
    let lab = Lab::new();
    let (presentation, _, _) = ready(&lab);
    let version = world::approved_degradation_method(&lab);
    let method =
        lab.app.db.read(|reader| store::method::version(reader, version)).unwrap().method.to_string();
    let presentation = presentation.to_string();
    let fields = [
        ("presentation", presentation.as_str()),
        ("code", "S-104"),
        ("test.1.method", &method),
        ("test.1.code", "degradation"),
        ("test.1.title", "Degradation products"),
        ("test.1.way", "rounding"),
        ("component.1.test", "degradation"),
        ("component.1.part", "a"),
        ("component.1.shelf_life_upper", "0.20"),
        ("component.2.test", "degradation"),
        ("component.2.part", "total"),
        ("component.2.shelf_life_upper", "1.0"),
    ];
    let made = lab.manager().does("/specifications/new", "/specifications/new", &fields);
    let page = made.location.clone().unwrap();
    assert!(
        made.text().contains("Degradation product A: at most 0.20; Total: at most 1.0"),
        "{}",
        made.text()
    );
    world::approve(
        &lab,
        supernate::domain::version::Versioned::Specification,
        page.rsplit('/').next().unwrap().parse().unwrap(),
        "maren.oddy",
        "ada.whitlock",
    );
    assert_eq!(lab.manager().get(&format!("{page}/edit")).status, 409, "an approved version is frozen");
    let draft = "/specifications/1/draft";
    let change = [("reason", "a tighter total"), ("component.3.shelf_life_upper", "0.8")];
    let made = lab.manager().does(draft, draft, &change);
    assert!(
        made.text().contains("Degradation product A: at most 0.20; Total: at most 0.8"),
        "{}",
        made.text()
    );
}
