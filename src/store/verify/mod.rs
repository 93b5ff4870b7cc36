//! Verification: recomputes what the trail promises, streaming, and names every entry that does not hold.

mod chain;
mod file;
mod record;
mod signature;
mod trend;

use std::fmt;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use percent_encoding::{AsciiSet, NON_ALPHANUMERIC, utf8_percent_encode};
use rusqlite::{Connection, OpenFlags};

use super::door::Current;
use super::{Answer, Reader, migrate, trail, trigger};
use crate::domain::failure::Failure;

/// One thing that does not hold: the entry of the trail, the record, and what is wrong with it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Finding {
    pub act: Option<i64>,
    /// Table and row.
    pub record: Option<(String, i64)>,
    pub sentence: String,
}

impl fmt::Display for Finding {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(act) = self.act {
            write!(f, "entry {act}, ")?;
        }
        if let Some((table, row)) = &self.record {
            write!(f, "{table} row {row}, ")?;
        }
        f.write_str(&self.sentence)
    }
}

/// What was verified, and what did not hold.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Report {
    pub acts: u64,
    pub lines: u64,
    pub rows: u64,
    pub signatures: u64,
    /// Signatures whose digest, computed again from the record, is the signed one.
    pub recomputed: u64,
    pub attachments: u64,
    /// The newest entry and its seal.
    pub head: Option<(i64, String)>,
    /// The entry whose seal is the expected digest; asked only with one.
    pub expected_at: Option<i64>,
    /// In the order of the checks; at most [`MOST_FINDINGS`] are kept.
    pub findings: Vec<Finding>,
    pub further_findings: u64,
}

/// Findings kept one by one; beyond, they are only counted.
pub const MOST_FINDINGS: usize = 50;

impl Report {
    pub fn holds(&self) -> bool {
        self.findings.is_empty()
    }
}

/// Told during long work: what is counted, and how many so far.
pub type Progress<'a> = &'a mut dyn FnMut(&str, u64);

/// How often progress is told.
const TOLD_EVERY: u64 = 100_000;

/// The state of a verification under way.
struct Check<'a> {
    report: Report,
    progress: Progress<'a>,
}

impl Check<'_> {
    fn found(&mut self, act: Option<i64>, record: Option<(&str, i64)>, sentence: impl Into<String>) {
        if self.report.findings.len() >= MOST_FINDINGS {
            self.report.further_findings += 1;
            return;
        }
        let record = record.map(|(table, row)| (table.to_string(), row));
        self.report.findings.push(Finding { act, record, sentence: sentence.into() });
    }

    fn tell(&mut self, what: &str, count: u64) {
        if count.is_multiple_of(TOLD_EVERY) {
            (self.progress)(what, count);
        }
    }

    /// A part that cannot be read to its end is itself a finding; the other parts are still checked.
    fn part(&mut self, name: &str, body: impl FnOnce(&mut Self) -> Answer<()>) {
        if let Err(failure) = body(self) {
            self.found(None, None, format!("the check of {name} could not go on: {failure}"));
        }
    }
}

/// Verifies everything a reader sees: file structure, chain of seals, records against the trail in both directions,
/// references, signatures, attachments under `files`, and that the guards are in place.
///
/// `expected` is a seal that was noted elsewhere, such as on a printed sheet: it has to be in the chain.
pub fn run(reader: &Reader<'_>, files: &Path, expected: Option<&str>, progress: Progress<'_>) -> Report {
    let mut check = Check { report: Report::default(), progress };
    check.part("the file", |check| integrity(reader, check));
    check.part("the chain", |check| chain::verify(reader, expected, check));
    check.part("the records", |check| record::verify(reader, check));
    check.part("the references", |check| references(reader, check));
    check.part("the signatures", |check| signature::verify(reader, check));
    check.part("the trend", |check| trend::verify(reader, check));
    check.part("the attachments", |check| file::verify(reader, files, check));
    check.part("the guards", |check| guards(reader, check));
    check.report
}

/// The chain of seals alone: enough for a statement about the trail, in one pass over it.
pub fn chain_alone(reader: &Reader<'_>) -> Report {
    let mut quiet = |_: &str, _: u64| {};
    let mut check = Check { report: Report::default(), progress: &mut quiet };
    check.part("the chain", |check| chain::verify(reader, None, check));
    check.report
}

fn integrity(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    for line in reader.all("pragma integrity_check(20)", [], |row| row.get::<_, String>(0))? {
        if line != "ok" {
            check.found(None, None, format!("the database file is damaged: {line}"));
        }
    }
    Ok(())
}

fn references(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    let broken = reader.all("pragma foreign_key_check", [], |row| {
        Ok((row.get::<_, String>(0)?, row.get::<_, Option<i64>>(1)?, row.get::<_, String>(2)?))
    })?;
    for (table, row, parent) in broken {
        let sentence = format!("points to a row of {parent} that does not exist");
        check.found(None, Some((&table, row.unwrap_or_default())), sentence);
    }
    Ok(())
}

/// Each trailed table carries its three generated triggers, and the trail its own six.
fn guards(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    let present = reader
        .all("select name from sqlite_schema where type = 'trigger'", [], |row| row.get::<_, String>(0))?;
    let mut wanted = Vec::new();
    for (table, _) in trail::trailed_tables(reader.connection())? {
        wanted.extend(["insert", "update", "delete"].map(|kind| format!("trail_{kind}_{table}")));
    }
    for table in ["trail_act", "trail_change", "trail_seal"] {
        wanted.extend(["update", "delete"].map(|kind| format!("guard_{table}_{kind}")));
    }
    for name in wanted.iter().filter(|name| !present.contains(name)) {
        check.found(None, None, format!("the guard {name} is missing from the schema"));
    }
    Ok(())
}

/// A database opened for reading alone, outside the one door.
pub struct Copy(Connection);

impl Copy {
    /// Opens a file that nobody writes to. Nothing appears beside it where it has no write-ahead log.
    pub fn open(path: &Path) -> Answer<Copy> {
        let log = PathBuf::from(format!("{}-wal", path.display()));
        let has_log = std::fs::metadata(log).is_ok_and(|log| log.len() > 0);
        Copy::open_as(path, !has_log)
    }

    /// Opens a file that a running program may be writing to.
    pub fn open_live(path: &Path) -> Answer<Copy> {
        Copy::open_as(path, false)
    }

    fn open_as(path: &Path, is_still: bool) -> Answer<Copy> {
        if !path.is_file() {
            return Err(Failure::missing(format!("database {}", path.display())));
        }
        let flags = OpenFlags::SQLITE_OPEN_READ_ONLY | OpenFlags::SQLITE_OPEN_URI;
        let connection = Connection::open_with_flags(address(path, is_still), flags)?;
        connection.execute_batch("pragma query_only = on; pragma trusted_schema = off;")?;
        trigger::register_functions(&connection, &Arc::new(Current::default()))?;
        Ok(Copy(connection))
    }

    /// Writes all of it into a new file, as one snapshot, checks that file and syncs it.
    pub fn copy_to(&self, to: &Path) -> Answer<()> {
        migrate::copy_online(&self.0, to)
    }

    /// Reads inside one snapshot.
    pub fn read<T>(&self, body: impl FnOnce(&Reader<'_>) -> T) -> Answer<T> {
        self.0.execute_batch("begin deferred")?;
        let answer = body(&Reader::over(&self.0));
        self.0.execute_batch("rollback")?;
        Ok(answer)
    }
}

/// A still file is opened as one that nobody changes, so that not even a lock file appears beside it.
fn address(path: &Path, is_still: bool) -> String {
    const KEPT: &AsciiSet = &NON_ALPHANUMERIC.remove(b'/').remove(b'.').remove(b'-').remove(b'_');
    let full = path.canonicalize().unwrap_or_else(|_| path.to_path_buf());
    let encoded = utf8_percent_encode(&full.to_string_lossy(), KEPT).to_string();
    if is_still { format!("file:{encoded}?immutable=1") } else { format!("file:{encoded}") }
}
