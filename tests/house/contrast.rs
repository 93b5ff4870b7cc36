//! The colours of the style sheet, by the contrast formula of WCAG 2.2 (relative luminance): text at least 4.5 to 1,
//! marks and edges at least 3 to 1 against what they stand on, in both themes.

use std::collections::BTreeMap;
use std::path::Path;

use super::tree::text;

type Tokens = BTreeMap<String, [u8; 3]>;

const TEXT: f64 = 4.5;
const GRAPHIC: f64 = 3.0;

/// What is written on what.
const WORDS: [(&str, &[&str]); 5] = [
    ("ink", &["paper", "sheet", "shade"]),
    ("soft", &["paper", "sheet", "shade"]),
    ("link", &["paper", "sheet", "shade"]),
    ("sheet", &["ink"]),
    ("on-fill", &["fill-work", "fill-back", "fill-out", "fill-action", "fill-note"]),
];

/// What has to be seen on what: marks, edges of fields, lines of drawings, the focus ring.
const SHAPES: [(&str, &[&str]); 12] = [
    ("ink", &["paper", "sheet", "shade"]),
    ("edge", &["paper", "sheet", "shade"]),
    ("focus", &["paper", "sheet", "halo"]),
    ("blue", &["paper", "sheet", "shade"]),
    ("alarm", &["paper", "sheet", "shade"]),
    ("purple", &["paper", "sheet", "shade"]),
    ("series", &["sheet", "paper", "band"]),
    ("glass", &["paper", "sheet"]),
    ("bed-edge", &["paper", "sheet", "sediment", "clear", "slight", "hazy", "cloudy"]),
    ("speck", &["slight", "hazy", "cloudy"]),
    ("on-fill", &["fill-work", "fill-back", "fill-out", "fill-action", "fill-note"]),
    ("soft", &["paper", "sheet"]),
];

/// The tokens of the first block after `start`.
fn tokens(sheet: &str, start: &str) -> Tokens {
    let (_, rest) = sheet.split_once(start).unwrap_or_else(|| panic!("no block {start}"));
    let (block, _) = rest.split_once('}').unwrap();
    let mut found = Tokens::new();
    for line in block.split(';') {
        let Some((name, value)) = line.split_once(':') else { continue };
        let (Some(name), Some(hex)) = (name.trim().strip_prefix("--"), value.trim().strip_prefix('#')) else {
            continue;
        };
        assert_eq!(hex.len(), 6, "--{name}: {hex}");
        let part = |at: usize| u8::from_str_radix(&hex[at..at + 2], 16).unwrap();
        found.insert(name.to_string(), [part(0), part(2), part(4)]);
    }
    found
}

/// WCAG 2.2, "relative luminance".
fn luminance(colour: [u8; 3]) -> f64 {
    let linear = colour.map(|part| {
        let share = f64::from(part) / 255.0;
        if share <= 0.04045 { share / 12.92 } else { ((share + 0.055) / 1.055).powf(2.4) }
    });
    0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
}

/// WCAG 2.2, "contrast ratio".
fn contrast(one: [u8; 3], other: [u8; 3]) -> f64 {
    let (a, b) = (luminance(one), luminance(other));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

fn faults(theme: &str, tokens: &Tokens, pairs: &[(&str, &[&str])], least: f64) -> Vec<String> {
    let mut faults = Vec::new();
    for (front, grounds) in pairs {
        for ground in *grounds {
            let ratio = contrast(tokens[*front], tokens[*ground]);
            if ratio < least {
                faults.push(format!("{theme}: {front} on {ground} is {ratio:.2}, at least {least}"));
            }
        }
    }
    faults
}

fn themes() -> [(&'static str, Tokens); 3] {
    let sheet = text(Path::new("templates/static/look.css"));
    [
        ("light", tokens(&sheet, ":root, [data-theme=\"light\"] {")),
        ("dark by the system", tokens(&sheet, "(prefers-color-scheme: dark) {\n  :root {")),
        ("dark by the switch", tokens(&sheet, "  [data-theme=\"dark\"] {")),
    ]
}

/// screen_U24, screen_U144.
#[test]
fn words_and_marks_stand_out_in_every_theme() {
    let mut all = Vec::new();
    for (theme, tokens) in themes() {
        all.extend(faults(theme, &tokens, &WORDS, TEXT));
        all.extend(faults(theme, &tokens, &SHAPES, GRAPHIC));
    }
    assert!(all.is_empty(), "{}", all.join("\n"));
}

#[test]
fn both_ways_to_the_dark_theme_have_the_same_colours() {
    let [light, by_system, by_switch] = themes();
    assert_eq!(by_system.1, by_switch.1);
    assert_eq!(light.1.keys().collect::<Vec<_>>(), by_system.1.keys().collect::<Vec<_>>());
}

/// The published ends of the scale, and a value that a published checker gives: #767676 on white is 4.54.
#[test]
fn the_formula_gives_the_known_ratios() {
    assert!((contrast([0; 3], [255; 3]) - 21.0).abs() < 1e-9);
    assert!((contrast([0x76; 3], [255; 3]) - 4.54).abs() < 0.005);
}

/// screen_U21: the nine marks are told apart without colour: each is another drawing.
#[test]
fn no_two_status_marks_are_the_same_drawing() {
    let sprite = text(Path::new("templates/part/sprite.svg"));
    let mut drawings: BTreeMap<String, String> = BTreeMap::new();
    let slugs = [
        "not-started",
        "cannot-start",
        "in-progress",
        "waiting-check",
        "waiting-review",
        "sent-back",
        "signed",
        "out",
        "missed",
    ];
    for slug in slugs {
        let (_, rest) = sprite.split_once(&format!("id=\"mark-{slug}\"")).unwrap_or_else(|| panic!("{slug}"));
        let drawing = rest.split("</symbol>").next().unwrap().to_string();
        if let Some(other) = drawings.insert(drawing, slug.to_string()) {
            panic!("{slug} is drawn like {other}");
        }
    }
}
