//! Hostile texts are shown as text: no stored or typed text changes which elements a page is made of.

use std::collections::BTreeMap;

use scraper::{Html, Node};
use supernate::domain::method::TestKind;
use supernate::web::route;

use crate::attachments::{photo, uploads};
use crate::support::{Lab, Seen, world};
use crate::verification::tampered;

/// Markup, quotes of both kinds, entities, a right-to-left override, and 300 characters more.
fn hostile() -> String {
    let markup =
        "</td></dd><script>window.__x=1</script><img src=x onerror='__x()'>\" onload=\"__x()\" &lt;b&gt; ";
    format!("{markup}' -- {{{{ 7*7 }}}} \u{202e}\u{200f}]]><!-- {}", "ä".repeat(300))
}

/// The texts a person can type, by table; codes and numbers that the program reads back are not among them.
const TYPED: [(&str, &[&str]); 26] = [
    ("account", &["full_name", "identity_verified_by"]),
    ("attachment", &["file_name", "about"]),
    ("chamber", &["name", "location"]),
    ("condition", &["name", "source"]),
    ("container_event", &["note"]),
    ("flag", &["sentence"]),
    ("formulation", &["name"]),
    ("formulation_version", &["reason"]),
    ("instrument", &["name"]),
    ("investigation_entry", &["text"]),
    ("lot", &["container_closure", "size_unit"]),
    ("material", &["name", "function"]),
    ("method", &["name"]),
    ("method_version", &["reason"]),
    ("presentation", &["strength", "pack", "container_word", "market"]),
    ("product", &["name", "dosage_form"]),
    ("protocol", &["title"]),
    ("protocol_version", &["reason"]),
    ("pull_event", &["note"]),
    ("qualification", &["reference"]),
    ("sample", &["condition_on_receipt", "handed_over_by"]),
    ("sample_test", &["title"]),
    ("signature", &["signer_name", "statement"]),
    ("specification_version", &["reason"]),
    ("study_arm", &["container_text"]),
    ("trail_act", &["full_name", "detail", "reason"]),
];

/// Puts a text behind every typed text of the file, and into the texts inside versions.
fn with_text(lab: &Lab, text: &str) -> Lab {
    let sql_text = text.replace('\'', "''");
    let in_json = serde_json::to_string(text).unwrap();
    let in_json = in_json[1..in_json.len() - 1].replace('\'', "''");
    let mut sql = String::new();
    for (table, columns) in TYPED {
        for column in columns {
            sql.push_str(&format!(
                "update {table} set {column} = {column} || '{sql_text}' where {column} <> '';\n"
            ));
        }
    }
    for (table, word) in [
        ("formulation_version", "xanthan gum"),
        ("formulation_version", "suspending agent"),
        ("specification_version", "pH"),
        ("protocol_version", "Initial"),
    ] {
        let (from, to) = (format!("\"{word}\""), format!("\"{word}{in_json}\""));
        sql.push_str(&format!("update {table} set content = replace(content, '{from}', '{to}');\n"));
    }
    // The lists' rows are made of these texts.
    sql.push_str(
        "update open_line set words = (select words from pull_words where pull = open_line.pull);\n",
    );
    Lab::over(tampered(lab, &sql))
}

/// Elements and attribute names of a page, counted.
fn shape(seen: &Seen) -> BTreeMap<String, usize> {
    let page = Html::parse_document(&seen.html());
    let mut shape = BTreeMap::new();
    for node in page.tree.values() {
        match node {
            Node::Element(element) => {
                let names: Vec<&str> = element.attrs().map(|(name, _)| name).collect();
                *shape.entry(format!("{} {}", element.name(), names.join(" "))).or_default() += 1;
            }
            Node::Comment(_) => *shape.entry("comment".to_string()).or_default() += 1,
            _ => {}
        }
    }
    shape
}

fn filled() -> Lab {
    let lab = Lab::new();
    crate::investigations::opened(&lab);
    let finding = [("kind", "finding"), ("text", "buffer 7.00 was opened nine weeks ago"), ("other_lot", "")];
    lab.analyst().does("/investigations/1", "/investigations/1/entries", &finding);
    let study = world::study(&lab, "TW-104-0640", &[TestKind::Ph, TestKind::Redispersibility]);
    world::take(&lab, &world::pull(&lab, study, 1, "Initial"));
    uploads(&lab.analyst(), "/files/sample/1", "bed.png", &photo(60, 120));
    lab
}

/// sec_S61, sec_S62: every page with hostile texts has exactly the elements and attributes it has with plain ones.
#[test]
fn sec_s61_hostile_texts_change_no_page() {
    let lab = filled();
    // As long as the hostile text, since long words are set otherwise than short ones.
    let as_long: String = " plain words".chars().cycle().take(hostile().chars().count()).collect();
    let plain = with_text(&lab, &as_long);
    let hostile = with_text(&lab, &hostile());
    let (mut pages, mut shown, mut different) = (0, 0, Vec::new());
    for person in ["maren.oddy", "ada.whitlock", "rafe.tolland", "nell.farrow", "tomas.reyle"] {
        for route in route::all().into_iter().filter(|route| !route.is_post) {
            if route.path.contains("{digest}") || route.path.contains("static") {
                continue;
            }
            let fill = |part: &str| match part {
                "{kind}" => "sample".to_string(),
                "{event}" => "calibration".to_string(),
                part if part.starts_with('{') => "1".to_string(),
                part => part.to_string(),
            };
            let path = route.path.split('/').map(fill).collect::<Vec<_>>().join("/");
            let (left, right) = (plain.person(person).get(&path), hostile.person(person).get(&path));
            assert!(right.status < 500, "{path} as {person}: {}", right.text());
            assert_eq!(left.status, right.status, "{path} as {person}");
            pages += 1;
            shown += usize::from(right.text().contains("window.__x=1"));
            let is_page = |seen: &Seen| {
                let media_type = seen.headers.get("content-type").and_then(|value| value.to_str().ok());
                media_type.is_some_and(|value| value.starts_with("text/html"))
            };
            if !is_page(&right) {
                assert!(!is_page(&left) && right.headers.contains_key("x-content-type-options"), "{path}");
                continue;
            }
            let (left, right) = (shape(&left), shape(&right));
            if left != right {
                let more: Vec<_> =
                    right.iter().filter(|(name, count)| left.get(*name) != Some(count)).collect();
                different.push(format!("{path} as {person}: {more:?}"));
            }
        }
    }
    assert!(different.is_empty(), "{}", different.join("\n"));
    assert!(pages > 200 && shown > 60, "{shown} of {pages} pages show the text");
}

/// sec_S64: 500 hostile searches, none of which breaks the search or widens it.
#[test]
fn sec_s64_hostile_searches_are_searched_for_as_they_are() {
    let lab = filled();
    let parts = [
        "'",
        "\"",
        "%",
        "_",
        "\\",
        ";",
        "--",
        "/*",
        "*/",
        "(",
        ")",
        "*",
        "?",
        "^",
        "-",
        "NEAR(",
        " OR ",
        " AND ",
        " NOT ",
        "\u{202e}",
        "\u{0301}",
        "ß",
        "İ",
        "🧪",
        "1=1",
        "union select",
        "</script>",
        "{{",
        "\u{feff}",
        "\t",
    ];
    let auditor = lab.auditor();
    let mut sent = 0;
    for first in 0..parts.len() {
        for second in 0..17 {
            let typed =
                format!("{}TW{}{}", parts[first], parts[(first + second) % parts.len()], "x".repeat(second));
            let seen = auditor.get(&format!("/find?q={}", supernate::web::pairs::encoded(&typed)));
            assert!(seen.status == 200 || seen.status == 303, "{typed:?}: {} {}", seen.status, seen.text());
            sent += 1;
        }
    }
    assert!(sent >= 500, "{sent}");
    for typed in ["%", "_", "' or '1'='1", "\\%"] {
        let seen = auditor.get(&format!("/find?q={}", supernate::web::pairs::encoded(typed)));
        assert!(!seen.text().contains("TW-104-0640"), "{typed:?} found everything: {}", seen.text());
    }
}
