//! A data folder: the database, the attachments, the server's key, and a lock so that only one program serves it.

use std::fs::{File, OpenOptions};
use std::io::Write;
use std::path::{Path, PathBuf};

use chrono::Utc;
use fs4::fs_std::FileExt;

use crate::acts::secret::{HashCost, Secrets, random};
use crate::domain::actor::Actor;
use crate::domain::digest::{from_hex, hex};
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::store;
use crate::store::door::{Db, Durability};
use crate::store::site::Site;

/// An open data folder; the lock is held until it is dropped.
pub struct Folder {
    pub path: PathBuf,
    pub db: Db,
    pub secrets: Secrets,
    /// `None` until the site is set up.
    pub site: Option<Site>,
    pub(in crate::cli) _lock: File,
}

/// The database file inside a data folder.
pub fn database_of(folder: &Path) -> PathBuf {
    folder.join("supernate.sqlite")
}

/// Opens a data folder, or makes it where there is none.
///
/// Refuses when another program has it open, and when the clock stands before the newest entry (decision B9).
pub fn open(path: &Path, durability: Durability) -> Result<Folder, Failure> {
    std::fs::create_dir_all(path.join("files"))?;
    let lock = lock(path)?;
    let now = Moment::new(Utc::now(), chrono_tz::UTC);
    let db = Db::open(&database_of(path), &Actor::console(now), durability)?;
    let (site, newest) =
        db.read(|reader| Ok((store::site::get(reader)?, store::trail::newest_at(reader)?)))?;
    if newest.is_some_and(|newest| newest > now.plus_minutes(2).stored()) {
        return Err(Failure::Held(
            "The computer's clock stands before the newest entry of the history. Set the clock, then start again."
                .to_string(),
        ));
    }
    let is_demo = site.as_ref().is_some_and(|site| site.is_demo);
    let cost = if is_demo { HashCost::Demo } else { HashCost::Real };
    let secrets = Secrets { cost, key: server_key(path)? };
    Ok(Folder { path: path.to_path_buf(), db, secrets, site, _lock: lock })
}

/// Refuses a folder that holds no data, so that a mistyped name does not make a new one.
pub fn must_exist(path: &Path) -> Result<(), Failure> {
    if database_of(path).is_file() {
        return Ok(());
    }
    Err(Failure::Held(format!("{} is no data folder. Name one with --data.", path.display())))
}

fn lock(path: &Path) -> Result<File, Failure> {
    let file = OpenOptions::new().create(true).truncate(false).write(true).open(path.join("lock"))?;
    match FileExt::try_lock_exclusive(&file) {
        Ok(true) => Ok(file),
        _ => Err(Failure::Held(format!(
            "Another program has the data folder {} open. Stop it first.",
            path.display()
        ))),
    }
}

/// Keeps others from opening a folder while it is read as a copy; refuses one that is in use.
///
/// A copy or a backup without a lock file is left as it is.
pub fn lock_if_there(path: &Path) -> Result<Option<File>, Failure> {
    let Ok(file) = File::open(path.join("lock")) else { return Ok(None) };
    match FileExt::try_lock_exclusive(&file) {
        Ok(true) => Ok(Some(file)),
        _ => Err(Failure::Held(format!(
            "A program has {} open. Copy the folder and verify the copy, or verify a backup.",
            path.display()
        ))),
    }
}

/// The server's own key: made once, readable by its owner alone, not part of a backup.
fn server_key(path: &Path) -> Result<[u8; 32], Failure> {
    let file = path.join("server.key");
    if !file.exists() {
        let mut options = OpenOptions::new();
        options.create_new(true).write(true);
        #[cfg(unix)]
        std::os::unix::fs::OpenOptionsExt::mode(&mut options, 0o600);
        let mut made = options.open(&file)?;
        made.write_all(hex(&random::<32>()?).as_bytes())?;
        made.sync_all()?;
    }
    let text = std::fs::read_to_string(&file)?;
    from_hex(text.trim())
        .and_then(|bytes| bytes.try_into().ok())
        .ok_or_else(|| Failure::Held(format!("{} does not hold a key of 32 bytes.", file.display())))
}
