//! Everything about one lot.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
