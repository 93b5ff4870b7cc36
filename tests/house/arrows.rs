//! Which room may name which, by a text scan of `crate::` and `super::` paths.

use super::tree::{before_tests, files, text};

/// A room, the rooms it may name, and the outside names it must not.
const ROOMS: [(&str, &[&str], &[&str]); 7] = [
    ("science", &[], &["rusqlite", "axum", "askama", "tokio", "std::fs", "Utc::now", "Instant::now"]),
    ("domain", &["science"], &["rusqlite", "axum", "askama", "tokio", "std::fs", "Utc::now", "Instant::now"]),
    ("report", &["science", "domain"], &["rusqlite", "axum", "tokio", "std::fs", "Utc::now"]),
    ("store", &["domain"], &["axum", "askama", "Utc::now"]),
    ("acts", &["science", "domain", "report", "store"], &["rusqlite", "axum", "askama", "Utc::now"]),
    ("web", &["domain", "report", "acts", "store"], &["rusqlite", "Change<", "Utc::now"]),
    ("cli", &["science", "domain", "report", "acts", "store", "web"], &["rusqlite"]),
];

#[test]
fn every_folder_of_the_program_is_a_known_room() {
    let known: Vec<&str> = ROOMS.iter().map(|(room, _, _)| *room).collect();
    for path in files("src", &[".rs"]) {
        let parts: Vec<String> = path.iter().map(|part| part.to_string_lossy().into_owned()).collect();
        if parts.len() > 2 {
            assert!(known.contains(&parts[1].as_str()), "{} stands in no known room", path.display());
        }
    }
}

#[test]
fn rooms_name_only_the_rooms_they_may() {
    let mut wrong = Vec::new();
    for (room, may_name, never) in ROOMS {
        for path in files(&format!("src/{room}"), &[".rs"]) {
            let whole = text(&path);
            let code = code_only(before_tests(&whole));
            for named in named_rooms(&code) {
                if named != room && !may_name.contains(&named.as_str()) {
                    wrong.push(format!("{} names {named}", path.display()));
                }
            }
            for word in never {
                if code.contains(word) {
                    wrong.push(format!("{} names {word}", path.display()));
                }
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Without comments, so that a doc comment may name what the code must not.
fn code_only(text: &str) -> String {
    text.lines().filter(|line| !line.trim_start().starts_with("//")).collect::<Vec<_>>().join("\n")
}

fn named_rooms(code: &str) -> Vec<String> {
    let mut found = Vec::new();
    for (at, _) in code.match_indices("crate::") {
        let rest = &code[at + "crate::".len()..];
        if let Some(group) = rest.strip_prefix('{') {
            let inside = group.split('}').next().unwrap_or_default();
            found.extend(inside.split(',').map(|item| first_word(item.trim())));
        } else {
            found.push(first_word(rest));
        }
    }
    found.retain(|word| ROOMS.iter().any(|(room, _, _)| room == word));
    found
}

fn first_word(text: &str) -> String {
    text.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect()
}

#[test]
fn nothing_is_re_exported_between_rooms() {
    for path in files("src", &[".rs"]) {
        assert!(!text(&path).contains("pub use "), "{} re-exports", path.display());
    }
}

/// The clock, the environment and randomness are read where a command starts, or where a token is made.
#[test]
fn the_clock_and_the_environment_are_read_only_where_commands_start() {
    for path in files("src", &[".rs"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        let code = code_only(before_tests(&text(&path)));
        if !name.starts_with("src/cli/") && name != "src/main.rs" {
            assert!(!code.contains("env::var"), "{name} reads the environment");
            assert!(!code.contains("SystemTime::now"), "{name} reads the clock");
        }
        if name != "src/acts/secret.rs" {
            assert!(!code.contains("getrandom::"), "{name} makes random bytes");
        }
    }
}

/// Only `store` and `acts` hold the type that writes.
#[test]
fn only_store_and_acts_hold_a_change() {
    for path in files("src", &[".rs"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        if name.starts_with("src/store/") || name.starts_with("src/acts/") || name.starts_with("src/cli/demo")
        {
            continue;
        }
        assert!(!code_only(before_tests(&text(&path))).contains("Change<'"), "{name} names Change");
    }
}
