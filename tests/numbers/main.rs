//! Checks of `science` against published values and independently computed references; each names its source.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod anova;
mod control_chart;
mod distribution;
mod evaluate;
mod kinetics;
mod least_squares;
mod nonnormal;
mod pooling;
mod properties;
mod reference;
mod regression;
mod shelf_life;
mod support;
mod suspension;
mod tolerance;
mod trend;
