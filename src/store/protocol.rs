//! Protocols and their versions.
