//! Lots: what was made.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
