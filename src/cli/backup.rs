//! `supernate backup`: a verified copy of a data folder, also while it is served.

use std::path::PathBuf;

use super::{folder, verify};
use crate::acts;
use crate::domain::failure::Failure;

/// Backs up a data folder, also while it is being served
///
/// The backup holds the database as one snapshot and the attachments. It is verified; only a copy that holds gets its
/// name. The server's own key is not part of it.
#[derive(clap::Args)]
pub struct Arguments {
    /// The data folder
    #[arg(long, default_value = "data")]
    data: PathBuf,
    /// A new folder, or a new file that ends in .zip
    #[arg(long, value_name = "DIR|FILE.zip")]
    to: PathBuf,
}

#[allow(clippy::print_stdout, clippy::print_stderr)]
pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    folder::must_exist(&arguments.data)?;
    let mut progress = |what: &str, count: u64| eprintln!("{count} {what} …");
    let report = acts::backup::back_up(&arguments.data, &arguments.to, &mut progress)?;
    print!("{}", verify::words(&report));
    if !report.holds() {
        let sentence = "The copy does not hold, so it is no backup. It is kept with the ending .unfinished.";
        return Err(Failure::Held(sentence.to_string()));
    }
    println!("Backed up to {}", arguments.to.display());
    Ok(())
}
