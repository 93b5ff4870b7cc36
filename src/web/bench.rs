//! The bench: tests of a sample in their stages.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
