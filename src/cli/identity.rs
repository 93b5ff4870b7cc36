//! Whose act a command is.
