//! The stages of a container at the bench.
