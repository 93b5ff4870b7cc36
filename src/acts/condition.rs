//! Storage conditions.
