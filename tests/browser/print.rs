//! What stands on paper.

use super::browser::{Browser, Script};
use super::site::Site;

/// screen_U121: each sheet says what it is, of how many, who printed it and when.
#[test]
fn every_printed_sheet_says_what_it_is() {
    let site = Site::new();
    for _ in 0..30 {
        let fields = [("user_name", "nobody.here"), ("password", "not a password of anyone")];
        site.lab.administrator().submits("/sign-in", "/sign-in", &fields);
        site.lab.later_minutes(30);
    }
    let browser = Browser::new(&site, Script::On);
    browser.is("ines.caro");
    browser.open("/history");
    let printed_at = format!("Printed at {}", site.lab.now().shown());
    let (entry, digest) = site.lab.app.db.read(supernate::store::trail::head).unwrap().unwrap();
    let as_of = format!("Records as of entry {entry}");
    let sheets = browser.prints();
    assert!(sheets.len() > 1, "more than one sheet: {}", sheets.len());
    for (at, sheet) in sheets.iter().enumerate() {
        let page = format!("Page {} of {}", at + 1, sheets.len());
        for fact in ["History", "Printed by Ines Caro", &printed_at, &page, &as_of, &digest[..12]] {
            assert!(sheet.contains(fact), "sheet {} lacks “{fact}”:\n{sheet}", at + 1);
        }
        assert!(!sheet.contains("Sign out"), "no navigation on paper");
    }
}
