//! Investigations of results out of specification.
