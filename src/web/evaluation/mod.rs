//! Evaluation: what the results of all lots say, by presentation, condition and test.

mod list;
mod load;
mod one;

use super::route::{Route, get};

pub const ROUTES: &[Route] = &[get("/evaluations", list::list), get("/evaluations/{arm}/{test}", one::one)];
