//! Backups of the data folder.
