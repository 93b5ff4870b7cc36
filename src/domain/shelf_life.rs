//! Assigned shelf lives.
