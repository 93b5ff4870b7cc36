//! `supernate import`: a file of results measured elsewhere.

use std::path::{Path, PathBuf};

use chrono::Utc;

use super::folder::{self, Folder};
use super::identity::Identity;
use crate::acts;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::import::ImportRefusal;
use crate::domain::moment::Moment;
use crate::store::door::Durability;
use crate::store::site::Site;

/// Imports results measured elsewhere, all of the file or nothing
///
/// The first line names the columns study, formulation, condition, container, time, time_unit, test, value, sd, n, unit
/// and flag, in any order. What is imported is marked so; no signature is made, and nothing signed can rest on it.
#[derive(clap::Args)]
pub struct Arguments {
    /// The file: CSV in UTF-8
    #[arg(value_name = "FILE.csv")]
    file: PathBuf,
    /// The data folder; made when it does not exist
    #[arg(long, default_value = "data")]
    data: PathBuf,
    #[command(flatten)]
    identity: Identity,
    /// Only say what the file would bring
    #[arg(long)]
    preview: bool,
    /// The name of the site, for a new data folder
    #[arg(long, default_value = "Our site")]
    site_name: String,
    /// The site's time zone, for a new data folder
    #[arg(long, default_value = "Europe/London")]
    zone: chrono_tz::Tz,
}

#[allow(clippy::print_stdout)]
pub fn run(arguments: &Arguments) -> Result<(), Failure> {
    let file = &arguments.file;
    let bytes = std::fs::read(file)
        .map_err(|error| Failure::Held(format!("{} cannot be read: {error}.", file.display())))?;
    let plan = acts::import::preview(&bytes).map_err(|faults| {
        Failure::Held(format!("{}\n{}", file.display(), ImportRefusal::CellsUnreadable(faults)))
    })?;
    if arguments.preview {
        println!("{} would bring {}", file.display(), plan.counts.words());
        return Ok(());
    }
    let opened = opened(arguments)?;
    let actor = arguments.identity.actor(&opened)?;
    let (import, counts) = acts::import::import(&opened.db, &actor, &name(file), &bytes)?;
    println!("Imported {}, marked as imported (import {import})", counts.words());
    Ok(())
}

fn name(file: &Path) -> String {
    file.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default()
}

/// The data folder, set up where it is new.
fn opened(arguments: &Arguments) -> Result<Folder, Failure> {
    let mut opened = folder::open(&arguments.data, Durability::Full)?;
    if opened.site.is_none() {
        let site = Site { name: arguments.site_name.clone(), zone: arguments.zone, is_demo: false };
        let console = Actor::console(Moment::new(Utc::now(), site.zone));
        acts::site::set_up(&opened.db, &console, &site)?;
        opened.site = Some(site);
    }
    Ok(opened)
}
