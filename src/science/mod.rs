//! Numbers in, numbers out: statistics of stability data and the physics of suspensions.
//!
//! Nothing here knows a record, a clock or a file. Every function answers degenerate input with a named
//! outcome; no `NaN` and no infinity leaves this room.

pub mod distribution;
pub mod interval;
pub mod regression;
pub mod rounding;
