//! Everything about one lot.
