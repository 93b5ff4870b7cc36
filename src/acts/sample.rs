//! Samples: every test hangs on one.
