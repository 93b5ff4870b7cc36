//! The index of definitions.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
