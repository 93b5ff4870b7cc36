//! Conclusions: answering the tree, signing what may be proposed, and reading a signed one again.

mod answers;
mod new;
mod one;

use super::route::{Route, get, post};
use crate::domain::act::Act;

pub const ROUTES: &[Route] = &[
    get("/conclusions/new", new::page),
    post("/conclusions/new", &[Act::ConcludeEvaluation], new::sign),
    get("/conclusions/{id}", one::page),
];
