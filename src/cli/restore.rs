//! Restoring a backup.
