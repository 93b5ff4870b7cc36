//! Results measured elsewhere come in whole or not at all.

use std::path::PathBuf;

use axum::body::Body;
use axum::http::{Request, header};

use crate::support::{Lab, Person, Seen};
use supernate::acts;
use supernate::domain::failure::Failure;
use supernate::store;

fn data(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/numbers/data/suspensions").join(name)
}

pub fn zno() -> Vec<u8> {
    std::fs::read(data("zno_aloe_weloensis_sedimentation.csv")).unwrap()
}

fn tacrolimus() -> Vec<u8> {
    std::fs::read(data("tacrolimus_cjhp2017.csv")).unwrap()
}

/// Chooses a file on the page and presses its button.
pub fn upload(person: &Person<'_>, name: &str, bytes: &[u8]) -> Seen {
    let mut body = Vec::new();
    for (field, value) in person.get("/imports").form("/imports") {
        let part = format!("--edge\r\ncontent-disposition: form-data; name=\"{field}\"\r\n\r\n{value}\r\n");
        body.extend_from_slice(part.as_bytes());
    }
    let head = format!(
        "--edge\r\ncontent-disposition: form-data; name=\"file\"; filename=\"{name}\"\r\n\
         content-type: text/csv\r\n\r\n"
    );
    body.extend_from_slice(head.as_bytes());
    body.extend_from_slice(bytes);
    body.extend_from_slice(b"\r\n--edge--\r\n");
    let request = Request::builder()
        .method("POST")
        .uri("/imports")
        .header("sec-fetch-site", "same-origin")
        .header(header::COOKIE, format!("__Host-sid={}", person.token()))
        .header(header::CONTENT_TYPE, "multipart/form-data; boundary=edge");
    person.lab.send(request.body(Body::from(body)).unwrap())
}

/// Uploads, previews and imports a file; answers with the page of the import.
pub fn imports(person: &Person<'_>, name: &str, bytes: &[u8]) -> Seen {
    let seen = upload(person, name, bytes);
    assert_eq!(seen.status, 303, "{}", seen.text());
    let preview = seen.location.unwrap();
    let action = preview.split('?').next().unwrap();
    person.sees(&preview, "Nothing is recorded yet");
    person.does(&preview, action, &[])
}

#[test]
fn both_published_sets_come_in_whole_with_the_counts_of_their_files() {
    let lab = Lab::new();
    let person = lab.manager();
    for (name, bytes, results, words) in [
        ("zno.csv", zno(), 90, "90 results: 1 product, 9 lots, 9 studies, 9 arms, 90 pulls"),
        ("tacrolimus.csv", tacrolimus(), 128, "128 results: 1 product, 2 lots, 2 studies, 8 arms, 64 pulls"),
    ] {
        let lines = String::from_utf8(bytes.clone()).unwrap().lines().count() - 1;
        assert_eq!(lines, results);
        let seen = imports(&person, name, &bytes);
        assert!(seen.text().contains(words), "{}", seen.text());
        person.sees("/imports", name);
        person.sees("/history", words);
    }
    let counts = lab.app.db.read(|reader| store::import::counts(reader, 2)).unwrap();
    assert_eq!((counts.results, counts.arms, counts.pulls), (128, 8, 64));
    let report = lab
        .app
        .db
        .read(|reader| Ok(store::verify::run(reader, &lab.folder.0.join("files"), None, &mut |_, _| ())));
    assert_eq!(report.unwrap().findings, []);
}

/// Decision B17: means keep their spread, and their number of readings, exactly as the file has them.
#[test]
fn an_imported_lot_says_so_on_its_page() {
    let lab = Lab::new();
    let person = lab.manager();
    let seen = imports(&person, "tacrolimus.csv", &tacrolimus());
    let lot = seen.links().into_iter().find(|link| link.starts_with("/lots/")).unwrap();
    let page = person.sees(&lot, "I1-L01");
    assert!(page.text().contains("imported"), "{}", page.text());
}

/// Every imported study shows its charts, a point for each result of the file.
#[test]
fn imported_studies_show_their_charts_with_every_point() {
    let lab = Lab::new();
    let person = lab.manager();
    let mut points = 0;
    for (name, bytes) in [("zno.csv", zno()), ("tacrolimus.csv", tacrolimus())] {
        let seen = imports(&person, name, &bytes);
        for study in seen.links().into_iter().filter(|link| link.starts_with("/studies/")) {
            let page = person.sees(&study, "imported, not observed here");
            let html = scraper::Html::parse_document(&page.html());
            let rows = scraper::Selector::parse("details.numbers tbody tr").unwrap();
            let drawings = scraper::Selector::parse("figure.chart svg[role=img]").unwrap();
            points += html.select(&rows).count();
            assert!(html.select(&drawings).count() > 0, "{study}");
        }
    }
    assert_eq!(points, 90 + 128);
}

#[test]
fn the_same_file_twice_is_refused_with_its_date() {
    let lab = Lab::new();
    let person = lab.manager();
    imports(&person, "zno.csv", &zno());
    let before = lab.app.db.read(store::trail::head).unwrap();
    let preview = upload(&person, "renamed.csv", &zno()).location.unwrap();
    let action = preview.split('?').next().unwrap().to_string();
    let again = person.submits(&preview, &action, &[]);
    assert_eq!(again.status, 409);
    assert!(again.text().contains("imported before, on 1 Dec 2026, as import 1"), "{}", again.text());
    assert_eq!(lab.app.db.read(store::trail::head).unwrap(), before);
}

/// All or nothing, every cell named at once, on the page and in the act.
#[test]
fn unreadable_cells_are_all_named_and_nothing_is_imported() {
    let lab = Lab::new();
    let person = lab.manager();
    let text = String::from_utf8(zno()).unwrap();
    let spoilt =
        text.replacen("0.95", "0.9.5", 1).replacen("0.86", "about 0.86", 1).replacen(",7,day", ",7,dy", 1);
    let seen = upload(&person, "spoilt.csv", spoilt.as_bytes());
    assert_eq!(seen.status, 422);
    for words in ["Line 3, value: ", "Line 8, time_unit: ", "Line 10, value: "] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    let before = lab.app.db.read(store::trail::head).unwrap();
    let refused = acts::import::import(&lab.app.db, &person.actor(), "spoilt.csv", spoilt.as_bytes());
    assert!(
        matches!(refused, Err(Failure::Refused(refusal)) if refusal.sentence.contains("Nothing was imported"))
    );
    assert_eq!(lab.app.db.read(store::trail::head).unwrap(), before);
    assert!(lab.app.db.read(store::import::all).unwrap().is_empty());
}

#[test]
fn the_two_files_that_are_no_stability_results_are_refused_with_a_clear_sentence() {
    let lab = Lab::new();
    let person = lab.manager();
    let cross = std::fs::read(data("crosssection_caco3_acacia_and_ibuprofen_grewia.csv")).unwrap();
    let seen = upload(&person, "cross.csv", &cross);
    assert_eq!(seen.status, 422);
    let words = "Line 2, time: the cell is empty. A stability result needs the age at which it was measured.";
    assert!(seen.text().contains(words), "{}", seen.text());
    let settling = std::fs::read(data("settling_usgs_withdrawal_times.csv")).unwrap();
    let seen = upload(&person, "settling.csv", &settling);
    assert_eq!(seen.status, 422);
    assert!(seen.text().contains("does not name the columns study, formulation"), "{}", seen.text());
    assert!(seen.text().contains("columns that are not read: phi_class"), "{}", seen.text());
}

#[test]
fn only_a_lab_manager_imports_and_a_form_without_a_file_says_so() {
    let lab = Lab::new();
    let seen = lab.manager().submits("/imports", "/imports", &[]);
    assert_eq!(seen.status, 422);
    assert!(seen.text().contains("Choose the CSV file"), "{}", seen.text());
    let auditor = lab.auditor().sees("/imports", "No file was imported here");
    assert!(!auditor.html().contains("type=\"file\""));
    let refused = acts::import::import(&lab.app.db, &lab.analyst().actor(), "zno.csv", &zno());
    assert!(matches!(refused, Err(Failure::Denied(_))));
    let elsewhere = format!("/imports/held/{}", "0".repeat(64));
    assert_eq!(lab.manager().get(&elsewhere).status, 404);
    assert_eq!(lab.manager().get("/imports/held/..%2Fserver.key").status, 404);
}

/// The page of an imported formulation says what it is and what cannot rest on it (decision B17).
#[test]
fn an_imported_formulation_says_what_it_is() {
    let lab = Lab::new();
    lab.manager();
    supernate::acts::import::import(&lab.app.db, &lab.actor("maren.oddy"), "zno.csv", &zno()).unwrap();
    let seen =
        lab.auditor().sees("/formulation-versions/1", "as the imported file names it, not observed here");
    for words in ["zno.csv", "Its imported lots", "No lot, protocol, release or conclusion can rest on it"] {
        assert!(seen.text().contains(words), "{words}: {}", seen.text());
    }
    for absent in ["Ingredients", "Physical data"] {
        assert!(!seen.text().contains(absent), "{absent}: {}", seen.text());
    }
    assert!(seen.links().contains(&"/imports/1".to_string()), "{:?}", seen.links());
}
