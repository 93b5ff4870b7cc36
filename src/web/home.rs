//! The start page of each person: where their work waits.

use super::reply::{Outcome, see};
use super::route::{Route, get};
use super::visit::Visit;
use crate::domain::role::Role;

pub const ROUTES: &[Route] = &[get("/", home)];

fn home(visit: &Visit) -> Outcome {
    let actor = visit.actor()?;
    let start = [
        (Role::Administrator, "/people"),
        (Role::QaReviewer, "/review"),
        (Role::LabManager, "/week"),
        (Role::Analyst, "/bench"),
        (Role::Formulator, "/formulations"),
        (Role::Auditor, "/lots"),
        (Role::ProductionOperator, "/batches"),
    ];
    see(start.iter().find(|(role, _)| actor.holds(*role)).map_or("/history", |(_, path)| *path))
}
