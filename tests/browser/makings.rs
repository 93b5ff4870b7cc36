//! A small lot from its start to its release, at a tablet held upright, by people who check each other.

use supernate::domain::sample::Purpose;
use supernate::store;

use super::browser::{Browser, Script};
use super::site::Site;
use super::support::Lab;
use super::support::batches::Floor;
use super::support::samples::Bench;

const NUMBER: &str = "TW-104-0720";

fn starts(browser: &Browser<'_>, version: i64) {
    browser.signs_in("bea.skelton");
    browser.open("/batches");
    browser.presses_on("Start a lot");
    browser.open(&format!("/batches/new?formulation_version={version}&size=500"));
    browser.fill("Lot number", NUMBER);
    browser.fill("Presentation", "TW-104: Antacid oral suspension, 400 mg/5 mL, 200 mL amber PET bottle");
    browser.fill("Container and closure", "amber PET bottle, screw cap");
    browser.presses_on("Start the lot");
    browser.sees("Next: 1.1 Weigh the hydroxide.");
}

fn weighs(browser: &Browser<'_>, material_lot: &str, net: &str) {
    browser.presses_on("Go on");
    browser.presses_on("Start this step");
    browser.fill("Material lot: scan its label, or type its number", material_lot);
    browser.fill("Net, kg", net);
    browser.presses_on("Record this weighing");
    browser.presses_on("End this step");
}

fn weighs_again_and_checks(browser: &Browser<'_>) {
    browser.signs_in("maren.oddy");
    browser.open("/batches/1");
    browser.presses_on("Go on");
    browser.sees("hidden until you have weighed");
    browser.fill("Net, kg", "41.45");
    browser.presses_on("Record what the balance shows");
    browser.presses_on("Checked: done as it is recorded");
    browser.sees("checked by Maren Oddy");
    browser.presses_on("Sign out");
}

fn begins_in(browser: &Browser<'_>, class: &str, equipment: &str) {
    browser.presses_on("Go on");
    browser.fill(&format!("Equipment: {class}"), equipment);
}

fn compounds(browser: &Browser<'_>, lab: &Lab) {
    const VESSEL: &str = "MV-2 mixing vessel, 500 L: clean until 9 Dec 2026";
    const USED: &str = "MV-2 mixing vessel, 500 L: dirty since its use in TW-104-0720 on 2 Dec 2026";
    browser.signs_in("bea.skelton");
    browser.open("/batches/1");
    begins_in(browser, "mixing vessel", VESSEL);
    browser.presses_on("Start this step");
    for (label, value) in [("Speed, rpm", "1350"), ("pH, pH units", "8.02")] {
        browser.fill(label, value);
        browser.presses_on("Record");
    }
    // The tablet is left for longer than a bench page stays open: the operator signs in again and goes on.
    browser.presses_on("Sign out");
    lab.later_minutes(40);
    browser.signs_in("bea.skelton");
    browser.open("/batches/1");
    browser.presses_on("Go on");
    browser.presses_on("End this step");
    for minutes in [5, 12] {
        begins_in(browser, "mixing vessel", USED);
        browser.presses_on("Start this step");
        lab.later_minutes(minutes);
        browser.presses_on("End this step");
    }
    yields(browser, "L", "496");
}

fn yields(browser: &Browser<'_>, unit: &str, actual: &str) {
    browser.presses_on("Go on");
    browser.fill(&format!("Actual yield, {unit}"), actual);
    browser.presses_on("Record the yield");
    browser.presses_on("Sign out");
}

fn checks_the_yield(browser: &Browser<'_>, percent: &str) {
    browser.signs_in("maren.oddy");
    browser.open("/batches/1");
    browser.presses_on("Go on");
    browser.fill("Yield that you worked out, %", percent);
    browser.presses_on("Checked: the calculation is right");
    browser.presses_on("Sign out");
}

fn clears_and_fills(browser: &Browser<'_>) {
    browser.signs_in("bea.skelton");
    browser.open("/batches/1/steps/6");
    browser.presses_on("Start this step");
    browser.press("conforms");
    browser.presses_on("Record");
    browser.presses_on("End this step");
    browser.presses_on("Sign out");
    browser.signs_in("maren.oddy");
    browser.open("/batches/1/steps/6");
    browser.presses_on("Checked: done as it is recorded");
    browser.presses_on("Sign out");
    browser.signs_in("bea.skelton");
    browser.open("/batches/1");
    begins_in(browser, "filling line", "FL-1 filling line, 500 L: clean until 9 Dec 2026");
    browser.press("The agitation is on");
    browser.presses_on("Start this step");
    for (point, value) in [("start", "100.4"), ("middle", "100.6"), ("end", "100.2")] {
        browser.fill(&format!("Fill volume, {point}, mL"), value);
        browser.presses_on("Record");
    }
    browser.presses_on("End this step");
    yields(browser, "bottles", "4930");
}

fn signs(browser: &Browser<'_>, user_name: &str, button: &str) {
    browser.fill("Your user name", user_name);
    browser.fill("Your password", super::support::PASSWORD);
    browser.presses_on(button);
}

fn a_lot_is_made_and_released(script: Script) {
    let site = Site::new();
    let lab = &site.lab;
    let bench = Bench::new(lab);
    bench.assigns_shelf_life();
    lab.later_days(1);
    let product = lab.app.db.read(|reader| store::lot::product_of_presentation(reader, bench.presentation));
    let floor = Floor::of(lab, product.unwrap(), bench.presentation);
    let browser = Browser::new(&site, script);
    browser.is_sized(800, 1280);
    starts(&browser, floor.version);
    weighs(&browser, "ML-1", "41.44");
    weighs(&browser, "ML-2", "2.000");
    browser.presses_on("Sign out");
    weighs_again_and_checks(&browser);
    compounds(&browser, lab);
    checks_the_yield(&browser, "99.2");
    clears_and_fills(&browser);
    checks_the_yield(&browser, "98.6");
    browser.signs_in("bea.skelton");
    browser.open("/batches/1");
    signs(&browser, "bea.skelton", "Close the record");
    browser.sees("The record is closed.");
    browser.presses_on("Sign out");

    let lot = lab.app.db.read(|reader| store::lot::by_number(reader, NUMBER)).unwrap().unwrap().id;
    let sample = bench.ready(lot, Purpose::Release);
    let review = format!("/review/{sample}");
    lab.reviewer().does(&review, &format!("{review}/agree"), &[]);
    lab.reviewer().signs("/review/sign", "/review/sign", &[]);
    floor.completes_the_record(lot);
    browser.signs_in("ada.whitlock");
    browser.open("/batches/1/record");
    browser.sees("No value was changed since it was recorded.");
    browser.open(&format!("/lots/{lot}/decision"));
    browser.press("I looked through the corrections and the history below");
    signs(&browser, "ada.whitlock", "Release this lot");
    browser.sees("TW-104-0720 is released.");
    assert_eq!(browser.console_errors(), Vec::<String>::new());
}

#[test]
fn a_small_lot_is_made_from_start_to_release_at_a_tablet() {
    a_lot_is_made_and_released(Script::On);
}

#[test]
fn a_small_lot_is_made_from_start_to_release_at_a_tablet_without_script() {
    a_lot_is_made_and_released(Script::Off);
}
