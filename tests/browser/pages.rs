//! Every page that a person can reach: accessibility checker, both themes, wide and narrow, and the console.

use std::collections::{BTreeMap, BTreeSet, VecDeque};

use scraper::{Html, Selector};
use supernate::web::route;

use super::audit::VIEWS;
use super::browser::{Browser, Script};
use super::site::Site;
use super::support::{Lab, Seen};
use super::world::{Filled, filled};

/// Whose pages are walked.
const WALKERS: [&str; 6] =
    ["maren.oddy", "ada.whitlock", "rafe.tolland", "tomas.reyle", "nell.farrow", "ines.caro"];
/// Pages of one kind that are followed further.
const FOLLOWED: usize = 12;

/// The route of a path, such as `/lots/{id}`.
fn kind_of(path: &str) -> Option<&'static str> {
    let parts: Vec<&str> = path.split('/').collect();
    let fits = |pattern: &str| {
        let wanted: Vec<&str> = pattern.split('/').collect();
        wanted.len() == parts.len()
            && wanted.iter().zip(&parts).all(|(want, part)| want.starts_with('{') || want == part)
    };
    let mut kinds: Vec<&str> =
        route::all().iter().filter(|route| !route.is_post).map(|route| route.path).collect();
    kinds.retain(|kind| fits(kind));
    kinds.into_iter().min_by_key(|kind| kind.matches('{').count())
}

/// A kind of page with what its forms do and ask: the same address may offer other acts to another person, and
/// other fields for another record.
type Shape = (&'static str, Vec<String>);

/// What the forms of the main part do and ask, without the numbers of records.
fn acts_of(seen: &Seen) -> Vec<String> {
    let page = Html::parse_document(&seen.html());
    let parts = Selector::parse("main form[action], main [name]").unwrap();
    let names =
        page.select(&parts).filter_map(|part| part.value().attr("action").or(part.value().attr("name")));
    let without_numbers = |name: &str| name.replace(|letter: char| letter.is_ascii_digit(), "");
    names.map(without_numbers).collect::<BTreeSet<String>>().into_iter().collect()
}

/// Pages that this person reaches by links and by the addresses without a record, one of each shape.
fn reached(lab: &Lab, user_name: &str, more: &[String]) -> BTreeMap<Shape, String> {
    let mut queue: VecDeque<String> = route::all()
        .iter()
        .filter(|route| !route.is_post && !route.path.contains('{'))
        .map(|route| route.path.to_string())
        .chain(more.iter().cloned())
        .collect();
    let mut met: BTreeSet<String> = queue.iter().cloned().collect();
    let mut followed: BTreeMap<&'static str, usize> = BTreeMap::new();
    let mut pages: BTreeMap<Shape, String> = BTreeMap::new();
    while let Some(path) = queue.pop_front() {
        let Some(kind) = kind_of(path.split('?').next().unwrap_or_default()) else { continue };
        let times = followed.entry(kind).or_default();
        *times += 1;
        if *times > FOLLOWED {
            continue;
        }
        let seen = lab.person(user_name).get(&path);
        // A page that takes a question in its address may find nothing without it; a link always finds its page.
        let may_miss = !path.contains(['{', '?']) && route::all().iter().any(|route| route.path == path);
        assert!(seen.status < 500 && (seen.status != 404 || may_miss), "{user_name} {path}: {}", seen.text());
        let is_page = seen.headers["content-type"].to_str().unwrap().starts_with("text/html");
        if seen.status != 200 || !is_page || seen.headers.contains_key("content-disposition") {
            continue;
        }
        pages.entry((kind, acts_of(&seen))).or_insert_with(|| path.clone());
        for link in seen.links() {
            let link = link.split('#').next().unwrap_or_default().to_string();
            if link.starts_with('/') && met.insert(link.clone()) {
                queue.push_back(link);
            }
        }
    }
    pages
}

#[test]
fn every_page_is_clean_in_both_themes_wide_and_narrow() {
    let Filled { lab, behind_a_label } = filled();
    let site = Site::serving(lab);
    let browser = Browser::new(&site, Script::On);
    browser.loads_checker();
    browser.open("/sign-in");
    let mut faults = browser.faults();
    let mut looked_at: BTreeSet<Shape> = BTreeSet::new();
    for walker in WALKERS {
        browser.is(walker);
        for (shape, path) in reached(&site.lab, walker, &behind_a_label) {
            if looked_at.insert(shape) {
                browser.open(&path);
                faults.extend(browser.faults());
                faults.extend(browser.console_errors());
            }
        }
    }
    println!("{} kinds of pages looked at", looked_at.len());
    assert!(faults.is_empty(), "{} faults:\n{}", faults.len(), faults.join("\n"));
}

/// A form that is sent as it opens comes back readable, or does its act; never with a broken page.
#[test]
fn every_form_sent_empty_comes_back_clean() {
    let Filled { lab, behind_a_label } = filled();
    let site = Site::serving(lab);
    let browser = Browser::new(&site, Script::On);
    browser.loads_checker();
    let mut faults = Vec::new();
    let mut sent: BTreeSet<Shape> = BTreeSet::new();
    for walker in ["maren.oddy", "ada.whitlock", "rafe.tolland", "tomas.reyle", "nell.farrow"] {
        browser.is(walker);
        for (shape, path) in reached(&site.lab, walker, &behind_a_label) {
            // The forms of the patterns page lead nowhere.
            if shape.0 == "/patterns" || !sent.insert(shape) {
                continue;
            }
            browser.open(&path);
            if browser.sends_main_form() {
                faults.extend(browser.faults_in(&VIEWS[..1]));
                faults.extend(browser.console_errors());
            }
        }
    }
    assert!(faults.is_empty(), "{} faults:\n{}", faults.len(), faults.join("\n"));
}
