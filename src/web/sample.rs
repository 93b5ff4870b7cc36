//! Samples: every test hangs on one.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
