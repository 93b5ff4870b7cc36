//! Backup, restore and the commands that go with them.

use std::io::Write;
use std::path::Path;
use std::process::{Command, Output, Stdio};

use crate::support::{Lab, PASSWORD, Scratch};
use supernate::acts;

fn command(arguments: &[&str], typed: &str) -> Output {
    let mut child = Command::new(env!("CARGO_BIN_EXE_supernate"))
        .args(arguments)
        .env("RUST_LOG", "off")
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    child.stdin.take().unwrap().write_all(typed.as_bytes()).unwrap();
    child.wait_with_output().unwrap()
}

fn said(output: &Output) -> String {
    format!("{}{}", String::from_utf8_lossy(&output.stdout), String::from_utf8_lossy(&output.stderr))
}

fn text(path: &Path) -> &str {
    path.to_str().unwrap()
}

/// The way back: backup while the laboratory works, restore elsewhere, verify, the same head and counts.
#[test]
fn a_backup_restores_to_the_same_records() {
    let lab = Lab::new();
    lab.administrator().does("/people/5", "/people/5/state", &[("why", "left the company today")]);
    let picture = b"not really a picture, but bytes with a digest";
    let digest = supernate::domain::digest::sha256_hex(picture);
    std::fs::write(lab.folder.0.join("files").join(&digest), picture).unwrap();
    let elsewhere = Scratch::new();
    for name in ["backup", "backup.zip"] {
        let to = elsewhere.0.join(name);
        let quiet = &mut |_: &str, _: u64| ();
        let made = acts::backup::back_up(&lab.folder.0, &to, quiet).unwrap();
        assert!(made.holds(), "{made:?}");
        let again = elsewhere.0.join(format!("restored-from-{name}"));
        let restored = acts::backup::restore(&to, &again, quiet).unwrap();
        assert_eq!(restored, made);
        assert_eq!(restored.head, lab.app.db.read(supernate::store::trail::head).unwrap());
        assert_eq!(std::fs::read(again.join("files").join(&digest)).unwrap(), picture);
        assert!(acts::backup::restore(&to, &again, quiet).is_err(), "a used folder is never overwritten");
        let output = command(&["verify", text(&again)], "");
        assert!(output.status.success() && said(&output).contains("Everything holds."), "{}", said(&output));
    }
}

/// A damaged backup is named, with exit code 1.
#[test]
fn a_damaged_backup_is_named_by_restore_and_verify() {
    let lab = Lab::new();
    let elsewhere = Scratch::new();
    let backup = elsewhere.0.join("backup");
    acts::backup::back_up(&lab.folder.0, &backup, &mut |_, _| ()).unwrap();
    let file = backup.join("supernate.sqlite");
    let mut bytes = std::fs::read(&file).unwrap();
    let at = bytes.windows(11).position(|window| window == b"Ilse Brandt").unwrap();
    bytes[at] = b'E';
    std::fs::write(&file, bytes).unwrap();
    for arguments in [
        vec!["verify", text(&backup)],
        vec!["restore", text(&backup), "--data", text(&elsewhere.0.join("again"))],
    ] {
        let output = command(&arguments, "");
        assert_eq!(output.status.code(), Some(1), "{}", said(&output));
        assert!(said(&output).contains("does not hold: entry"), "{}", said(&output));
    }
}

/// A real folder, from nothing: people by the console, an act as a person with a password.
#[test]
fn accounts_are_kept_from_the_command_line() {
    let lab = Lab::new();
    let elsewhere = Scratch::new();
    let data = elsewhere.0.join("data");
    acts::backup::back_up(&lab.folder.0, &data, &mut |_, _| ()).unwrap();
    let data = text(&data);
    let create = [
        "account",
        "--data",
        data,
        "--as",
        "nell.farrow",
        "create",
        "kit.orme",
        "--full-name",
        "Kit Orme",
        "--identity-verified-by",
        "Nell Farrow, passport seen",
        "--role",
        "analyst",
    ];
    let refused = command(&create, "not the password\n");
    assert_eq!(refused.status.code(), Some(1), "{}", said(&refused));
    assert!(said(&refused).contains("not right"), "{}", said(&refused));
    let created = command(&create, &format!("{PASSWORD}\n"));
    assert!(created.status.success() && said(&created).contains("Code for Kit Orme"), "{}", said(&created));
    let why = ["--because", "left the company today"];
    let disabled = command(&[&["account", "--data", data, "disable", "kit.orme"], &why[..]].concat(), "");
    assert!(disabled.status.success(), "{}", said(&disabled));
    let code = command(&[&["account", "--data", data, "code", "ilse.brandt"], &why[..]].concat(), "");
    assert!(said(&code).contains("Code for Ilse Brandt"), "{}", said(&code));
    let listed = said(&command(&["account", "--data", data, "list"], ""));
    assert!(listed.contains("kit.orme") && listed.contains("disabled"), "{listed}");
    let analyst = command(
        &[&["account", "--data", data, "--as", "rafe.tolland", "code", "ilse.brandt"], &why[..]].concat(),
        &format!("{PASSWORD}\n"),
    );
    assert!(said(&analyst).contains("needs one of these roles: administrator"), "{}", said(&analyst));
    assert!(command(&["verify", data], "").status.success());
}

#[test]
fn a_folder_in_use_is_not_verified_and_a_mistyped_one_is_not_made() {
    let elsewhere = Scratch::new();
    let lab = Lab::new();
    acts::backup::back_up(&lab.folder.0, &elsewhere.0.join("data"), &mut |_, _| ()).unwrap();
    let data = elsewhere.0.join("data");
    let open = supernate::cli::folder::open(&data, supernate::store::door::Durability::Full).unwrap();
    let output = command(&["verify", text(&data)], "");
    assert_eq!(output.status.code(), Some(1));
    assert!(said(&output).contains("verify a backup"), "{}", said(&output));
    let to = elsewhere.0.join("while-open.zip");
    let output = command(&["backup", "--data", text(&data), "--to", text(&to)], "");
    assert!(output.status.success(), "{}", said(&output));
    drop(open);
    let nowhere = elsewhere.0.join("nowhere");
    let output = command(&["account", "--data", text(&nowhere), "list"], "");
    assert!(said(&output).contains("is no data folder") && !nowhere.exists(), "{}", said(&output));
}

#[test]
fn every_command_explains_itself() {
    for name in ["serve", "demo", "import", "lot-file", "verify", "backup", "restore", "account"] {
        let output = command(&[name, "--help"], "");
        assert!(output.status.success() && said(&output).contains("Usage: supernate"), "{name}");
    }
}

/// A newcomer's first command: a folder that does not exist is made, and the file is in it.
#[test]
fn a_file_is_imported_from_the_command_line() {
    let elsewhere = Scratch::new();
    let data = elsewhere.0.join("new");
    let file = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/numbers/data/suspensions/tacrolimus_cjhp2017.csv");
    let preview = command(&["import", file, "--data", text(&data), "--preview"], "");
    assert!(said(&preview).contains("would bring 128 results") && !data.exists(), "{}", said(&preview));
    let imported = command(&["import", file, "--data", text(&data)], "");
    let words = "Imported 128 results: 1 product, 2 lots, 2 studies, 8 arms, 64 pulls";
    assert!(imported.status.success() && said(&imported).contains(words), "{}", said(&imported));
    let again = command(&["import", file, "--data", text(&data)], "");
    assert!(again.status.code() == Some(1) && said(&again).contains("imported before"), "{}", said(&again));
    let other = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/tests/numbers/data/suspensions/settling_usgs_withdrawal_times.csv"
    );
    let refused = command(&["import", other, "--data", text(&data)], "");
    assert!(said(&refused).contains("Line 1: The first line does not name"), "{}", said(&refused));
    assert!(command(&["verify", text(&data)], "").status.success());
}

/// The lot file from the command line, checked by the command, named where it was changed.
#[test]
fn a_lot_file_is_exported_and_checked_from_the_command_line() {
    let elsewhere = Scratch::new();
    let data = elsewhere.0.join("new");
    let file = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/numbers/data/suspensions/tacrolimus_cjhp2017.csv");
    assert!(command(&["import", file, "--data", text(&data)], "").status.success());
    let out = elsewhere.0.join("lot.zip");
    let export = ["lot-file", "I1-L02", "--out", text(&out), "--data", text(&data)];
    let made = command(&export, "");
    assert!(made.status.success(), "{}", said(&made));
    let digest = said(&made).split("sha256 ").nth(1).unwrap().trim().to_string();
    let holds = command(&["verify", text(&out), "--expect", &digest.to_uppercase()], "");
    assert!(
        holds.status.success() && said(&holds).contains("the archive is the expected one"),
        "{}",
        said(&holds)
    );
    let other = command(&["verify", text(&out), "--expect", &"0".repeat(64)], "");
    assert_eq!(other.status.code(), Some(1), "{}", said(&other));
    assert!(said(&command(&export, "")).contains("nothing is overwritten"));
    let nothing = ["lot-file", "X-9", "--out", "x.zip", "--data", text(&data)];
    assert!(said(&command(&nothing, "")).contains("There is no lot X-9"));
    assert!(command(&["verify", text(&data)], "").status.success());
}
