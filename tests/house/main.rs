//! The house keeps its own rules: arrows between rooms, sizes, coverage of acts and routes, schema and policy.

#![allow(clippy::unwrap_used, clippy::expect_used)]

#[path = "../support/mod.rs"]
mod support;

mod arrows;
mod contrast;
mod coverage;
mod plans;
mod schema;
mod sizes;
mod templates;
mod tree;
