//! Formulas of numeric tests in exact decimals.
