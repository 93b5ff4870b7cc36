//! Verification of chain, seals, rows and signatures.
