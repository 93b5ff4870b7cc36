//! What a password must be: long, and not one that everybody tries first.

use unicode_normalization::UnicodeNormalization;

use super::refusal::NamedReason;

/// The shortest password while it is the only factor (NIST SP 800-63B-4).
pub const SHORTEST: usize = 15;
/// The longest password, in code points.
pub const LONGEST: usize = 256;

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum PasswordRefusal {
    #[error("The password needs at least {SHORTEST} characters. A few unrelated words are a good one.")]
    PasswordTooShort,
    #[error("The password may have at most {LONGEST} characters.")]
    PasswordTooLong,
    #[error("The password holds “{0}”, which is easily tried first. Choose other words.")]
    PasswordHasOwnWord(String),
    #[error("This password is on the list of much-used passwords. Choose other words.")]
    PasswordMuchUsed,
}

impl NamedReason for PasswordRefusal {
    fn field(&self) -> Option<String> {
        Some("password".to_string())
    }
}

/// The one form in which a password is hashed and verified: NFKC, nothing else changed.
pub fn normal(password: &str) -> String {
    password.nfkc().collect()
}

/// Refuses in this order: length, own words, the list of much-used passwords.
/// `own_words` are names the person would think of first: site, product, user name, full name.
pub fn may_be(password: &str, own_words: &[&str]) -> Result<(), PasswordRefusal> {
    let length = password.chars().count();
    if length < SHORTEST {
        return Err(PasswordRefusal::PasswordTooShort);
    }
    if length > LONGEST {
        return Err(PasswordRefusal::PasswordTooLong);
    }
    let lower = normal(password).to_lowercase();
    for word in own_words.iter().flat_map(|words| words.split_whitespace()) {
        let word = word.to_lowercase();
        if word.chars().count() >= 4 && lower.contains(&word) {
            return Err(PasswordRefusal::PasswordHasOwnWord(word));
        }
    }
    if is_much_used(&lower) {
        return Err(PasswordRefusal::PasswordMuchUsed);
    }
    Ok(())
}

/// A listed password, a listed password repeated, or one character repeated.
///
/// The guess estimate of the `zxcvbn` crate (word lists of 30,000 passwords inside) stands for the list: below
/// a million guesses the text is made of listed words, repeats or keyboard rows.
fn is_much_used(lower: &str) -> bool {
    let mut distinct: Vec<char> = lower.chars().collect();
    distinct.sort_unstable();
    distinct.dedup();
    distinct.len() < 4 || zxcvbn::zxcvbn(lower, &[]).guesses() < 1_000_000
}

#[cfg(test)]
mod tests {
    use super::*;

    /// sec_S10: the boundaries of the length, counted in code points.
    #[test]
    fn length_is_counted_in_code_points() {
        let long = |n: usize| {
            "übung macht den meister und noch viel mehr davon ".repeat(8)[..]
                .chars()
                .take(n)
                .collect::<String>()
        };
        for (length, good) in
            [(7, false), (8, false), (14, false), (15, true), (64, true), (256, true), (257, false)]
        {
            assert_eq!(may_be(&long(length), &[]).is_ok(), good, "{length}");
        }
    }

    /// sec_S11: no composition rules.
    #[test]
    fn a_lower_case_phrase_is_good() {
        assert_eq!(may_be("four herons stand in the quiet mill pond", &["supernate"]), Ok(()));
    }

    /// sec_S12: listed passwords and the person's own words are refused.
    #[test]
    fn listed_and_own_words_are_refused() {
        for bad in [
            "passwordpassword",
            "aaaaaaaaaaaaaaaa",
            "1234567890123456",
            "qwertyuiopqwerty",
            "password123456789",
        ] {
            assert_eq!(may_be(bad, &[]), Err(PasswordRefusal::PasswordMuchUsed), "{bad}");
        }
        let own = may_be("brandt keeps many herons", &["Ilse Brandt"]);
        assert_eq!(own, Err(PasswordRefusal::PasswordHasOwnWord("brandt".to_string())));
    }

    /// sec_S13: composed and decomposed letters are the same password.
    #[test]
    fn composed_and_decomposed_letters_are_the_same() {
        assert_eq!(normal("caf\u{e9}"), normal("cafe\u{301}"));
    }
}
