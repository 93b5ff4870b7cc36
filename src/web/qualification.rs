//! Who is qualified for which method, until when.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
