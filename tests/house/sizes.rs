//! Small files, small functions, short lines: a ratchet. The list of exceptions carries their present length and
//! only shrinks.

use std::collections::BTreeMap;

use super::tree::{before_tests, files, root, text};

const FILE_LINES: usize = 400;
const FUNCTION_LINES: usize = 60;
const TEMPLATE_LINES: usize = 120;
/// `cargo fmt` holds code at 110; a sentence or a line of SQL that cannot be broken may run a little further.
const LINE_COLUMNS: usize = 120;

/// `path length` or `path::function length` a line; no command writes it.
fn exceptions() -> BTreeMap<String, usize> {
    let list = std::fs::read_to_string(root().join("tests/house/lists/sizes.txt")).unwrap();
    list.lines()
        .filter(|line| !line.trim().is_empty() && !line.starts_with('#'))
        .map(|line| {
            let (name, length) = line.rsplit_once(' ').unwrap();
            (name.to_string(), length.parse().unwrap())
        })
        .collect()
}

#[test]
fn files_functions_templates_and_lines_stay_small() {
    let mut long: BTreeMap<String, usize> = BTreeMap::new();
    for path in files("src", &[".rs"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        let whole = text(&path);
        let code = before_tests(&whole);
        measure(&mut long, &name, code.lines().count(), FILE_LINES);
        for (function, lines) in functions(code) {
            measure(&mut long, &format!("{name}::{function}"), lines, FUNCTION_LINES);
        }
        let widest = whole.lines().map(|line| line.chars().count()).max().unwrap_or_default();
        measure(&mut long, &format!("{name}::columns"), widest, LINE_COLUMNS);
    }
    for path in files("templates", &[".html"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        measure(&mut long, &name, text(&path).lines().count(), TEMPLATE_LINES);
    }
    compare(&long, &exceptions());
}

fn measure(long: &mut BTreeMap<String, usize>, name: &str, length: usize, most: usize) {
    if length > most {
        long.insert(name.to_string(), length);
    }
}

fn compare(long: &BTreeMap<String, usize>, listed: &BTreeMap<String, usize>) {
    let mut wrong = Vec::new();
    for (name, length) in long {
        match listed.get(name) {
            None => wrong.push(format!("{name} {length} — too long, split it")),
            Some(known) if length > known => wrong.push(format!("{name} {length} — grew from {known}")),
            Some(known) if length < known => {
                wrong.push(format!("{name} {length} — shrank from {known}: write it down"))
            }
            Some(_) => (),
        }
    }
    wrong.extend(
        listed.keys().filter(|name| !long.contains_key(*name)).map(|name| format!("{name} — strike it")),
    );
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Names and lengths of the functions of formatted code: from `fn` to the closing brace of the same indent.
fn functions(code: &str) -> Vec<(String, usize)> {
    let lines: Vec<&str> = code.lines().collect();
    let mut found = Vec::new();
    for (at, line) in lines.iter().enumerate() {
        let trimmed = line.trim_start();
        let Some(name) = function_name(trimmed) else { continue };
        let indent = line.len() - trimmed.len();
        let close = format!("{}}}", " ".repeat(indent));
        if let Some(length) = lines[at..].iter().position(|line| **line == close) {
            found.push((name, length + 1));
        }
    }
    found
}

fn function_name(line: &str) -> Option<String> {
    let rest =
        ["", "pub ", "pub(in crate::store) ", "pub(crate) ", "const ", "pub const ", "async ", "pub async "]
            .iter()
            .find_map(|start| line.strip_prefix(start).and_then(|rest| rest.strip_prefix("fn ")))?;
    Some(rest.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect())
}
