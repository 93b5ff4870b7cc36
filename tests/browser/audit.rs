//! The accessibility checker and our own rules of layout, run inside a page.

use std::collections::BTreeMap;
use std::path::PathBuf;
use std::sync::LazyLock;

use serde_json::json;

use super::browser::Browser;

/// The text of axe-core (MPL-2.0, used by the tests only).
static AXE: LazyLock<String> = LazyLock::new(|| {
    let target = PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join("..");
    let file = target.join("axe/node_modules/axe-core/axe.min.js");
    std::fs::read_to_string(file).expect("axe-core: run tests/run, which installs it or says what to install")
});

/// Width and height of a window, and the theme that the system asks for.
pub const VIEWS: [(u32, u32, &str); 4] =
    [(1280, 800, "light"), (1280, 800, "dark"), (320, 640, "light"), (320, 640, "dark")];

impl Browser<'_> {
    /// Loads the checker with every page opened from now on.
    pub fn loads_checker(&self) {
        self.protocol("Page.enable", json!({}));
        self.protocol("Page.addScriptToEvaluateOnNewDocument", json!({ "source": *AXE }));
    }

    /// What is wrong with the open page, each fault with the views where it is. With PICTURES=1 each view is
    /// also kept as a picture in `target/screenshots`.
    pub fn faults(&self) -> Vec<String> {
        self.faults_in(&VIEWS)
    }

    pub fn faults_in(&self, views: &[(u32, u32, &str)]) -> Vec<String> {
        let mut all: BTreeMap<String, Vec<String>> = BTreeMap::new();
        for &(width, height, theme) in views {
            self.is_sized(width, height);
            self.prefers(theme);
            if std::env::var_os("PICTURES").is_some() {
                self.pictures(&format!(
                    "{}-{width}-{theme}",
                    self.path().trim_matches('/').replace('/', "-")
                ));
            }
            let found = self.awaits(include_str!("audit.js"));
            for fault in found.as_array().cloned().unwrap_or_default() {
                let fault = fault.as_str().unwrap_or_default().to_string();
                all.entry(fault).or_default().push(format!("{width} {theme}"));
            }
        }
        let path = self.path();
        all.into_iter().map(|(fault, views)| format!("{path} at {}: {fault}", views.join(", "))).collect()
    }
}
