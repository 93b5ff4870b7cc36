//! Pulls: ages that come due, their windows and what happened to them.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
