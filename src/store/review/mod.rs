//! What a reviewer sees, decides and signs of a sample.

pub mod checked;
mod content;
pub mod decision;
pub mod facts;
pub mod page;

use super::{Answer, Reader};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use facts::ReviewSample;

/// The canonical text of a sample as of an act (`None`: as it is now): what a review signature signs.
///
/// It holds every reading with who and when, results of all versions, flags, investigations opened, checks and
/// answers. All of these are insert-only, so the text as of an act stays the same for ever.
pub fn canonical(reader: &Reader<'_>, sample: i64, up_to_act: Option<i64>) -> Answer<String> {
    content::text(reader, sample, up_to_act)
}

/// SHA-256 of the canonical text as it is now, hexadecimal.
pub fn digest(reader: &Reader<'_>, sample: i64) -> Answer<String> {
    Ok(sha256_hex(canonical(reader, sample, None)?.as_bytes()))
}

/// One sample with the facts of its review.
pub fn sample(reader: &Reader<'_>, id: i64) -> Answer<ReviewSample> {
    facts::many(reader, &[id])?.pop().ok_or_else(|| Failure::missing("sample with this number"))
}

/// The sample a test belongs to.
pub fn sample_of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<i64> {
    reader.one(
        "test with this number",
        "select sample from sample_test where id = :id",
        rusqlite::named_params! { ":id": sample_test },
        |row| row.get(0),
    )
}
