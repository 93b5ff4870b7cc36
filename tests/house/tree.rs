//! Walking the source tree, for the other tests of the house.

use std::path::{Path, PathBuf};

pub fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// All files below a folder with one of these endings, in a fixed order, relative to the root.
pub fn files(folder: &str, endings: &[&str]) -> Vec<PathBuf> {
    let mut found = Vec::new();
    walk(&root().join(folder), endings, &mut found);
    found.sort();
    found
}

fn walk(folder: &Path, endings: &[&str], found: &mut Vec<PathBuf>) {
    let Ok(entries) = std::fs::read_dir(folder) else { return };
    for entry in entries.flatten() {
        let path = entry.path();
        if path.is_dir() {
            walk(&path, endings, found);
        } else if endings.iter().any(|ending| path.to_string_lossy().ends_with(ending)) {
            found.push(path.strip_prefix(root()).unwrap().to_path_buf());
        }
    }
}

pub fn text(path: &Path) -> String {
    std::fs::read_to_string(root().join(path)).unwrap()
}

/// The part of a Rust file before its tests.
pub fn before_tests(text: &str) -> &str {
    text.split("#[cfg(test)]").next().unwrap_or(text)
}

/// Compares with a golden file; with `BLESS=1` writes it anew. Exception lists are never written so.
pub fn golden(name: &str, now: &str) {
    let path = root().join("tests/house").join(name);
    if std::env::var_os("BLESS").is_some() {
        std::fs::write(&path, now).unwrap();
    }
    let kept = std::fs::read_to_string(&path).unwrap_or_default();
    assert!(
        kept == now,
        "{name} differs from what the program is now; look at the difference, then run with BLESS=1\n{}",
        difference(&kept, now)
    );
}

fn difference(kept: &str, now: &str) -> String {
    let (old, new): (Vec<&str>, Vec<&str>) = (kept.lines().collect(), now.lines().collect());
    let gone = old.iter().filter(|line| !new.contains(line)).map(|line| format!("- {line}"));
    let come = new.iter().filter(|line| !old.contains(line)).map(|line| format!("+ {line}"));
    gone.chain(come).take(40).collect::<Vec<_>>().join("\n")
}
