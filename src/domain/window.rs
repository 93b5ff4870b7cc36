//! When a pull may be taken.
