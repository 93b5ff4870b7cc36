//! Results: completed tests.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
