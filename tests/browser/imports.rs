//! Bringing in results measured elsewhere, with the script module and without.

use super::browser::{Browser, Script};
use super::site::Site;
use super::world::{ZNO, data};

fn a_file_is_looked_at_and_imported(script: Script) {
    let site = Site::new();
    let browser = Browser::new(&site, script);
    browser.signs_in("maren.oddy");
    browser.open("/imports");
    browser.chooses("Result file, CSV in UTF-8", &data(ZNO));
    browser.press("Preview the file");
    browser.sees("Nothing is recorded yet");
    browser.press("Import 90 results");
    browser.sees("90 results");
    assert_eq!(browser.console_errors(), Vec::<String>::new());
}

#[test]
fn a_published_set_is_imported() {
    a_file_is_looked_at_and_imported(Script::On);
}

#[test]
fn a_published_set_is_imported_without_script() {
    a_file_is_looked_at_and_imported(Script::Off);
}
