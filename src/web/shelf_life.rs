//! Assigned shelf lives.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
