//! Every component of the look in every state.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
