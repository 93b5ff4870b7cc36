//! Storage conditions.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
