//! Supernate keeps the records of suspension products: how a lot was made, how it ages, who judged it.
//!
//! The rooms, in reading order; `tests/house` holds which room may name which.
#![forbid(unsafe_code)]

#[global_allocator]
static ALLOCATOR: mimalloc::MiMalloc = mimalloc::MiMalloc;

/// What people do: one function per act, each loads, decides and stores through the one door.
pub mod acts;
/// The commands of the program, one file each.
pub mod cli;
/// Nouns, values and rules; pure.
pub mod domain;
/// Facts become documents and drawings; pure.
pub mod report;
/// Numbers in, numbers out: statistics and suspension physics.
pub mod science;
/// The only room that speaks SQL.
pub mod store;
/// Pages: routes, forms, and numbers turned into text.
pub mod web;
