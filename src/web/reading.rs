//! Readings: observations at the bench.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
