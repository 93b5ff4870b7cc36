//! Who is qualified for which method, until when.
