//! Specifications and their versions.
