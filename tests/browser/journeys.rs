//! The main job in the browser, with the script module and without: a pull is taken and read, checked, sent back,
//! corrected, reviewed and signed, and the lot's history leaves as one file.

use supernate::domain::method::TestKind;
use supernate::store;

use super::browser::{Browser, Script};
use super::site::Site;
use super::support::{Lab, PASSWORD, world};

/// A pull of an invented study that is due today, with pH to read.
struct Due {
    lot: i64,
    pull: store::pull::Pull,
    labels: Vec<String>,
    test: i64,
}

fn due(lab: &Lab) -> Due {
    world::instrument(lab, "PH-03", "pH meter");
    let lot = world::lot(lab, "TW-104-0640");
    let study = world::study_of(lab, lot, &[TestKind::Ph]);
    let pull = world::pull(lab, study, 1, "Initial");
    let labels = world::labels(lab, &pull);
    let method = world::approved_method(lab, TestKind::Ph);
    for person in ["rafe.tolland", "ilse.brandt"] {
        world::qualify(lab, person, method);
    }
    let sample = lab.app.db.read(|reader| store::bench::sample(reader, pull.sample)).unwrap();
    Due { lot, labels, test: sample.tests[0].id, pull }
}

fn takes_the_pull(browser: &Browser<'_>, due: &Due) {
    browser.signs_in("rafe.tolland");
    browser.open(&format!("/pulls/{}", due.pull.id));
    for (place, label) in due.labels.iter().enumerate() {
        browser.fills_named(&format!("container.{}", place + 1), label);
    }
    browser.press("Take the pull");
    browser.sees("In progress");
}

fn opens_the_test(browser: &Browser<'_>, due: &Due) {
    browser.open(&format!("/tests/{}", due.test));
    browser.fill("Scan the label, or type its last four characters", &due.labels[0]);
    browser.press("This is the one");
    browser.sees(&due.labels[0]);
}

fn records_and_completes(browser: &Browser<'_>, due: &Due) {
    opens_the_test(browser, due);
    browser.fills_boxes(".value", "6.83");
    browser.fills_boxes(".temperature_c", "22.0");
    browser.press("Record readings");
    browser.sees("6.830");
    browser.press("Complete this test");
    browser.sees("Waiting for check");
}

fn corrects_and_completes(browser: &Browser<'_>, due: &Due, script: Script) {
    browser.signs_in("rafe.tolland");
    opens_the_test(browser, due);
    browser.fills_first_box(".value", "6.84");
    if script == Script::Off {
        browser.press("Record readings");
    }
    browser.press("Mistyped");
    if script == Script::Off {
        browser.press("Record readings");
    }
    browser.sees("6.835");
    browser.press("Complete this test");
    browser.sees("Waiting for check");
}

fn reviews_and_signs(browser: &Browser<'_>, due: &Due) {
    browser.signs_in("ada.whitlock");
    browser.open(&format!("/review/{}", due.pull.sample));
    browser.sees("1 correction");
    while browser.text().contains("not answered yet") {
        browser.fill("Acceptable, because …", "the printout of the meter shows the same value");
        browser.presses_on("Acceptable");
    }
    browser.presses_on("Agree, on my signing list");
    browser.open("/review/sign");
    let because = "Acceptable with its exceptions, because …";
    browser.fill(because, "every value agrees with the printout of the meter");
    browser.fill("Your user name", "ada.whitlock");
    browser.fill("Your password", PASSWORD);
    browser.press("Sign 1 sample");
    browser.sees("Signed: 1 sample");
}

fn the_main_job(script: Script) {
    let site = Site::new();
    let due = due(&site.lab);
    let check = format!("/checks/{}", due.test);
    let browser = Browser::new(&site, script);
    takes_the_pull(&browser, &due);
    records_and_completes(&browser, &due);
    browser.presses_on("Sign out");

    browser.signs_in("ilse.brandt");
    browser.open(&check);
    browser.fill("Send back, because …", "the first value is not the one on the meter's printout");
    browser.presses_on("Send back");
    browser.presses_on("Sign out");

    corrects_and_completes(&browser, &due, script);
    browser.presses_on("Sign out");

    browser.signs_in("ilse.brandt");
    browser.open(&check);
    browser.presses_on("Checked");
    browser.presses_on("Sign out");

    reviews_and_signs(&browser, &due);
    browser.open(&format!("/lots/{}/file", due.lot));
    browser.presses_on("Export the lot file");
    browser.sees("Fetch the lot file");
    assert_eq!(browser.console_errors(), Vec::<String>::new());
    site.lab.auditor().sees("/history", "exported a lot file");
}

#[test]
fn a_pull_is_read_checked_sent_back_corrected_signed_and_exported() {
    the_main_job(Script::On);
}

#[test]
fn a_pull_is_read_checked_sent_back_corrected_signed_and_exported_without_script() {
    the_main_job(Script::Off);
}
