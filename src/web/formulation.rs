//! Formulations and their versions.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
