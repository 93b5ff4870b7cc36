//! Every act can be reached and is told in a story; every POST names an act; pages ask for a session.

use std::collections::BTreeSet;

use supernate::domain::act::{Act, Allowed, matrix};
use supernate::web::route::{self, Access};

use super::support::Lab;
use super::tree::{files, golden, root, text};

/// The whole policy in one text, read by a person when it changes.
#[test]
fn the_role_and_act_matrix_is_the_agreed_one() {
    golden("policy.txt", &matrix());
}

#[test]
fn every_post_names_an_act_and_no_get_does() {
    for route in route::all() {
        assert_eq!(route.is_post, !route.acts.is_empty(), "{}", route.path);
    }
}

#[test]
fn every_act_has_a_route_or_a_command() {
    let routed: BTreeSet<&str> =
        route::all().iter().flat_map(|route| route.acts.iter().map(|act| act.code())).collect();
    let commands: String = files("src/cli", &[".rs"]).iter().map(|path| text(path)).collect();
    let doors: String = ["src/acts", "src/store", "src/domain"]
        .iter()
        .flat_map(|room| files(room, &[".rs"]))
        .filter(|path| !path.ends_with("domain/act.rs"))
        .map(|path| text(&path))
        .collect();
    let mut lost = Vec::new();
    for act in Act::ALL {
        let is_used = doors.contains(&format!("Act::{}", act.code()));
        let is_reached = routed.contains(act.code())
            || act.allowed() == Allowed::System
            || commands.contains(&format!("Act::{}", act.code()));
        if !is_used || !is_reached {
            lost.push(act.code());
        }
    }
    assert!(lost.is_empty(), "acts that nobody can do: {}", lost.join(", "));
}

#[test]
fn every_act_of_a_person_is_told_in_a_story() {
    let stories: String = files("tests/stories", &[".rs"])
        .iter()
        .chain(&files("tests/support", &[".rs"]))
        .chain(&files("tests/browser", &[".rs"]))
        .map(|path| text(path))
        .collect();
    let mut untold = Vec::new();
    for route in route::all().into_iter().filter(|route| route.is_post) {
        let fixed: Vec<&str> =
            route.path.split('/').filter(|part| !part.is_empty() && !part.starts_with('{')).collect();
        if !fixed.iter().all(|part| stories.contains(part)) {
            untold.push(route.path);
        }
    }
    assert!(untold.is_empty(), "POST routes that no story uses: {}", untold.join(", "));
}

/// Every page but the public ones leads to sign-in without a session (req_P4).
#[test]
fn without_a_session_every_page_leads_to_sign_in() {
    let lab = Lab::new();
    for route in route::all().into_iter().filter(|route| !route.is_post && route.access != Access::Public) {
        let seen = lab.get_with(&filled(route.path), None);
        let to = seen.location.unwrap_or_default();
        assert!(seen.status == 303 && to.starts_with("/sign-in"), "{}: {} {to}", route.path, seen.status);
    }
}

/// A page that is opened writes nothing (sec_S40).
#[test]
fn no_page_that_is_opened_writes_a_record() {
    let lab = Lab::new();
    for name in ["maren.oddy", "ada.whitlock", "rafe.tolland", "nell.farrow"] {
        let token = lab.person(name).token();
        let before = lab.app.db.read(supernate::store::trail::head).unwrap();
        for route in route::all().into_iter().filter(|route| !route.is_post) {
            let seen = lab.get_with(&filled(route.path), Some(&token));
            assert!(seen.status < 500, "{}: {}", route.path, seen.text());
        }
        assert_eq!(lab.app.db.read(supernate::store::trail::head).unwrap(), before, "as {name}");
    }
}

/// The security headers are on every answer (sec_S41).
#[test]
fn every_answer_carries_the_security_headers() {
    let lab = Lab::new();
    let token = lab.manager().token();
    for route in route::all().into_iter().filter(|route| !route.is_post) {
        let seen = lab.get_with(&filled(route.path), Some(&token));
        for header in
            ["content-security-policy", "x-content-type-options", "referrer-policy", "cache-control"]
        {
            assert!(seen.headers.contains_key(header), "{} lacks {header}", route.path);
        }
    }
}

fn filled(path: &str) -> String {
    path.split('/').map(|part| if part.starts_with('{') { "1" } else { part }).collect::<Vec<_>>().join("/")
}

/// The project's own guide names only files that exist.
#[test]
fn every_file_named_in_the_guide_exists() {
    let guide = std::fs::read_to_string(root().join("DEVELOPERS.md")).unwrap();
    for word in guide.split('`').skip(1).step_by(2) {
        let looks_like_a_file =
            ["src/", "tests/", "templates/", "migrations/", "seed-demo/", "benches/", "examples/"]
                .iter()
                .any(|start| word.starts_with(start));
        if looks_like_a_file && !word.contains(['<', '*', '{', ' ']) {
            assert!(root().join(word).exists(), "DEVELOPERS.md names {word}, which does not exist");
        }
    }
}
