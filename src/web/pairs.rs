//! Form and query pairs as they came: names are unique, nothing is guessed.

use crate::domain::failure::Failure;

/// (name, value) pairs in the order they were sent.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Pairs(Vec<(String, String)>);

impl Pairs {
    /// Reads `a=1&b=2`. A name given twice is refused (sec_S54), and so is text that is not UTF-8.
    pub fn read(text: &str) -> Result<Pairs, Failure> {
        let mut pairs = Pairs::default();
        for part in text.split('&').filter(|part| !part.is_empty()) {
            let (name, value) = part.split_once('=').unwrap_or((part, ""));
            pairs.add(decoded(name)?, decoded(value)?)?;
        }
        Ok(pairs)
    }

    /// Adds one pair; the same name again is refused.
    pub fn add(&mut self, name: String, value: String) -> Result<(), Failure> {
        if self.get(&name).is_some() {
            return Err(Failure::BadRequest(format!("The field “{name}” was sent twice.")));
        }
        self.0.push((name, value));
        Ok(())
    }

    pub fn get(&self, name: &str) -> Option<&str> {
        self.0.iter().find(|(known, _)| known == name).map(|(_, value)| value.as_str())
    }

    pub fn iter(&self) -> impl Iterator<Item = (&str, &str)> {
        self.0.iter().map(|(name, value)| (name.as_str(), value.as_str()))
    }
}

fn decoded(text: &str) -> Result<String, Failure> {
    let spaced = text.replace('+', " ");
    percent_encoding::percent_decode_str(&spaced)
        .decode_utf8()
        .map(|text| text.into_owned())
        .map_err(|_| Failure::BadRequest("The request holds text that is not UTF-8.".to_string()))
}

/// Writes a value for a query or a form body.
pub fn encoded(text: &str) -> String {
    percent_encoding::utf8_percent_encode(text, percent_encoding::NON_ALPHANUMERIC).to_string()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pairs_are_read_and_doubled_names_refused() {
        let pairs = Pairs::read("reading.1=7%2C10&note=two+words&empty=").unwrap();
        assert_eq!(pairs.get("reading.1"), Some("7,10"));
        assert_eq!(pairs.get("note"), Some("two words"));
        assert_eq!(pairs.get("empty"), Some(""));
        assert!(Pairs::read("a=1&a=2").is_err());
        assert!(Pairs::read("a=%ff").is_err());
    }
}
