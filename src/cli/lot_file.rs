//! `supernate lot-file`: everything about one lot, as one archive.

use std::path::PathBuf;

use super::folder;
use super::identity::{self, Identity};
use crate::acts;
use crate::domain::failure::Failure;
use crate::store;
use crate::store::door::Durability;

/// Exports the lot file of a lot: print-ready HTML, CSV, JSON, attachments and a manifest of SHA-256
///
/// The digest of the archive is written on the trail and printed. While the folder is served, use the button on the
/// lot's page.
#[derive(clap::Args)]
pub struct Arguments {
    /// The lot number
    #[arg(value_name = "LOT")]
    lot: String,
    /// The archive to write; it must not exist
    #[arg(long, value_name = "FILE.zip")]
    out: PathBuf,
    /// The data folder
    #[arg(long, default_value = "data")]
    data: PathBuf,
    #[command(flatten)]
    identity: Identity,
    /// Put a byte-order mark before each CSV, for spreadsheets that need it
    #[arg(long)]
    bom: bool,
}

#[allow(clippy::print_stdout)]
pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    folder::must_exist(&arguments.data)?;
    if arguments.out.exists() {
        return Err(Failure::Held(format!("{} exists; nothing is overwritten.", arguments.out.display())));
    }
    let opened = folder::open(&arguments.data, Durability::Full)?;
    identity::set_up(&opened)?;
    let actor = arguments.identity.actor(&opened)?;
    let lot = opened.db.read(|reader| store::lot::by_number(reader, &arguments.lot))?;
    let lot = lot.ok_or_else(|| Failure::missing(format!("lot {}", arguments.lot)))?;
    let made = acts::lot_file::make(&opened.db, &actor, lot.id, &opened.path, arguments.bom)?;
    std::fs::write(&arguments.out, &made.bytes)?;
    println!("{} of lot {}, sha256 {}", arguments.out.display(), lot.number, made.digest);
    Ok(())
}
