//! Without a pointer: the focus is seen, never covered, and comes past every control.

use super::browser::{Browser, Script};
use super::site::Site;
use super::world::filled;

const TAB: &str = "\u{E004}";

/// One control of each kind, in both themes of the patterns page.
const RINGS: &str = r#"
const done = arguments[0];
const kinds = ["a[href]", "a.task", "button", "input[type=text]", "input[type=password]", "input[type=radio]",
  "input[type=checkbox]", "input[type=file]", "select", "textarea", "summary", ".wide"];
const faults = [];
for (const theme of ["light", "dark"]) {
  for (const kind of kinds) {
    const control = document.querySelector(`.pane[data-theme=${theme}] ${kind}`);
    if (!control) { faults.push(`${theme}: no ${kind}`); continue; }
    control.focus({ focusVisible: true });
    const style = getComputedStyle(control);
    if (style.outlineStyle === "none" || parseFloat(style.outlineWidth) < 2) {
      faults.push(`${theme} ${kind}: ${style.outlineStyle} ${style.outlineWidth}`);
    }
  }
}
done(faults);
"#;

/// screen_U143: a ring of at least 2 px; its colours are computed in the house tests.
#[test]
fn every_kind_of_control_shows_its_focus() {
    let site = Site::new();
    let browser = Browser::new(&site, Script::On);
    browser.is("maren.oddy");
    browser.open("/patterns");
    assert_eq!(browser.awaits(RINGS), serde_json::json!([]));
}

/// What has the focus: its number on the page, and whether anything covers it.
const FOCUS: &str = r#"
const all = [...document.querySelectorAll("a[href], button, input:not([type=hidden]), select, textarea, summary, "
  + "[tabindex='0']")].filter((control) => control.checkVisibility({ visibilityProperty: true }));
const held = document.activeElement;
const box = held.getBoundingClientRect();
const isInside = box.bottom > 0 && box.top < innerHeight;
const x = Math.min(Math.max(box.left + box.width / 2, 1), innerWidth - 1);
const y = Math.min(Math.max(box.top + Math.min(box.height / 2, 20), 1), innerHeight - 1);
const top = document.elementFromPoint(x, y);
const isSeen = isInside && (held.contains(top) || top?.contains(held) || held.closest("label")?.contains(top));
arguments[0]([all.indexOf(held), all.length, Boolean(isSeen), held.outerHTML.slice(0, 80)]);
"#;

/// screen_U35 and WCAG 2.1.2, 2.4.11: the tab key comes past every control, none is covered, none holds it.
#[test]
fn the_tab_key_comes_past_every_control() {
    let site = Site::serving(filled().lab);
    let browser = Browser::new(&site, Script::On);
    browser.is("maren.oddy");
    for (path, width) in [("/lots/new", 1280), ("/lots", 320), ("/instruments/new", 320)] {
        browser.is_sized(width, 640);
        browser.open(path);
        let mut reached = 0;
        loop {
            browser.types(TAB);
            let seen = browser.awaits(FOCUS);
            let (at, of) = (seen[0].as_i64().unwrap(), seen[1].as_i64().unwrap());
            if at < 0 {
                assert!(reached >= of, "{path}: {reached} of {of} controls were reached");
                break;
            }
            assert_eq!(seen[2], true, "{path}: the focus is covered on {}", seen[3]);
            reached += 1;
            assert!(reached <= of + 1, "{path}: the focus is held at {}", seen[3]);
        }
    }
}
