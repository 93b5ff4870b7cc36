//! Finding records, and the index of definitions.

use crate::support::{Lab, world};

fn filled() -> Lab {
    let lab = Lab::new();
    let product = world::product(&lab, "TW-104");
    world::presentation(&lab, product, "TW-104-200");
    world::presentation(&lab, product, "TW-104-500");
    world::material(&lab, "M-014", "magnesium hydroxide 50% paste", "active");
    world::material(&lab, "M-114", "magnesium_stearate", "other");
    lab
}

fn found(lab: &Lab, typed: &str) -> crate::support::Seen {
    lab.auditor().get(&format!("/find?q={}", supernate::web::pairs::encoded(typed)))
}

/// screen_U130: an exact number goes straight there.
#[test]
fn an_exact_code_opens_its_record_and_part_of_it_lists_what_holds_it() {
    let lab = filled();
    let seen = found(&lab, "tw-104-200");
    assert_eq!((seen.status, seen.location.as_deref()), (303, Some("/presentations/1")));
    let seen = found(&lab, "104");
    assert_eq!(seen.status, 200);
    let text = seen.text();
    assert!(text.contains("3 results for “104”."), "{text}");
    assert!(text.contains("Products") && text.contains("Presentations") && text.contains("in the code"));
    assert!(seen.html().contains("value=\"104\""), "the words stay in the box");
    assert!(found(&lab, "antacid").text().contains("in its words"));
}

/// screen_U131: ten spellings of one number.
#[test]
fn separators_and_capitals_do_not_matter() {
    let lab = filled();
    for typed in ["M014", "m014", "m 014", "M.014", "m/014", "M_014", "M 0 14", "M\u{2011}014", "0-14", "M01"]
    {
        let text = found(&lab, typed).text();
        assert!(text.contains("M-014"), "{typed}: {text}");
    }
    assert!(found(&lab, "M014").text().contains("the code, whatever its separators"));
}

#[test]
fn wildcards_are_letters_like_others_and_nothing_found_says_what_was_searched() {
    let lab = filled();
    let text = found(&lab, "%").text();
    assert!(text.contains("M-014") && !text.contains("M-114"), "{text}");
    assert!(found(&lab, "50 %").text().contains("M-014"));
    let nothing = found(&lab, "9%9").text();
    assert!(nothing.contains("Nothing found for “9%9”."), "{nothing}");
    assert!(nothing.contains("Searched: the numbers of lots, material lots, studies and samples"));
    for empty in ["", "  ", "-", "_", "\\"] {
        assert_eq!(found(&lab, empty).status, 200, "{empty:?}");
        assert!(!found(&lab, empty).text().contains("M-014"), "{empty:?}");
    }
    assert!(found(&lab, "<b>'\"").html().contains("&#60;b&#62;"), "what was typed is shown as text");
}

#[test]
fn definitions_are_counted_and_linked() {
    let lab = filled();
    let page = lab.auditor().sees("/definitions", "Presentations 2");
    assert!(page.text().contains("Materials 2") && page.text().contains("Products 1"));
    for path in ["/products", "/materials", "/methods", "/specifications", "/conditions", "/protocols"] {
        assert!(page.links().iter().any(|link| link == path), "{path}");
    }
}
