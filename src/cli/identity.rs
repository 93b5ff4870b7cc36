//! Who a command acts as: a person by name and password, or the console (decision B6).

use std::io::{BufRead, IsTerminal};

use chrono::Utc;

use super::folder::Folder;
use crate::acts;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::store;

/// The options of every command that writes.
#[derive(clap::Args)]
pub struct Identity {
    /// Act as this person; the password is asked on the terminal or read from standard input
    #[arg(long = "as", value_name = "NAME")]
    person: Option<String>,
}

impl Identity {
    /// The person named, once the password is right; without a name the console, which cannot sign.
    pub fn actor(&self, opened: &Folder) -> Result<Actor, Failure> {
        let zone = opened.site.as_ref().map_or(chrono_tz::UTC, |site| site.zone);
        let at = Moment::new(Utc::now(), zone);
        let Some(name) = &self.person else { return Ok(Actor::console(at)) };
        let password = password(&format!("Password of {name}: "))?;
        acts::sign_in::identify(&opened.db, &opened.secrets, at, name, &password)
    }
}

/// A data folder has to be set up before anything is written into it by a command.
pub fn set_up(opened: &Folder) -> Result<(), Failure> {
    let has_site = opened.db.read(store::site::get)?.is_some();
    if has_site {
        return Ok(());
    }
    Err(Failure::Held(format!(
        "{} is not set up yet. Start it once with `supernate serve`.",
        opened.path.display()
    )))
}

/// Asked without showing it; from a pipe the first line is taken.
pub fn password(words: &str) -> Result<String, Failure> {
    if std::io::stdin().is_terminal() {
        return Ok(rpassword::prompt_password(words)?);
    }
    let mut line = String::new();
    std::io::stdin().lock().read_line(&mut line)?;
    Ok(line.trim_end_matches(['\r', '\n']).to_string())
}
