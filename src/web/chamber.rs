//! Chambers: where containers stand.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
