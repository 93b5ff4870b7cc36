//! Studies: a lot ageing by a protocol.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
