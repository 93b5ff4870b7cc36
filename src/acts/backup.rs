//! Backups: the database as one snapshot with its attachments, verified before they count; and the way back.

use std::fs::File;
use std::io::Write;
use std::path::{Path, PathBuf};

use zip::write::SimpleFileOptions;
use zip::{CompressionMethod, ZipArchive, ZipWriter};

use crate::domain::failure::Failure;
use crate::store::verify::{Copy, Progress, Report};

/// The database inside a data folder or a backup.
pub const DATABASE: &str = "supernate.sqlite";
/// The folder of attachments beside it.
pub const FILES: &str = "files";

/// Backs up a data folder, also while it is served, into a new folder or, where the name ends in `.zip`, one file.
///
/// The copy is verified; a copy that does not hold is left with the ending `.unfinished` and is no backup.
pub fn back_up(data: &Path, to: &Path, progress: Progress<'_>) -> Result<Report, Failure> {
    refuse_used(to)?;
    let unfinished = PathBuf::from(format!("{}.unfinished", to.display()));
    if unfinished.exists() {
        std::fs::remove_dir_all(&unfinished)?;
    }
    copy(&Copy::open_live(&data.join(DATABASE))?, data, &unfinished)?;
    let report = super::verify::folder(&unfinished.join(DATABASE), &unfinished.join(FILES), None, progress)?;
    if !report.holds() {
        return Ok(report);
    }
    if is_zip(to) {
        pack(&unfinished, to)?;
        std::fs::remove_dir_all(&unfinished)?;
    } else {
        let _ = std::fs::remove_dir(to);
        std::fs::rename(&unfinished, to)?;
    }
    sync_parent(to)?;
    Ok(report)
}

/// Restores a backup (or a copied data folder) into a new or empty folder, and verifies what is there then.
pub fn restore(from: &Path, data: &Path, progress: Progress<'_>) -> Result<Report, Failure> {
    refuse_used(data)?;
    if is_zip(from) {
        unpack(from, data)?;
    } else {
        copy(&Copy::open(&from.join(DATABASE))?, from, data)?;
    }
    sync_parent(data)?;
    super::verify::folder(&data.join(DATABASE), &data.join(FILES), None, progress)
}

fn is_zip(path: &Path) -> bool {
    path.extension().is_some_and(|ending| ending.eq_ignore_ascii_case("zip"))
}

fn refuse_used(to: &Path) -> Result<(), Failure> {
    let is_empty = match std::fs::read_dir(to) {
        Ok(mut entries) => entries.next().is_none(),
        Err(_) => !to.exists(),
    };
    if is_empty {
        return Ok(());
    }
    Err(Failure::Held(format!(
        "{} holds something already. Name a new or an empty place; nothing is ever overwritten.",
        to.display()
    )))
}

/// The database first: every attachment it names was on disk before it was named.
fn copy(database: &Copy, from: &Path, to: &Path) -> Result<(), Failure> {
    std::fs::create_dir_all(to.join(FILES))?;
    database.copy_to(&to.join(DATABASE))?;
    for entry in files_of(&from.join(FILES))? {
        let Some(name) = entry.file_name() else { continue };
        let target = to.join(FILES).join(name);
        std::fs::copy(&entry, &target)?;
        File::open(&target)?.sync_all()?;
    }
    Ok(())
}

/// The files of a folder in the order of their names; none where there is no folder.
fn files_of(folder: &Path) -> Result<Vec<PathBuf>, Failure> {
    let Ok(entries) = std::fs::read_dir(folder) else { return Ok(Vec::new()) };
    let mut files: Vec<PathBuf> = entries
        .filter_map(|entry| entry.ok().map(|entry| entry.path()))
        .filter(|path| path.is_file())
        .collect();
    files.sort();
    Ok(files)
}

fn sync_parent(path: &Path) -> Result<(), Failure> {
    let parent = path.parent().filter(|parent| !parent.as_os_str().is_empty()).unwrap_or(Path::new("."));
    Ok(File::open(parent)?.sync_all()?)
}

fn pack(folder: &Path, to: &Path) -> Result<(), Failure> {
    let unfinished = to.with_extension("zip.unfinished-file");
    let mut archive = ZipWriter::new(File::create(&unfinished)?);
    let options =
        SimpleFileOptions::default().compression_method(CompressionMethod::Deflated).large_file(true);
    let mut add = |name: &str, path: &Path| -> Result<(), Failure> {
        archive.start_file(name, options).map_err(Failure::fault)?;
        std::io::copy(&mut File::open(path)?, &mut archive)?;
        Ok(())
    };
    add(DATABASE, &folder.join(DATABASE))?;
    for file in files_of(&folder.join(FILES))? {
        let name = file.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default();
        add(&format!("{FILES}/{name}"), &file)?;
    }
    let mut file = archive.finish().map_err(Failure::fault)?;
    file.flush()?;
    file.sync_all()?;
    Ok(std::fs::rename(unfinished, to)?)
}

/// Only the names a backup has are unpacked; an attachment has to be named by a digest.
fn unpack(from: &Path, to: &Path) -> Result<(), Failure> {
    let file = File::open(from).map_err(|error| held(from, &error.to_string()))?;
    let mut archive = ZipArchive::new(file).map_err(|error| held(from, &error.to_string()))?;
    std::fs::create_dir_all(to.join(FILES))?;
    for at in 0..archive.len() {
        let mut entry = archive.by_index(at).map_err(|error| held(from, &error.to_string()))?;
        let name = entry.name().map_err(|error| held(from, &error.to_string()))?.into_owned();
        let target = match name.strip_prefix("files/") {
            Some(digest) if digest.len() == 64 && digest.chars().all(|c| c.is_ascii_hexdigit()) => {
                to.join(FILES).join(digest)
            }
            None if name == DATABASE => to.join(DATABASE),
            _ => return Err(held(from, &format!("it holds “{name}”, which no backup has"))),
        };
        let mut unpacked = File::create(&target)?;
        std::io::copy(&mut entry, &mut unpacked).map_err(|error| held(from, &error.to_string()))?;
        unpacked.sync_all()?;
    }
    Ok(())
}

fn held(from: &Path, why: &str) -> Failure {
    Failure::Held(format!("{} cannot be restored: {why}.", from.display()))
}
