//! What a reviewer sees, decides and signs of a sample.

mod content;

use super::{Answer, Reader};

/// The canonical text of a sample as of an act (`None`: as it is now): what a review signature signs.
///
/// It holds every reading with who and when, results of all versions, flags, investigations opened, checks and
/// answers. All of these are insert-only, so the text as of an act stays the same for ever.
pub fn canonical(reader: &Reader<'_>, sample: i64, up_to_act: Option<i64>) -> Answer<String> {
    content::text(reader, sample, up_to_act)
}
