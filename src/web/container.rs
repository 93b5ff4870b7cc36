//! Containers on study and their ledger.

use super::route::Route;

pub const ROUTES: &[Route] = &[];
