//! Finding lots and records.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
