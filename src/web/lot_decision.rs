//! Release or rejection of a lot.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
