//! CSV and JSON sets.
