//! Numbers in, numbers out: statistics of stability data and the physics of suspensions.
//!
//! Nothing here knows a record, a clock or a file. Every function answers degenerate input with a named
//! outcome; no `NaN` and no infinity leaves this room.

pub mod anova;
pub mod censored;
pub mod control_chart;
pub mod counts;
pub mod deliverable_volume;
pub mod density;
pub mod diagnostics;
pub mod distribution;
pub mod extrapolation;
pub mod flow;
pub mod hindered;
pub mod interval;
pub mod kinetics;
pub mod least_squares;
pub mod ordinal;
pub mod ph;
pub mod pooling;
pub mod preservative;
pub mod quantitation;
pub mod redispersion;
pub mod regression;
pub mod rounding;
pub mod sedimentation;
pub mod settling;
pub mod settling_curve;
pub mod shelf_life;
pub mod significant_change;
pub mod tolerance;
pub mod transform;
pub mod trend;
pub mod uniformity;
pub mod version_difference;
pub mod viscosity;
pub mod warning_rules;
pub mod yields;
