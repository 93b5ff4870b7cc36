//! Verifying a data folder or a backup of one. Reads only; nothing of it goes into the trail.

use std::path::Path;

use crate::domain::failure::Failure;
use crate::store::verify::{self, Copy, Progress, Report};

/// Verifies a database file with its attachments. `expected` is a seal noted elsewhere that has to be in the chain.
pub fn folder(
    database: &Path,
    files: &Path,
    expected: Option<&str>,
    progress: Progress<'_>,
) -> Result<Report, Failure> {
    Copy::open(database)?.read(|reader| verify::run(reader, files, expected, progress))
}
