//! Investigations of results out of specification.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
