//! `supernate verify`: checks a copy of a data folder, or a lot file, and names what does not hold.

use std::path::{Path, PathBuf};

use super::folder;
use crate::acts;
use crate::domain::failure::Failure;
use crate::store::verify::Report;

/// Verifies a copy of a data folder, or a lot file
///
/// A folder: the chain of seals, every record against the trail in both directions, signatures, attachments and the
/// structure of the file. It must not be in use: copy it first, or verify a backup.
/// A lot file (.zip): every file in it against its own manifest.
/// Exit code 0 when everything holds, 1 when something does not.
#[derive(clap::Args)]
pub struct Arguments {
    /// The folder, or the .zip of a lot file
    #[arg(value_name = "DIR|FILE.zip")]
    path: PathBuf,
    /// A digest noted elsewhere: of a folder a seal of the chain, of a lot file the digest of the .zip
    #[arg(long)]
    expect: Option<String>,
}

pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    let expected = arguments.expect.as_deref().map(bare_digest);
    if arguments.path.is_file() {
        return verify_lot_file(&arguments.path, expected.as_deref());
    }
    verify_folder(&arguments.path, expected.as_deref())
}

#[allow(clippy::print_stdout)]
fn verify_lot_file(path: &Path, expected: Option<&str>) -> Result<(), Failure> {
    let checked = acts::lot_file::check(path, expected)?;
    for finding in &checked.findings {
        println!("does not hold: {finding}");
    }
    println!("{} files, sha256 of the archive {}", checked.files, checked.digest);
    if !checked.findings.is_empty() {
        return Err(Failure::Held(format!("{} does not hold.", path.display())));
    }
    match expected {
        Some(_) => println!("Everything holds, and the archive is the expected one."),
        None => println!(
            "Everything holds. Compare the digest with the one on the trail, or give it with --expect."
        ),
    }
    Ok(())
}

/// A digest as people copy it: with spaces between groups, in capitals, with the word before it.
fn bare_digest(typed: &str) -> String {
    let lower = typed.to_lowercase();
    lower.trim_start_matches("sha256").chars().filter(char::is_ascii_hexdigit).collect()
}

#[allow(clippy::print_stdout, clippy::print_stderr)]
fn verify_folder(path: &Path, expected: Option<&str>) -> Result<(), Failure> {
    let _lock = folder::lock_if_there(path)?;
    let mut progress = |what: &str, count: u64| eprintln!("{count} {what} …");
    let report =
        acts::verify::folder(&folder::database_of(path), &path.join("files"), expected, &mut progress)?;
    print!("{}", words(&report));
    if report.holds() {
        return Ok(());
    }
    Err(Failure::Held(format!("{} does not hold.", path.display())))
}

/// The report in lines, the findings first.
pub fn words(report: &Report) -> String {
    let mut text = String::new();
    for finding in &report.findings {
        text.push_str(&format!("does not hold: {finding}\n"));
    }
    if report.further_findings > 0 {
        text.push_str(&format!("and {} more\n", report.further_findings));
    }
    text.push_str(&format!(
        "{} entries with {} changed records, {} records, {} signatures ({} computed again), {} attachments\n",
        report.acts, report.lines, report.rows, report.signatures, report.recomputed, report.attachments
    ));
    if let Some((act, seal)) = &report.head {
        text.push_str(&format!("newest entry {act}, seal {seal}\n"));
    }
    if let Some(act) = report.expected_at {
        text.push_str(&format!("the expected seal is that of entry {act}\n"));
    }
    if report.holds() {
        text.push_str("Everything holds.\n");
    }
    text
}
