//! Results: completed tests.
