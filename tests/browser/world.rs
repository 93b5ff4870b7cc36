//! A laboratory with something on every list, for the walk over all pages.

use std::path::PathBuf;

use supernate::acts;

use super::support::Lab;

pub fn data(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/numbers/data/suspensions").join(name)
}

pub const ZNO: &str = "zno_aloe_weloensis_sedimentation.csv";
pub const TACROLIMUS: &str = "tacrolimus_cjhp2017.csv";

/// Published results imported, an instrument, a chamber, an account that was disabled.
pub fn filled() -> Lab {
    let lab = Lab::new();
    for name in [ZNO, TACROLIMUS] {
        let bytes = std::fs::read(data(name)).unwrap();
        acts::import::import(&lab.app.db, &lab.actor("maren.oddy"), name, &bytes).unwrap();
    }
    let manager = lab.manager();
    let instrument =
        [("code", "PM-3"), ("name", "pH meter, bench 2"), ("kind", "pH meter"), ("needs_daily_check", "yes")];
    manager.does("/instruments/new", "/instruments/new", &instrument);
    let chamber = [
        ("code", "CH-04"),
        ("name", "Chamber 4"),
        ("condition", "1"),
        ("location", "Room 2.11"),
        ("qualification_due_on", "3 Mar 2027"),
    ];
    manager.does("/chambers/new", "/chambers/new", &chamber);
    lab
}
