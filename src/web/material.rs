//! Materials: what a formulation is made of.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
