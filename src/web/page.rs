//! The frame of every page: title, navigation, person, errors, notice, print head.

use super::form::Form;
use super::static_file;
use super::visit::Visit;
use crate::domain::role::Role;
use crate::store;

/// The signed-in person as the top bar shows them.
#[derive(Clone, Debug)]
pub struct Person {
    pub full_name: String,
    pub roles: String,
}

/// One entry of the main navigation.
#[derive(Clone, Debug)]
pub struct NavItem {
    pub path: &'static str,
    pub words: &'static str,
    pub is_here: bool,
}

/// What `layout.html` shows around a page.
#[derive(Clone, Debug)]
pub struct Shell {
    pub title: String,
    pub person: Option<Person>,
    pub nav: Vec<NavItem>,
    pub form_token: String,
    pub theme: Option<String>,
    pub sheet: &'static str,
    pub script: &'static str,
    pub icon: &'static str,
    pub now: String,
    pub now_shown: String,
    pub banner: String,
    pub notice: Option<String>,
    pub has_errors: bool,
    pub errors: Vec<(String, String)>,
    pub crumbs: Vec<(String, String)>,
    pub is_bench: bool,
    pub searched: String,
    pub print_state: String,
    pub print_digest: String,
}

/// The sections of the main navigation, in the order of the work.
const SECTIONS: [(&str, &str); 10] = [
    ("/week", "Week"),
    ("/bench", "Bench"),
    ("/review", "Review"),
    ("/batches", "Batches"),
    ("/lots", "Lots"),
    ("/studies", "Studies"),
    ("/evaluations", "Evaluation"),
    ("/formulations", "Formulations"),
    ("/definitions", "Definitions"),
    ("/history", "History"),
];

impl Shell {
    pub fn of(visit: &Visit, title: &str) -> Shell {
        let actor = visit.actor().ok();
        let (print_state, print_digest) = as_of(visit);
        let person = actor.map(|actor| Person {
            full_name: actor.full_name.clone(),
            roles: actor.roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", "),
        });
        Shell {
            title: title.to_string(),
            person,
            nav: nav(visit),
            form_token: visit.signed_in.as_ref().map(|at| at.form_token.clone()).unwrap_or_default(),
            theme: visit.theme.clone(),
            sheet: static_file::address("look.css"),
            script: static_file::address("supernate.mjs"),
            icon: static_file::address("mark.svg"),
            now: visit.at.exported(),
            now_shown: visit.at.shown(),
            banner: banner(visit),
            notice: None,
            has_errors: false,
            errors: Vec::new(),
            crumbs: Vec::new(),
            is_bench: false,
            searched: String::new(),
            print_state,
            print_digest,
        }
    }

    /// The error summary of a form that comes back.
    pub fn with_errors(mut self, form: &Form) -> Shell {
        self.errors.extend(form.refusal.iter().map(|sentence| (String::new(), sentence.clone())));
        self.errors.extend(form.errors());
        self.has_errors |= form.has_errors();
        self
    }

    pub fn crumb(mut self, path: impl Into<String>, words: impl Into<String>) -> Shell {
        self.crumbs.push((path.into(), words.into()));
        self
    }

    pub fn notice(self, words: impl Into<String>) -> Shell {
        Shell { notice: Some(words.into()), ..self }
    }

    pub fn bench(self) -> Shell {
        Shell { is_bench: true, ..self }
    }

    /// What the head of a printed sheet says of the record's state, and the start of its digest.
    pub fn print(self, state: &str, digest: &str) -> Shell {
        let print_digest = digest.chars().take(12).collect();
        Shell { print_state: state.to_string(), print_digest, ..self }
    }
}

/// What a printed sheet says where the record has no state of its own: the newest entry of the history, and the
/// start of its digest (screen_U121).
fn as_of(visit: &Visit) -> (String, String) {
    if visit.actor().is_err() {
        return (String::new(), String::new());
    }
    match visit.read(store::trail::head) {
        Ok(Some((act, digest))) => (format!("Records as of entry {act}"), digest.chars().take(12).collect()),
        _ => (String::new(), String::new()),
    }
}

fn nav(visit: &Visit) -> Vec<NavItem> {
    let Ok(actor) = visit.actor() else { return Vec::new() };
    let mut items: Vec<NavItem> = SECTIONS
        .iter()
        .map(|(path, words)| NavItem { path, words, is_here: is_under(&visit.path, path) })
        .collect();
    if actor.holds(Role::Administrator) {
        items.retain(|item| item.path == "/history");
        for (path, words) in [("/people", "People"), ("/settings", "Settings")] {
            items.push(NavItem { path, words, is_here: is_under(&visit.path, path) });
        }
    }
    items
}

fn is_under(path: &str, section: &str) -> bool {
    path == section || path.strip_prefix(section).is_some_and(|rest| rest.starts_with('/'))
}

fn banner(visit: &Visit) -> String {
    let is_auditor = visit.actor().is_ok_and(|actor| actor.holds(Role::Auditor));
    match (is_auditor, visit.app.site.is_demo) {
        (true, true) => {
            "Invented data. You see what was recorded; you cannot change anything. Your reading is logged."
        }
        (true, false) => "You see what was recorded; you cannot change anything. Your reading is logged.",
        (false, true) => "Invented data of an invented site.",
        (false, false) => "",
    }
    .to_string()
}
