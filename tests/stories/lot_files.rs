//! Everything about a lot, the same in every form, and a change in any file is named.

use std::collections::BTreeMap;
use std::io::{Cursor, Read, Write};

use scraper::{Html, Selector};

use crate::support::samples::Bench;
use crate::support::{Lab, Scratch};
use supernate::acts;
use supernate::acts::lot_file::{Made, check, files};
use supernate::domain::lot_file::Export;
use supernate::domain::sample::Purpose;
use supernate::store;

fn tacrolimus() -> Vec<u8> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/numbers/data/suspensions/tacrolimus_cjhp2017.csv");
    std::fs::read(path).unwrap()
}

/// A laboratory with an imported lot; answers with its number in the database.
fn with_lot() -> (Lab, i64) {
    let lab = Lab::new();
    acts::import::import(&lab.app.db, &lab.actor("maren.oddy"), "tacrolimus.csv", &tacrolimus()).unwrap();
    let lot = lab.app.db.read(|reader| store::lot::by_number(reader, "I1-L01")).unwrap().unwrap().id;
    (lab, lot)
}

fn unpacked(bytes: &[u8]) -> BTreeMap<String, Vec<u8>> {
    let mut archive = zip::ZipArchive::new(Cursor::new(bytes)).unwrap();
    (0..archive.len())
        .map(|at| {
            let mut entry = archive.by_index(at).unwrap();
            let mut bytes = Vec::new();
            entry.read_to_end(&mut bytes).unwrap();
            (entry.name().unwrap().into_owned(), bytes)
        })
        .collect()
}

fn text(files: &BTreeMap<String, Vec<u8>>, name: &str) -> String {
    String::from_utf8(files[name].clone()).unwrap()
}

fn export(lab: &Lab, lot: i64) -> Made {
    acts::lot_file::make(&lab.app.db, &lab.actor("ines.caro"), lot, &lab.folder.0, false).unwrap()
}

/// requirement P2: the counts and the values are those of the database in HTML, CSV and JSON.
#[test]
fn every_form_holds_the_same_results_as_the_database() {
    let (lab, lot) = with_lot();
    let files = unpacked(&export(&lab, lot).bytes);
    let json: serde_json::Value = serde_json::from_str(&text(&files, "lot.json")).unwrap();
    let lots = lab.app.db.read(|reader| store::import::lots(reader, 1)).unwrap();
    let in_database = lots.iter().find(|one| one.lot == lot).unwrap().results as usize;
    assert_eq!(in_database, 64);
    for (name, table) in json["tables"].as_object().unwrap() {
        let mut reader = csv::Reader::from_reader(&files[&format!("csv/{name}.csv")][..]);
        assert_eq!(reader.records().count(), table.as_array().unwrap().len(), "{name}");
    }
    let results = json["tables"]["results"].as_array().unwrap();
    assert_eq!(results.len(), in_database);
    let page = Html::parse_document(&text(&files, "lot-file.html"));
    let rows = Selector::parse("section[id^='sample-'] tbody tr").unwrap();
    assert_eq!(page.select(&rows).count(), in_database);
    let words: String = page.root_element().text().collect::<Vec<_>>().join(" ");
    for result in results {
        let (shown, sd) = (result["shown"].as_str().unwrap(), result["sd"].as_str());
        assert!(words.contains(&format!("{shown} (no limit)")), "{shown}");
        assert!(sd.is_none_or(|sd| words.contains(&format!("{sd} (n 3)"))), "{sd:?}");
    }
    assert!(words.contains("imported, not observed here"));
}

/// The same records give the same bytes; only the export's own line differs.
#[test]
fn the_same_records_give_the_same_bytes_apart_from_the_export_line() {
    let (lab, lot) = with_lot();
    let first = unpacked(&export(&lab, lot).bytes);
    let systems = text(&first, "lot-file.html");
    assert!(systems.contains("holds: each of "), "the chain was checked for the export");
    assert!(systems.contains("SQLite 3.") && systems.contains("not confirmed on this system"));
    lab.later_minutes(3);
    let second = unpacked(&export(&lab, lot).bytes);
    for (name, bytes) in &first {
        match name.as_str() {
            "EXPORT.txt" | "MANIFEST.sha256" => assert_ne!(bytes, &second[name]),
            _ if name.ends_with(".html") => {
                let (one, other) = (text(&first, name), text(&second, name));
                let differ = one.lines().zip(other.lines()).filter(|(one, other)| one != other);
                let is_of_export =
                    |line: &str| line.contains("Exported at") || line.contains("id=\"systems\"");
                assert!(differ.clone().all(|(line, _)| is_of_export(line)), "{name}");
                assert_eq!(differ.count(), 3, "{name}");
            }
            _ => assert_eq!(bytes, &second[name], "{name}"),
        }
    }
    let file = lab.app.db.read(|reader| store::lot_file::load(reader, lot)).unwrap();
    let systems = vec![("e".to_string(), "f".to_string())];
    let export = Export { at: "a".into(), by: "b".into(), program: "c".into(), head: "d".into(), systems };
    let packed =
        || supernate::report::zip::pack(&files(&file, &export, &lab.folder.0, false).unwrap()).unwrap();
    assert_eq!(packed(), packed());
}

/// The digest is on the trail; `verify` compares with it.
#[test]
fn the_digest_stands_on_the_trail_and_the_archive_holds() {
    let (lab, lot) = with_lot();
    let made = export(&lab, lot);
    lab.auditor().sees("/history", &format!("I1-L01, sha256 {}", made.digest));
    let folder = Scratch::new();
    let path = folder.0.join("lot.zip");
    std::fs::write(&path, &made.bytes).unwrap();
    let checked = check(&path, Some(&made.digest)).unwrap();
    assert_eq!((checked.findings.len(), checked.files), (0, unpacked(&made.bytes).len() - 1));
    let other = check(&path, Some(&"0".repeat(64))).unwrap();
    assert_eq!(other.findings, ["the archive: its digest is not the expected one"]);
    let listed = text(&unpacked(&made.bytes), "MANIFEST.sha256");
    assert!(listed.lines().all(|line| line.len() > 66 && &line[64..66] == "  "), "{listed}");
}

/// requirement I11: a changed byte in any file is named with the file; so are a file that is gone or added.
#[test]
fn a_changed_missing_or_added_file_is_named() {
    let (lab, lot) = with_lot();
    let whole = unpacked(&export(&lab, lot).bytes);
    let folder = Scratch::new();
    let path = folder.0.join("lot.zip");
    let repacked = |files: &BTreeMap<String, Vec<u8>>| {
        let mut archive = zip::ZipWriter::new(Cursor::new(Vec::new()));
        for (name, bytes) in files {
            archive.start_file(name.as_str(), zip::write::SimpleFileOptions::default()).unwrap();
            archive.write_all(bytes).unwrap();
        }
        std::fs::write(&path, archive.finish().unwrap().into_inner()).unwrap();
        check(&path, None).unwrap().findings
    };
    assert!(repacked(&whole).is_empty());
    for name in whole.keys().filter(|name| *name != "MANIFEST.sha256") {
        let mut files = whole.clone();
        let bytes = files.get_mut(name).unwrap();
        let middle = bytes.len() / 2;
        bytes[middle] ^= 1;
        assert_eq!(repacked(&files), [format!("{name}: it was changed")]);
        files.remove(name);
        assert_eq!(repacked(&files), [format!("{name}: it is missing")]);
    }
    let mut files = whole.clone();
    files.insert("more.txt".to_string(), b"more".to_vec());
    assert_eq!(repacked(&files), ["more.txt: the manifest does not know it"]);
    files.remove("MANIFEST.sha256");
    assert_eq!(repacked(&files), ["MANIFEST.sha256: it is missing or damaged"]);
}

/// A bit that flips in the archive itself is found wherever its content is.
#[test]
fn a_flipped_byte_of_the_archive_is_found() {
    let (lab, lot) = with_lot();
    let made = export(&lab, lot);
    let folder = Scratch::new();
    let path = folder.0.join("lot.zip");
    for part in 1..20 {
        let mut bytes = made.bytes.clone();
        let at = bytes.len() * part / 20;
        bytes[at] ^= 4;
        std::fs::write(&path, &bytes).unwrap();
        let checked = check(&path, Some(&made.digest)).unwrap();
        assert!(!checked.findings.is_empty(), "byte {at}");
    }
}

#[test]
fn the_auditor_reads_the_lot_file_in_both_orders_and_exports_it() {
    let (lab, lot) = with_lot();
    let auditor = lab.auditor();
    let path = format!("/lots/{lot}/file");
    let page = auditor.sees(&path, "Samples and pulls");
    assert!(page.text().contains("100.0 (no limit)"), "{}", page.text());
    assert!(page.html().contains("Your reading is logged"));
    let by_time = auditor.sees(&format!("{path}?order=time"), "ImportResults");
    assert!(by_time.links().contains(&"/history/".to_string()) || by_time.html().contains("/history/"));
    auditor.sees(&format!("{path}?order=time&person=maren.oddy&day=1+Dec+2026"), "ImportResults");
    let none = auditor.get(&format!("{path}?order=time&person=maren.oddy&day=2026-12-02"));
    assert!(none.text().contains("none recorded"), "{}", none.text());
    let seen = auditor.does(&path, &path, &[]);
    assert!(seen.text().contains("Note its digest on paper"), "{}", seen.text());
    let fetch = seen.links().into_iter().find(|link| link.starts_with(&format!("{path}/"))).unwrap();
    let fetched = auditor.get(&fetch);
    assert_eq!(fetched.headers["content-type"], "application/zip");
    assert_eq!(supernate::domain::digest::sha256_hex(&fetched.body), fetch.rsplit('/').next().unwrap());
    assert_eq!(lab.analyst().get(&fetch).status, 403);
    assert_eq!(auditor.get(&format!("{path}/{}", "0".repeat(64))).status, 404);
    let analyst = lab.analyst().get(&path);
    assert!(!analyst.html().contains("Export the lot file"));
}

/// requirement P2, I13: readings, the correction was → is, and the signature with its meaning, in every form alike.
#[test]
fn readings_corrections_and_signatures_are_in_every_form() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0640");
    let sample = bench.ready(lot, Purpose::Release);
    let corrected = bench.receives(lot, Purpose::RetainCheck, &["assay"]);
    bench.completes("rafe.tolland", corrected, "assay", &["99.1", "99.9"]);
    bench.corrects("rafe.tolland", corrected, "assay", 1, "99.5");
    let (qa, page) = (lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);

    let files = unpacked(&export(&lab, lot).bytes);
    let json: serde_json::Value = serde_json::from_str(&text(&files, "lot.json")).unwrap();
    let table = |name: &str| json["tables"][name].as_array().unwrap().clone();
    let count = |sample| {
        lab.app.db.read(|reader| store::reading::of_samples(reader, &format!("[{sample}]"))).unwrap().len()
    };
    let in_database = count(sample) + count(corrected);
    assert_eq!(in_database, 7);
    assert_eq!(table("readings").len(), in_database);
    let mut reader = csv::Reader::from_reader(&files["csv/readings.csv"][..]);
    assert_eq!(reader.records().count(), in_database);
    let page = Html::parse_document(&text(&files, "lot-file.html"));
    let rows = Selector::parse("tr[id^='reading-']").unwrap();
    assert_eq!(page.select(&rows).count(), in_database);

    let correction = &table("corrections")[0];
    assert_eq!((&correction["was"], &correction["is"]), (&"99.9".into(), &"99.5".into()));
    assert_eq!(correction["reason"], "mistyped");
    let signatures = table("signatures");
    let signed = signatures.iter().find(|one| one["record"] == "sample").unwrap();
    assert_eq!((&signed["signed_by"], &signed["role"]), (&"Ada Whitlock".into(), &"QA reviewer".into()));
    assert_eq!(signed["signed_at"], "2026-12-01T09:00:00.000Z");
    let words: String = page.root_element().text().collect::<Vec<_>>().join(" ");
    for shown in ["99.9 (97.0 to 103.0)\u{202f}%", "1.12 (1.00 to 1.20)\u{202f}g/mL", "mistyped", "review"] {
        assert!(words.contains(shown), "{shown}");
    }
    for table in table("results") {
        let shown = format!("{} ({})", table["shown"].as_str().unwrap(), table["limits"].as_str().unwrap());
        assert!(words.contains(&shown), "{shown}");
    }
}
