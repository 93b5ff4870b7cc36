//! Importing a file of results measured elsewhere: all of it or nothing.

use std::path::{Path, PathBuf};

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::import::plan::{Plan, plan};
use crate::domain::import::read::read;
use crate::domain::import::{CellFault, Counts, ImportRefusal};
use crate::domain::moment::{Moment, date_shown};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::Reader;
use crate::store::door::Db;

/// What a file would bring, without writing anything.
pub fn preview(bytes: &[u8]) -> Result<Plan, Vec<CellFault>> {
    read(bytes).map(|rows| plan(&rows))
}

/// Imports a file. Answers with the import's number and what it brought.
///
/// Refuses in this order: the same file again, cells that cannot be read (all of them named).
pub fn import(db: &Db, actor: &Actor, file_name: &str, bytes: &[u8]) -> Result<(i64, Counts), Failure> {
    let digest = sha256_hex(bytes);
    db.change(actor, Act::ImportResults, &Reason::none(), |change| {
        may_import(change, actor.at, &digest)?;
        let plan = preview(bytes).map_err(ImportRefusal::CellsUnreadable)?;
        let name = label(file_name);
        let written = store::import::insert(change, &name, &digest, &plan)?;
        change.concerns(Kind::Import, written.import)?;
        for product in written.products {
            change.concerns(Kind::Product, product)?;
        }
        for (lot, study) in written.lots {
            change.concerns(Kind::Lot, lot)?;
            change.concerns(Kind::Study, study)?;
        }
        change.tell(format!("{name}, {}", plan.counts.words()));
        Ok((written.import, plan.counts))
    })
}

/// The same file is never imported twice.
pub fn may_import(reader: &Reader<'_>, at: Moment, digest: &str) -> Result<(), Failure> {
    let Some((id, stored)) = store::import::before(reader, digest)? else { return Ok(()) };
    let on = Moment::from_stored(&stored, at.zone).map(|moment| date_shown(moment.date())).unwrap_or(stored);
    Err(ImportRefusal::ImportedBefore(on, id).into())
}

/// The file's name as a label: its last part, without control characters, at most 120 characters.
fn label(file_name: &str) -> String {
    let last = file_name.rsplit(['/', '\\']).next().unwrap_or_default();
    let name: String = last.chars().filter(|c| !c.is_control()).take(120).collect();
    if name.is_empty() { "file without a name".to_string() } else { name }
}

/// Keeps an uploaded file between its preview and its import, under its digest.
pub fn hold(folder: &Path, bytes: &[u8]) -> Result<String, Failure> {
    let digest = sha256_hex(bytes);
    std::fs::create_dir_all(folder.join(HELD))?;
    std::fs::write(held_path(folder, &digest), bytes)?;
    Ok(digest)
}

/// The held file, if it still is what its digest says.
pub fn held(folder: &Path, digest: &str) -> Option<Vec<u8>> {
    let is_digest = digest.len() == 64 && digest.bytes().all(|byte| byte.is_ascii_hexdigit());
    let bytes = std::fs::read(held_path(folder, digest).as_path()).ok().filter(|_| is_digest)?;
    Some(bytes).filter(|bytes| sha256_hex(bytes) == digest)
}

/// Forgets a held file.
pub fn let_go(folder: &Path, digest: &str) {
    if held(folder, digest).is_some() {
        // A file that stays behind is only room; the next import of it finds it refused.
        let _ = std::fs::remove_file(held_path(folder, digest));
    }
}

const HELD: &str = "held-imports";

fn held_path(folder: &Path, digest: &str) -> PathBuf {
    folder.join(HELD).join(digest)
}
