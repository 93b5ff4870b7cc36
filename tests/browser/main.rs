//! Journeys in a real headless Chromium, with the script module and without, and every page under the
//! accessibility checker. `tests/run` installs what is needed.

#![allow(clippy::unwrap_used, clippy::expect_used)]

#[path = "../support/mod.rs"]
mod support;

mod audit;
mod browser;
mod driver;
mod imports;
mod journeys;
mod keyboard;
mod makings;
mod pages;
mod people;
mod print;
mod site;
mod world;
