//! Every page that a person can reach: accessibility checker, both themes, wide and narrow, and the console.

use std::collections::{BTreeMap, BTreeSet, VecDeque};

use scraper::{Html, Selector};
use supernate::web::route;

use super::audit::VIEWS;
use super::browser::{Browser, Script};
use super::site::Site;
use super::support::{Lab, Seen};
use super::world::filled;

/// Whose pages are walked.
const WALKERS: [&str; 6] =
    ["maren.oddy", "ada.whitlock", "rafe.tolland", "tomas.reyle", "nell.farrow", "ines.caro"];
/// Pages of one kind that are looked at, and that are followed further.
const LOOKED_AT: usize = 2;
const FOLLOWED: usize = 8;

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

/// A kind of page with the forms on it: the same address may offer other acts to another person.
type Shape = (&'static str, Vec<String>);

/// What the forms of the main part do, without the numbers of records.
fn acts_of(seen: &Seen) -> Vec<String> {
    let page = Html::parse_document(&seen.html());
    let forms = Selector::parse("main form[action]").unwrap();
    let actions = page.select(&forms).filter_map(|form| form.value().attr("action"));
    let without_numbers = |action: &str| action.replace(|letter: char| letter.is_ascii_digit(), "");
    actions.map(without_numbers).collect::<BTreeSet<String>>().into_iter().collect()
}

/// Pages that this person reaches by links and by the addresses without a record, two of each shape.
fn reached(lab: &Lab, user_name: &str) -> BTreeMap<Shape, Vec<String>> {
    let mut queue: VecDeque<String> = route::all()
        .iter()
        .filter(|route| !route.is_post && !route.path.contains('{'))
        .map(|route| route.path.to_string())
        .collect();
    let mut met: BTreeSet<String> = queue.iter().cloned().collect();
    let mut followed: BTreeMap<&'static str, usize> = BTreeMap::new();
    let mut pages: BTreeMap<Shape, Vec<String>> = BTreeMap::new();
    while let Some(path) = queue.pop_front() {
        let Some(kind) = kind_of(path.split('?').next().unwrap_or_default()) else { continue };
        let times = followed.entry(kind).or_default();
        *times += 1;
        if *times > FOLLOWED {
            continue;
        }
        let seen = lab.person(user_name).get(&path);
        assert!(seen.status < 500 && seen.status != 404, "{user_name} {path}: {}", seen.text());
        let is_page = seen.headers["content-type"].to_str().unwrap().starts_with("text/html");
        if seen.status != 200 || !is_page || seen.headers.contains_key("content-disposition") {
            continue;
        }
        let kept = pages.entry((kind, acts_of(&seen))).or_default();
        if kept.len() < LOOKED_AT {
            kept.push(path.clone());
        }
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
    let site = Site::serving(filled());
    let browser = Browser::new(&site, Script::On);
    browser.loads_checker();
    browser.open("/sign-in");
    let mut faults = browser.faults();
    let mut looked_at: BTreeMap<Shape, BTreeSet<String>> = BTreeMap::new();
    for walker in WALKERS {
        browser.is(walker);
        for (shape, paths) in reached(&site.lab, walker) {
            for path in paths {
                let known = looked_at.entry(shape.clone()).or_default();
                if known.len() < LOOKED_AT && known.insert(path.clone()) {
                    browser.open(&path);
                    faults.extend(browser.faults());
                    faults.extend(browser.console_errors());
                }
            }
        }
    }
    println!("{} kinds of pages looked at", looked_at.len());
    assert!(faults.is_empty(), "{} faults:\n{}", faults.len(), faults.join("\n"));
}

/// A form that is sent as it opens comes back readable, or does its act; never with a broken page.
#[test]
fn every_form_sent_empty_comes_back_clean() {
    let site = Site::serving(filled());
    let browser = Browser::new(&site, Script::On);
    browser.loads_checker();
    let mut faults = Vec::new();
    let mut sent: BTreeSet<Shape> = BTreeSet::new();
    for walker in ["maren.oddy", "ada.whitlock", "rafe.tolland", "tomas.reyle", "nell.farrow"] {
        browser.is(walker);
        for (shape, paths) in reached(&site.lab, walker) {
            // The forms of the patterns page lead nowhere.
            if shape.0 == "/patterns" || !sent.insert(shape) {
                continue;
            }
            browser.open(&paths[0]);
            if browser.sends_main_form() {
                faults.extend(browser.faults_in(&VIEWS[..1]));
                faults.extend(browser.console_errors());
            }
        }
    }
    assert!(faults.is_empty(), "{} faults:\n{}", faults.len(), faults.join("\n"));
}
