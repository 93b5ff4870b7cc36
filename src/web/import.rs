//! Imported results.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
