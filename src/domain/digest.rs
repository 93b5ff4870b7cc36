//! SHA-256 digests in one encoding: every field type-tagged and length-prefixed, so no two records share bytes.

use sha2::{Digest, Sha256};

/// Collects fields and gives their digest.
#[derive(Clone, Default)]
pub struct Encoder(Vec<u8>);

impl Encoder {
    pub fn new() -> Encoder {
        Encoder::default()
    }

    fn tagged(&mut self, tag: u8, bytes: &[u8]) {
        self.0.push(tag);
        self.0.extend_from_slice(&(bytes.len() as u64).to_be_bytes());
        self.0.extend_from_slice(bytes);
    }

    pub fn null(&mut self) -> &mut Self {
        self.tagged(b'n', &[]);
        self
    }

    pub fn integer(&mut self, value: i64) -> &mut Self {
        self.tagged(b'i', &value.to_be_bytes());
        self
    }

    pub fn real(&mut self, value: f64) -> &mut Self {
        self.tagged(b'r', &value.to_bits().to_be_bytes());
        self
    }

    pub fn text(&mut self, value: &str) -> &mut Self {
        self.tagged(b't', value.as_bytes());
        self
    }

    pub fn blob(&mut self, value: &[u8]) -> &mut Self {
        self.tagged(b'b', value);
        self
    }

    pub fn optional(&mut self, value: Option<&str>) -> &mut Self {
        match value {
            Some(text) => self.text(text),
            None => self.null(),
        }
    }

    pub fn bytes(&self) -> &[u8] {
        &self.0
    }

    pub fn digest(&self) -> [u8; 32] {
        sha256(&self.0)
    }
}

pub fn sha256(bytes: &[u8]) -> [u8; 32] {
    Sha256::digest(bytes).into()
}

/// SHA-256 in lower-case hexadecimal digits.
pub fn sha256_hex(bytes: &[u8]) -> String {
    hex(&sha256(bytes))
}

pub fn hex(bytes: &[u8]) -> String {
    let digit = |value: u8| char::from(b"0123456789abcdef"[usize::from(value & 15)]);
    bytes.iter().flat_map(|byte| [digit(byte >> 4), digit(*byte)]).collect()
}

/// The bytes of a hexadecimal text; `None` where it is not one.
pub fn from_hex(text: &str) -> Option<Vec<u8>> {
    if !text.len().is_multiple_of(2) || !text.is_ascii() {
        return None;
    }
    (0..text.len()).step_by(2).map(|at| u8::from_str_radix(&text[at..at + 2], 16).ok()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// NIST FIPS 180-4 example: SHA-256("abc").
    #[test]
    fn sha256_agrees_with_the_standards_example() {
        let expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(sha256_hex(b"abc"), expected);
    }

    #[test]
    fn fields_cannot_run_into_each_other() {
        let two = Encoder::new().text("ab").text("c").digest();
        let other = Encoder::new().text("a").text("bc").digest();
        assert_ne!(two, other);
        assert_ne!(Encoder::new().null().digest(), Encoder::new().text("").digest());
    }

    #[test]
    fn hexadecimal_goes_both_ways() {
        assert_eq!(from_hex(&hex(&[0, 255, 16])), Some(vec![0, 255, 16]));
        assert_eq!(from_hex("0g"), None);
        assert_eq!(from_hex("abc"), None);
    }
}
