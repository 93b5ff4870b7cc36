//! Readings: observations at the bench.
