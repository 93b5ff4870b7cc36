//! Photos and files.
