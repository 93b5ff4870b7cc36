//! What must not stand in a template, and in the words a person reads.

use super::tree::{files, text};

/// The one include that may write markup of ours without escaping (sec_S60).
const CHART_INCLUDE: &str = "templates/part/chart.html";

/// The one template that is not a page of the program.
const EXPORTED_FILE: &str = "templates/lot_file/file.html";

#[test]
fn templates_hold_no_raw_markup_script_style_or_browser_checks() {
    let mut wrong = Vec::new();
    for path in files("templates", &[".html"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        let page = text(&path);
        // The lot file is an exported document that carries its own style sheet, not a page of the program.
        let page = if name == "templates/lot_file/file.html" { page.replace("<style>", "") } else { page };
        if page.contains("|safe") && name != CHART_INCLUDE {
            wrong.push(format!("{name}: |safe"));
        }
        for word in
            [" style=\"", "<style", "<script>", "onclick", " required", "type=\"number\"", "role=\"grid\""]
        {
            // An exported file stands alone, outside the program's pages, and carries the style sheet itself.
            let is_own_file = word == "<style" && name == EXPORTED_FILE;
            if page.contains(word) && !is_own_file {
                wrong.push(format!("{name}: {word}"));
            }
        }
        for form in page.split("<form").skip(1) {
            if !form.split('>').next().unwrap_or_default().contains("novalidate") {
                wrong.push(format!("{name}: a form without novalidate"));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// screen_U04: sentences name what is wrong and how to mend it, without these words.
#[test]
fn refusals_do_not_blame_or_beg() {
    let mut wrong = Vec::new();
    for path in files("src", &[".rs"]) {
        for (number, line) in text(&path).lines().enumerate() {
            let is_sentence = line.trim_start().starts_with("#[error(\"") || line.contains("fault(\"");
            let lower = line.to_lowercase();
            for word in ["invalid", "illegal", "please", "sorry", "oops"] {
                if is_sentence && lower.contains(word) {
                    wrong.push(format!("{}:{}: {word}", path.display(), number + 1));
                }
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// screen_U27: the nine status words are written in one place.
#[test]
fn status_words_come_from_the_one_enum() {
    let words = supernate::domain::status::Status::ALL.map(|status| status.words());
    for path in files("templates", &[".html"]) {
        let name = path.to_string_lossy().replace('\\', "/");
        let page = text(&path);
        for word in words.iter().filter(|word| **word != "Signed" && **word != "Missed") {
            assert!(!page.contains(word), "{name} writes “{word}” itself");
        }
    }
}
