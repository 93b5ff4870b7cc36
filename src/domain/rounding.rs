//! Rounding of exact decimals.
