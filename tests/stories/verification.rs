//! Verification names what was changed behind the program's back.

use std::path::{Path, PathBuf};

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Scratch};
use rusqlite::Connection;
use supernate::acts;
use supernate::domain::sample::Purpose;
use supernate::store::verify::Report;

/// A copy of a laboratory's folder, its triggers dropped, so that it can be tampered with.
fn copy(lab: &Lab) -> Scratch {
    let folder = Scratch::new();
    lab.app.db.back_up(&database(&folder)).unwrap();
    for file in std::fs::read_dir(lab.folder.0.join("files")).unwrap() {
        let file = file.unwrap();
        std::fs::copy(file.path(), folder.0.join("files").join(file.file_name())).unwrap();
    }
    folder
}

fn database(folder: &Scratch) -> PathBuf {
    folder.0.join("supernate.sqlite")
}

pub fn verify(folder: &Path, expected: Option<&str>) -> Report {
    let quiet = &mut |_: &str, _: u64| ();
    acts::verify::folder(&folder.join("supernate.sqlite"), &folder.join("files"), expected, quiet).unwrap()
}

/// A copy of a laboratory's folder that was changed by raw SQL, with every trigger dropped and made again.
pub fn tampered(lab: &Lab, sql: &str) -> Scratch {
    let folder = copy(lab);
    let other = Connection::open(database(&folder)).unwrap();
    let names: Vec<(String, String)> = other
        .prepare("select name, sql from sqlite_schema where type = 'trigger'")
        .unwrap()
        .query_map([], |row| Ok((row.get(0)?, row.get(1)?)))
        .unwrap()
        .collect::<Result<_, _>>()
        .unwrap();
    for (name, _) in &names {
        other.execute_batch(&format!("drop trigger {name}")).unwrap();
    }
    other.execute_batch("pragma foreign_keys = off").unwrap();
    other.execute_batch(sql).unwrap_or_else(|failure| panic!("{sql}: {failure}"));
    for (_, made) in &names {
        other.execute_batch(made).unwrap();
    }
    drop(other);
    folder
}

fn after(lab: &Lab, sql: &str) -> Report {
    verify(&tampered(lab, sql).0, None)
}

fn lived_in() -> Lab {
    let lab = Lab::new();
    lab.administrator().does("/people/5", "/people/5/state", &[("why", "left the company today")]);
    lab.analyst().does(
        "/me",
        "/me/password",
        &[("present", PASSWORD), ("password", "seven slow barges on the canal")],
    );
    lab
}

#[test]
fn an_untouched_copy_holds_and_its_head_is_the_history_pages_head() {
    let lab = lived_in();
    let folder = copy(&lab);
    let head = lab.app.db.read(supernate::store::trail::head).unwrap();
    let report = verify(&folder.0, None);
    assert_eq!(report.findings, []);
    assert_eq!(report.head, head);
    assert!(report.acts > 10 && report.rows > 20 && report.lines >= report.rows, "{report:?}");
    let noted = head.unwrap();
    lab.administrator().does("/people/5", "/people/5/state", &[("why", "came back to the company")]);
    let later = verify(&copy(&lab).0, Some(&noted.1));
    assert_eq!((later.findings.len(), later.expected_at), (0, Some(noted.0)));
}

/// requirement P1, sec_S108: each kind of tampering is named with its table and row.
#[test]
fn each_change_from_outside_is_named() {
    let lab = lived_in();
    let table = [
        ("update account set full_name = 'Rafe Tollans' where id = 6", "account", 6),
        ("update account_roles set roles = 'QA reviewer' where account = 6", "account_roles", 4),
        ("delete from account_state where id = 1", "account_state", 1),
        ("insert into setting (id, name, value, act) values (77, 'a', 'b', 3)", "setting", 77),
        (
            "update account set id = 900 where id = 6; update account set id = 6 where id = 7;
             update account set id = 7 where id = 900",
            "account",
            6,
        ),
        ("update site set zone = 'Europe/Paris'", "site", 1),
    ];
    for (sql, record, row) in table {
        let report = after(&lab, sql);
        let first = report.findings.first().unwrap_or_else(|| panic!("{sql}: nothing found"));
        assert_eq!(first.record, Some((record.to_string(), row)), "{sql}: {first}");
    }
}

#[test]
fn each_change_of_the_trail_itself_is_named() {
    let lab = lived_in();
    let last = lab.app.db.read(supernate::store::trail::head).unwrap().unwrap().0;
    let table = [
        ("update trail_act set reason = 'another reason' where id = 5", 5),
        ("update trail_act set at = '2026-11-30T09:00:00.000Z' where id = 5", 5),
        ("update trail_act set full_name = 'Nobody' where id = 5", 5),
        ("delete from trail_act where id = 5", 5),
        ("update trail_change set kind = 'update' where act = 5 and line = 1", 5),
        ("delete from trail_change where act = 5 and line = 1", 5),
        (
            "insert into trail_change (act, line, record, row, kind, digest) values (5, 99, 'site', 1, 'update', x'00')",
            5,
        ),
        ("update trail_change set line = 50 where act = 5 and line = 1", 5),
        ("update trail_seal set digest = zeroblob(32) where act = 5", 5),
        ("delete from trail_seal where act = 5", 5),
        (
            "update trail_seal set act = -1 where act = 5; update trail_seal set act = 5 where act = 6;
             update trail_seal set act = 6 where act = -1",
            5,
        ),
    ];
    assert!(last > 6);
    for (sql, act) in table {
        let report = after(&lab, sql);
        let first = report.findings.first().unwrap_or_else(|| panic!("{sql}: nothing found"));
        assert_eq!(first.act, Some(act), "{sql}: {first}");
    }
}

/// A cut tail is found only with a seal that was noted elsewhere.
#[test]
fn a_cut_tail_is_found_against_a_noted_seal() {
    let lab = lived_in();
    let (act, seal) = lab.app.db.read(supernate::store::trail::head).unwrap().unwrap();
    let folder = copy(&lab);
    let other = Connection::open(database(&folder)).unwrap();
    other
        .execute_batch(
            "drop trigger guard_trail_seal_delete; drop trigger guard_trail_change_delete;
             drop trigger guard_trail_act_delete; pragma foreign_keys = off;",
        )
        .unwrap();
    for table in ["trail_seal where act", "trail_change where act", "trail_act where id"] {
        other.execute_batch(&format!("delete from {table} = {act}")).unwrap();
    }
    drop(other);
    let report = verify(&folder.0, Some(&seal));
    assert!(
        report.findings.iter().any(|finding| finding.sentence.contains("cut or rewritten")),
        "{report:?}"
    );
    assert!(report.findings.iter().any(|finding| finding.sentence.contains("guard_trail_seal_delete")));
}

/// Every byte of a stored name, one after the other: each flip is found.
#[test]
fn each_flipped_byte_of_a_record_is_found() {
    let lab = lived_in();
    let folder = copy(&lab);
    let bytes = std::fs::read(database(&folder)).unwrap();
    let name = b"Ilse Brandt";
    let places: Vec<usize> = bytes
        .windows(name.len())
        .enumerate()
        .filter(|(_, window)| window == name)
        .map(|(at, _)| at)
        .collect();
    assert!(!places.is_empty());
    let (mut planted, mut found) = (0, 0);
    for place in places {
        for step in 0..name.len() {
            let mut changed = bytes.clone();
            changed[place + step] ^= 1;
            std::fs::write(database(&folder), &changed).unwrap();
            planted += 1;
            found += usize::from(!verify(&folder.0, None).holds());
        }
    }
    assert_eq!(found, planted);
}

#[test]
fn verification_leaves_the_copy_as_it_was() {
    let lab = lived_in();
    let folder = copy(&lab);
    let before = std::fs::read(database(&folder)).unwrap();
    assert!(verify(&folder.0, None).holds());
    assert_eq!(std::fs::read(database(&folder)).unwrap(), before);
    let names: Vec<String> = std::fs::read_dir(&folder.0)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().to_string_lossy().into_owned())
        .collect();
    assert_eq!(names.len(), 2, "{names:?}");
}

/// Signatures over shelf lives and lifted stops are recomputed from the records they stand under.
#[test]
fn a_changed_shelf_life_or_lifted_stop_breaks_its_signature() {
    let lab = Lab::new();
    let product = crate::support::world::product(&lab, "TW-104");
    let presentation = crate::support::world::presentation(&lab, product, "TW-104-200");
    let path = format!("/presentations/{presentation}/shelf-life");
    let fields = [
        ("storage_statement", "Do not store above 25 °C"),
        ("months", "24"),
        ("basis", "tentative"),
        ("reference", "report SR-014"),
        ("expiry_format", "month"),
    ];
    lab.reviewer().signs(&path, &path, &fields);
    let fields = [("code", "PH-02"), ("name", "pH meter"), ("kind", "pH meter")];
    lab.manager().does("/instruments/new", "/instruments/new", &fields);
    let fields = [
        ("stop", "calibration"),
        ("instrument", "1"),
        ("reason", "  Checked against two buffers, both within 0.02 units "),
    ];
    lab.reviewer().signs("/overrides/new", "/overrides/new", &fields);
    let untouched = verify(&copy(&lab).0, None);
    assert!(untouched.holds() && untouched.signatures == 2, "{untouched:?}");
    for tampering in
        ["update shelf_life_assignment set months = 36", "update stop_override set valid_on = '2026-12-02'"]
    {
        let report = format!("{:?}", after(&lab, tampering));
        assert!(
            report.contains("what Ada Whitlock signed is not what stands there"),
            "{tampering}: {report}"
        );
    }
}

/// requirement P1: a signed reading that is changed from outside is named, and so is the signature over it.
#[test]
fn a_changed_reading_is_named_with_the_signature_over_it() {
    let lab = Lab::new();
    let bench = Bench::new(&lab);
    let sample = bench.ready(bench.lot("TW-104-0640"), Purpose::Release);
    let (qa, page) = (lab.reviewer(), format!("/review/{sample}"));
    qa.does(&page, &format!("{page}/agree"), &[]);
    qa.signs("/review/sign", "/review/sign", &[]);
    let untouched = verify(&copy(&lab).0, None);
    assert_eq!(untouched.findings, []);
    assert_eq!(untouched.recomputed, untouched.signatures, "every signature is computed again");
    let report = after(&lab, "update reading set typed = '99.9', value = '99.9' where id = 1");
    let found: Vec<Option<(String, i64)>> =
        report.findings.iter().map(|finding| finding.record.clone()).collect();
    assert_eq!(found, [Some(("reading".to_string(), 1)), Some(("sample".to_string(), sample))]);
    let report = after(&lab, "update signature set digest = replace(digest, 'a', 'b') where kind = 'sample'");
    let first = report.findings.first().and_then(|finding| finding.record.clone()).unwrap();
    assert_eq!(first.0, "signature");
}
