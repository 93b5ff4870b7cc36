//! The review by QA: the queue, a sample's page, the signing list.

pub mod card;
pub mod content;
pub mod load;
pub mod queue;
pub mod sample;
pub mod sign;

use super::route::{Route, get, post};
use crate::domain::act::Act;

pub const ROUTES: &[Route] = &[
    get("/review", queue::queue),
    get("/review/sign", sign::list),
    post("/review/sign", &[Act::SignPulls], sign::sign),
    get("/review/receipts/{act}", sign::receipt),
    get("/review/{id}", sample::sample),
    post("/review/{id}/agree", &[Act::DecideReview], sample::decide),
    post("/review/{id}/send-back", &[Act::SendBackResult], sample::send_back),
    post("/review/{id}/answers", &[Act::AnswerException], sample::answer),
];
