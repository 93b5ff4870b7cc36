//! The review of a pull and its signature.
