//! Checks of a reading while it can still be read again.
