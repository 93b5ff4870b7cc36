//! The review of a pull and its signature.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
