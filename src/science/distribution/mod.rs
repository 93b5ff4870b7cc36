//! Distribution functions: normal, Student, F, chi squared and noncentral t.
//!
//! Both tails are computed on their own, so that a small tail keeps its digits: relative error at most 1e-10
//! for probabilities and 1e-9 for quantiles (`tests/numbers/distribution.rs` holds it over the whole range).
//! The incomplete beta and gamma functions are our own because the F upper tail and the chi squared and F
//! quantiles of the usual crate miss that target, and because one distribution is asked for hundreds of
//! tails in a row, where the constant part is worth keeping.

pub mod chi_squared;
pub mod fisher;
pub mod gauss_legendre;
pub mod incomplete_beta;
pub mod incomplete_gamma;
pub mod noncentral_t;
pub mod normal;
mod root;
pub mod student;

/// The two tails of a distribution at one point; both carry full relative precision.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tails {
    /// Probability at or below the point.
    pub lower: f64,
    /// Probability above the point.
    pub upper: f64,
}
