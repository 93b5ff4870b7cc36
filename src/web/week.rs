//! The lab manager’s week.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
