//! Stories: what people do, through the router.

#[path = "../support/mod.rs"]
mod support;

mod people;
mod trail;
