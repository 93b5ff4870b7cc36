//! `supernate restore`: a backup becomes a data folder again.

use std::path::PathBuf;

use super::{folder, verify};
use crate::acts;
use crate::domain::failure::Failure;

/// Restores a backup into a new or empty data folder, and verifies it
#[derive(clap::Args)]
pub struct Arguments {
    /// The backup: a folder or a .zip
    #[arg(value_name = "DIR|FILE.zip")]
    from: PathBuf,
    /// The data folder to make; it must not exist, or be empty
    #[arg(long)]
    data: PathBuf,
}

#[allow(clippy::print_stdout, clippy::print_stderr)]
pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    let _lock = folder::lock_if_there(&arguments.from)?;
    let mut progress = |what: &str, count: u64| eprintln!("{count} {what} …");
    let report = acts::backup::restore(&arguments.from, &arguments.data, &mut progress)?;
    print!("{}", verify::words(&report));
    if !report.holds() {
        let sentence =
            "What was restored does not hold. Do not serve it; restore another backup into another folder.";
        return Err(Failure::Held(sentence.to_string()));
    }
    println!("Restored into {}", arguments.data.display());
    Ok(())
}
