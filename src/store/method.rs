//! Methods and their versions.
