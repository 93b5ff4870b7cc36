//! Finding lots and records.
