//! Evaluation: what the results of all lots say, by presentation, condition and test.

mod list;
mod load;
mod one;
mod versions;

use super::pairs::encoded;
use super::route::{Route, get};
use super::visit::Visit;
use crate::domain::evaluation::record;
use crate::domain::failure::Failure;
use load::Loaded;

/// The address of a series.
pub fn path(arm: i64, test: &str, component: &str) -> String {
    let test = encoded(test);
    if component.is_empty() {
        format!("/evaluations/{arm}/{test}")
    } else {
        format!("/evaluations/{arm}/{test}?component={}", encoded(component))
    }
}

pub const ROUTES: &[Route] = &[
    get("/evaluations", list::list),
    get("/evaluations/{arm}/{test}", one::one),
    get("/evaluations/{arm}/{test}/versions", versions::versions),
];

/// The test and component a page was asked for; missing where the condition has no result of them.
fn asked(visit: &Visit, loaded: &Loaded) -> Result<(String, String), Failure> {
    let test = visit.param("test")?.to_string();
    let component = visit.query.get("component").unwrap_or_default().to_string();
    let key = (test, component);
    if record::series_of(&loaded.records).contains(&key) {
        return Ok(key);
    }
    Err(Failure::missing("test with results at this condition"))
}
