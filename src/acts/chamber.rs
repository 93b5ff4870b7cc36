//! Chambers: where containers stand.
