//! Lots: what was made.
