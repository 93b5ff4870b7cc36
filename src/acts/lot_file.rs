//! Exporting the lot file, and checking one against its own manifest.

use std::collections::BTreeMap;
use std::fs::File;
use std::io::Read;
use std::path::{Path, PathBuf};

use zip::ZipArchive;

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot_file::{Export, LotFile};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::report::export;
use crate::report::lot_file::{BY_SECTION, BY_TIME, export_text, html, read_me};
use crate::report::zip::{MANIFEST, pack};
use crate::store::door::Db;
use crate::store::{self, Reader};

/// A lot file that was made.
#[derive(Clone, Debug)]
pub struct Made {
    pub name: String,
    pub bytes: Vec<u8>,
    /// SHA-256 of the archive; it stands on the trail.
    pub digest: String,
}

/// Makes the lot file of a lot and writes the archive's digest on the trail.
///
/// The archive is made from one snapshot before the act begins, so that a large lot keeps nobody from writing.
/// `folder` is the data folder, for the attachments. `with_mark` puts the byte-order mark before each CSV.
pub fn make(db: &Db, actor: &Actor, lot: i64, folder: &Path, with_mark: bool) -> Result<Made, Failure> {
    if !actor.is_system() && Act::ExportLotFile.role_for(&actor.roles).is_none() {
        // Refuses and notes the attempt before any work is done.
        db.change(actor, Act::ExportLotFile, &Reason::none(), |_| Ok(()))?;
    }
    let (file, export) = db.read(|reader| {
        let file = store::lot_file::load(reader, lot)?;
        let export = export(reader, actor, &file)?;
        Ok((file, export))
    })?;
    let bytes = pack(&files(&file, &export, folder, with_mark)?)?;
    let digest = sha256_hex(&bytes);
    db.change(actor, Act::ExportLotFile, &Reason::none(), |change| {
        change.concerns(Kind::Lot, lot)?;
        change.tell(format!("{}, sha256 {digest}", file.number));
        Ok(())
    })?;
    Ok(Made { name: name(&file.number), bytes, digest })
}

fn export(reader: &Reader<'_>, actor: &Actor, file: &LotFile) -> Result<Export, Failure> {
    let head = store::trail::head(reader)?;
    Ok(Export {
        at: actor.at.exported(),
        by: actor.full_name.clone(),
        program: format!(
            "Supernate {}, SQLite {}",
            env!("CARGO_PKG_VERSION"),
            store::door::library_version()
        ),
        head: head.map(|(act, seal)| format!("{act} {seal}")).unwrap_or_default(),
        systems: store::lot_file::system::facts(reader, file.zone)?,
    })
}

/// The name under which the file of a lot is fetched.
pub fn name(number: &str) -> String {
    let plain: String = number
        .chars()
        .map(|c| if c.is_ascii_alphanumeric() || "-_.".contains(c) { c } else { '_' })
        .collect();
    format!("lot-file-{plain}.zip")
}

/// The files of the archive in their order.
pub fn files(
    file: &LotFile,
    made: &Export,
    folder: &Path,
    with_mark: bool,
) -> Result<Vec<(String, Vec<u8>)>, Failure> {
    let mut files = vec![
        ("READ-ME.txt".to_string(), read_me(file)),
        ("EXPORT.txt".to_string(), export_text(made)),
        (BY_SECTION.to_string(), html(file, made, false).map_err(Failure::fault)?),
        (BY_TIME.to_string(), html(file, made, true).map_err(Failure::fault)?),
        ("lot.json".to_string(), export::json(file)),
    ];
    for table in &file.tables {
        files.push((format!("csv/{}.csv", table.name), export::csv(table, with_mark)));
    }
    files.extend(attachments(file, folder)?);
    Ok(files)
}

/// Each attached file once, under its digest.
fn attachments(file: &LotFile, folder: &Path) -> Result<BTreeMap<String, Vec<u8>>, Failure> {
    let mut found = BTreeMap::new();
    let Some(table) = file.table("attachments") else { return Ok(found) };
    for row in &table.rows {
        let digest = table.text(row, "sha256");
        let ending = match table.text(row, "media_type").as_str() {
            "image/png" => "png",
            "image/jpeg" => "jpg",
            _ => "pdf",
        };
        let bytes = std::fs::read(folder.join("files").join(&digest)).ok();
        let Some(bytes) = bytes.filter(|bytes| sha256_hex(bytes) == digest) else {
            let name = table.text(row, "file_name");
            return Err(Failure::Held(format!(
                "The attached file “{name}” is missing or is not the one that was attached. Verify the data folder."
            )));
        };
        found.insert(format!("attachments/{digest}.{ending}"), bytes);
    }
    Ok(found)
}

/// Keeps a made lot file so that it can be fetched again under its digest.
pub fn hold(folder: &Path, made: &Made) -> Result<(), Failure> {
    std::fs::create_dir_all(folder.join(HELD))?;
    Ok(std::fs::write(held_path(folder, &made.digest), &made.bytes)?)
}

/// A kept lot file, if it still is what its digest says.
pub fn held(folder: &Path, digest: &str) -> Option<Vec<u8>> {
    let is_digest = digest.len() == 64 && digest.bytes().all(|byte| byte.is_ascii_hexdigit());
    let bytes = if is_digest { std::fs::read(held_path(folder, digest)).ok()? } else { return None };
    Some(bytes).filter(|bytes| sha256_hex(bytes) == digest)
}

const HELD: &str = "lot-files";

fn held_path(folder: &Path, digest: &str) -> PathBuf {
    folder.join(HELD).join(digest)
}

/// What was found in an archive.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Checked {
    pub files: usize,
    /// SHA-256 of the archive itself.
    pub digest: String,
    /// Each with the file it is about.
    pub findings: Vec<String>,
}

/// A file inside an archive is read to at most this many bytes, whatever it says of itself.
const MOST_BYTES: u64 = 512 * 1024 * 1024;

/// Checks a lot file against its own manifest and, where one is given, its digest against the expected one.
pub fn check(path: &Path, expected: Option<&str>) -> Result<Checked, Failure> {
    let bytes = std::fs::read(path)
        .map_err(|error| Failure::Held(format!("{} cannot be read: {error}.", path.display())))?;
    let mut checked = Checked { digest: sha256_hex(&bytes), ..Checked::default() };
    if expected.is_some_and(|expected| expected != checked.digest) {
        checked.findings.push("the archive: its digest is not the expected one".to_string());
    }
    drop(bytes);
    let Ok(mut archive) = ZipArchive::new(File::open(path)?) else {
        checked.findings.push("the archive: it is damaged and cannot be opened".to_string());
        return Ok(checked);
    };
    let mut found: BTreeMap<String, Option<String>> = BTreeMap::new();
    let mut manifest = None;
    for at in 0..archive.len() {
        let (name, bytes) = entry(&mut archive, at);
        if found.contains_key(&name) {
            checked.findings.push(format!("{name}: it is in the archive twice"));
        }
        if name == MANIFEST {
            manifest = bytes;
        } else {
            found.insert(name, bytes.map(|bytes| sha256_hex(&bytes)));
        }
    }
    checked.files = found.len();
    match manifest.and_then(|bytes| String::from_utf8(bytes).ok()) {
        Some(manifest) => compare(&manifest, found, &mut checked.findings),
        None => checked.findings.push(format!("{MANIFEST}: it is missing or damaged")),
    }
    Ok(checked)
}

/// The name and the bytes of an entry; no bytes where it cannot be read to its end.
fn entry(archive: &mut ZipArchive<File>, at: usize) -> (String, Option<Vec<u8>>) {
    let known = archive.name_for_index(at).map(|name| name.map(|name| name.into_owned()));
    let name = known.and_then(Result::ok).unwrap_or_else(|| format!("file {}", at + 1));
    let Ok(entry) = archive.by_index(at) else { return (name, None) };
    let mut bytes = Vec::new();
    let is_read = entry.take(MOST_BYTES).read_to_end(&mut bytes).is_ok_and(|read| (read as u64) < MOST_BYTES);
    (name, Some(bytes).filter(|_| is_read))
}

fn compare(manifest: &str, mut found: BTreeMap<String, Option<String>>, findings: &mut Vec<String>) {
    for line in manifest.lines() {
        let Some((digest, name)) = line.split_once("  ") else {
            findings.push(format!("{MANIFEST}: the line “{line}” cannot be read"));
            continue;
        };
        match found.remove(name) {
            None => findings.push(format!("{name}: it is missing")),
            Some(None) => findings.push(format!("{name}: it is damaged")),
            Some(Some(now)) if now != digest => findings.push(format!("{name}: it was changed")),
            Some(Some(_)) => {}
        }
    }
    findings.extend(found.keys().map(|name| format!("{name}: the manifest does not know it")));
}
