//! Signing in and out, and making an account, with the script module and without.

use super::browser::{Browser, Script};
use super::site::Site;

fn a_person_comes_and_goes(script: Script) {
    let site = Site::new();
    let browser = Browser::new(&site, script);
    browser.open("/me");
    assert_eq!(browser.path(), "/sign-in");
    browser.fill("User name", "rafe.tolland");
    browser.fill("Password", "not the right one at all");
    browser.press("Sign in");
    browser.sees("There is a problem");
    browser.signs_in("rafe.tolland");
    browser.open("/me");
    browser.sees("Signed in as Rafe Tolland");
    assert_eq!(browser.has_module(), script == Script::On);
    browser.presses_on("Sign out");
    browser.open("/me");
    assert_eq!(browser.path(), "/sign-in", "the session has ended");
    assert_eq!(browser.console_errors(), Vec::<String>::new());
}

#[test]
fn a_person_signs_in_and_out() {
    a_person_comes_and_goes(Script::On);
}

#[test]
fn a_person_signs_in_and_out_without_script() {
    a_person_comes_and_goes(Script::Off);
}

fn an_account_is_made(script: Script) {
    let site = Site::new();
    let browser = Browser::new(&site, script);
    browser.signs_in("nell.farrow");
    browser.press("People");
    browser.press("New account");
    browser.fill("User name", "kit.hale");
    browser.press("Create the account");
    browser.sees("There is a problem");
    browser.fill("Full name, as printed beside signatures", "Kit Hale");
    browser.fill("Who saw proof of identity, and how", "N. Farrow, staff card");
    browser.press("analyst");
    browser.press("Create the account");
    browser.sees("Give this code to Kit Hale");
    assert_eq!(browser.console_errors(), Vec::<String>::new());
}

#[test]
fn an_administrator_makes_an_account() {
    an_account_is_made(Script::On);
}

#[test]
fn an_administrator_makes_an_account_without_script() {
    an_account_is_made(Script::Off);
}
