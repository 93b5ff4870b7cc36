//! The laboratory check by a second person.
