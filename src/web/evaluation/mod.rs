//! Evaluation: what the results of all lots say, by presentation, condition and test.

mod list;
mod load;
mod one;

use super::pairs::encoded;
use super::route::{Route, get};

/// The address of a series.
pub fn path(arm: i64, test: &str, component: &str) -> String {
    let test = encoded(test);
    if component.is_empty() {
        format!("/evaluations/{arm}/{test}")
    } else {
        format!("/evaluations/{arm}/{test}?component={}", encoded(component))
    }
}

pub const ROUTES: &[Route] = &[get("/evaluations", list::list), get("/evaluations/{arm}/{test}", one::one)];
