//! Photos and files.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
