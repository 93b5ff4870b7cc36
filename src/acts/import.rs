//! Imported results.
