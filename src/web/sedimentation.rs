//! Cylinders read over hours and days.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
