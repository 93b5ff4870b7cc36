//! Products, their presentations and customers.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
