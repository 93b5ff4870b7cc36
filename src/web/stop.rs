//! Overrides of a register's stop, signed by QA.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
