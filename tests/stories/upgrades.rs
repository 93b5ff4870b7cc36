//! A data folder of an older program opens in the newest one: nothing is lost, all seals hold, work goes on.

use std::path::{Path, PathBuf};

use rusqlite::Connection;

use super::verification::verify;
use crate::support::{Lab, Scratch};

/// The dumps of older schemas, oldest first, each with the version its name says.
fn dumps() -> Vec<(i64, PathBuf)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/stories/data");
    let mut found: Vec<(i64, PathBuf)> = std::fs::read_dir(folder)
        .unwrap()
        .filter_map(|entry| {
            let path = entry.unwrap().path();
            let name = path.file_name()?.to_str()?.strip_prefix("schema_v")?.strip_suffix(".sql")?;
            Some((name.parse().unwrap(), path.clone()))
        })
        .collect();
    found.sort();
    found
}

fn newest_migration() -> i64 {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("migrations");
    let names = std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().file_name());
    let version = |name: std::ffi::OsString| {
        let name = name.to_str()?.to_string();
        name.strip_prefix('V')?.split("__").next()?.parse().ok()
    };
    names.filter_map(version).max().unwrap()
}

fn schema_version(file: &Path) -> i64 {
    let sql = "select max(version) from refinery_schema_history";
    Connection::open(file).unwrap().query_row(sql, [], |row| row.get(0)).unwrap()
}

/// A folder with the database of a dump, as the older program left it.
fn folder_of(dump: &Path) -> Scratch {
    let folder = Scratch::new();
    let file = Connection::open(folder.0.join("supernate.sqlite")).unwrap();
    file.execute_batch(&std::fs::read_to_string(dump).unwrap()).unwrap();
    file.pragma_update(None, "journal_mode", "wal").unwrap();
    folder
}

fn counts(file: &Path) -> Vec<i64> {
    let connection = Connection::open(file).unwrap();
    let count = |table: &str| {
        connection.query_row(&format!("select count(*) from {table}"), [], |row| row.get(0)).unwrap()
    };
    ["lot", "pull", "sample", "reading", "result", "flag", "signature", "investigation"].map(count).to_vec()
}

/// Each older schema with rows in it: migrated, every seal, row digest and signature holds, its pages open.
#[test]
fn a_folder_of_an_older_program_opens_migrates_and_verifies() {
    let all = dumps();
    assert!(all.iter().any(|(version, _)| *version == 4), "{all:?}");
    for (version, dump) in all {
        let folder = folder_of(&dump);
        let file = folder.0.join("supernate.sqlite");
        assert_eq!(schema_version(&file), version);
        let before = counts(&file);
        assert!(before.iter().all(|count| *count > 0), "{before:?}");
        let lab = Lab::over(folder);
        assert_eq!(schema_version(&file), newest_migration());
        assert_eq!(counts(&file), before);
        let copy = lab.folder.0.join(format!("supernate.before-V{:02}.sqlite", version + 1));
        assert_eq!(copy.exists(), newest_migration() > version, "a copy is kept before a migration");
        let report = verify(&lab.folder.0, None);
        assert_eq!(report.findings, [], "from version {version}");
        assert!(report.acts > 70 && report.rows > 100 && report.signatures > 5, "{report:?}");
        opens_its_pages(&lab);
    }
}

fn opens_its_pages(lab: &Lab) {
    lab.clock("2026-12-04T09:00:00Z");
    let manager = lab.manager();
    manager.sees("/lots/1", "released");
    manager.sees("/lots/1/file", "TW-104-0640");
    manager.sees("/studies/1", "TW-104-0640");
    manager.sees("/investigations/1", "107.9");
    manager.sees("/bench", "TW-104-0640");
    lab.reviewer().sees("/review/6", "TW-104-0640");
    lab.reviewer().sees("/lots/1/decision", "Released by me as the authorised person");
    lab.auditor().sees("/history", "TW-104-0640 released, use by 30 Nov 2028");
}

/// Work goes on in it: a record made after the migration is sealed on top of the old ones.
#[test]
fn a_migrated_folder_takes_new_records() {
    for (version, dump) in dumps() {
        let lab = Lab::over(folder_of(&dump));
        lab.clock("2026-12-04T09:00:00Z");
        let acts = verify(&lab.folder.0, None).acts;
        let fields = [("code", "TW-900"), ("name", "Chalk suspension"), ("dosage_form", "oral suspension")];
        lab.manager().does("/products/new", "/products/new", &fields);
        let report = verify(&lab.folder.0, None);
        assert_eq!(report.findings, [], "from version {version}");
        assert!(report.acts > acts);
        assert!(lab.manager().get("/products").text().contains("Chalk suspension"));
    }
}
