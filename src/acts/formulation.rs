//! Formulations and their versions.
