//! Finding records: what two spellings of one number have in common.

/// Marks that separate the parts of a number and are ignored when records are looked for.
pub const SEPARATORS: [char; 10] =
    ['-', ' ', '.', '/', '_', '\u{2010}', '\u{2011}', '\u{2013}', '\u{a0}', '\u{202f}'];

/// The text without separators, in small letters: `S-014`, `s 014` and `S014` are the same.
pub fn folded(text: &str) -> String {
    text.trim().chars().filter(|c| !SEPARATORS.contains(c)).flat_map(char::to_lowercase).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// screen_U131: ten spellings of one number.
    #[test]
    fn separators_and_capitals_do_not_matter() {
        for typed in
            ["S-014", "S014", "s-014", "s014", "S 014", "S.014", "S/014", "S_014", " S-014 ", "S\u{2011}014"]
        {
            assert_eq!(folded(typed), "s014", "{typed:?}");
        }
        assert_eq!(folded(" - / . "), "");
        assert_eq!(folded("50 %"), "50%");
    }
}
