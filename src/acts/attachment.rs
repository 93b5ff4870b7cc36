//! Attaching files, and measuring photos.

use std::io::{Cursor, Write};
use std::path::{Path, PathBuf};

use image::{ImageFormat, ImageReader, Limits};

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::attachment::{
    AttachmentRefusal, MOST_FILES, MOST_PIXELS, MediaType, plain_name, recognise,
};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::photo::{Marks, ratio};
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::attachment::NewAttachment;
use crate::store::door::{Change, Db};

/// A file that came with a form.
#[derive(Clone, Debug)]
pub struct NewFile<'a> {
    pub subject: Subject,
    pub file_name: &'a str,
    pub bytes: &'a [u8],
    /// What it shows.
    pub about: String,
}

/// Attaches a file: its bytes are synced to the data folder before the act is committed.
///
/// Refuses in the order of [`recognise`], then too many pixels, a damaged photo, too many files.
pub fn attach(db: &Db, folder: &Path, actor: &Actor, new: &NewFile<'_>) -> Result<i64, Failure> {
    db.change(actor, Act::AttachFile, &Reason::none(), |change| {
        let (id, row) = attach_inside(change, folder, new)?;
        concerns(change, new.subject)?;
        change.tell(format!("{}: {}, sha256 {}", row.file_name, row.about, &row.sha256[..12]));
        Ok(id)
    })
}

/// The same inside another act; the caller says which records it concerns.
pub(in crate::acts) fn attach_inside(
    change: &Change<'_>,
    folder: &Path,
    new: &NewFile<'_>,
) -> Result<(i64, NewAttachment), Failure> {
    let media_type = recognise(new.file_name, new.bytes)?;
    check_pixels(media_type, new.bytes)?;
    if store::attachment::of_subject(change, new.subject)?.len() >= MOST_FILES {
        return Err(AttachmentRefusal::TooManyFiles.into());
    }
    let sha256 = sha256_hex(new.bytes);
    keep(folder, &sha256, new.bytes)?;
    let row = NewAttachment {
        subject: new.subject,
        file_name: plain_name(new.file_name),
        media_type: media_type.code(),
        size_bytes: new.bytes.len() as i64,
        sha256,
        about: new.about.clone(),
    };
    Ok((store::attachment::insert(change, &row)?, row))
}

/// The act stands in the history of the record, and of a sample's lot.
fn concerns(change: &Change<'_>, subject: Subject) -> Result<(), Failure> {
    match subject.kind {
        Kind::Sample => super::reading::concerns(change, &store::bench::sample(change, subject.id)?),
        kind => change.concerns(kind, subject.id),
    }
}

fn check_pixels(media_type: MediaType, bytes: &[u8]) -> Result<(), AttachmentRefusal> {
    let Some(format) = format_of(media_type) else { return Ok(()) };
    let reader = ImageReader::with_format(Cursor::new(bytes), format);
    let (width, height) = reader.into_dimensions().map_err(|_| AttachmentRefusal::PhotoDamaged)?;
    let pixels = u64::from(width) * u64::from(height);
    if pixels > MOST_PIXELS {
        return Err(AttachmentRefusal::PhotoTooLarge(pixels / 1_000_000));
    }
    Ok(())
}

fn format_of(media_type: MediaType) -> Option<ImageFormat> {
    match media_type {
        MediaType::Png => Some(ImageFormat::Png),
        MediaType::Jpeg => Some(ImageFormat::Jpeg),
        MediaType::Pdf => None,
    }
}

/// Where the bytes of a file lie.
pub fn path_of(folder: &Path, sha256: &str) -> PathBuf {
    folder.join("files").join(sha256)
}

/// Writes, syncs, renames, and syncs the folder: after a power cut the file is whole or not there.
fn keep(folder: &Path, sha256: &str, bytes: &[u8]) -> Result<(), Failure> {
    let path = path_of(folder, sha256);
    if path.exists() {
        return Ok(());
    }
    let part = path.with_extension("part");
    let mut file = std::fs::File::create(&part)?;
    file.write_all(bytes)?;
    file.sync_all()?;
    std::fs::rename(&part, &path)?;
    std::fs::File::open(folder.join("files"))?.sync_all()?;
    Ok(())
}

/// The bytes of an attachment, refused when they are no longer those that were attached.
pub fn bytes(folder: &Path, sha256: &str) -> Result<Vec<u8>, Failure> {
    let bytes = std::fs::read(path_of(folder, sha256))?;
    if sha256_hex(&bytes) != sha256 {
        return Err(Failure::Held(
            "The file in the data folder is not the one that was attached. Tell the administrator."
                .to_string(),
        ));
    }
    Ok(bytes)
}

/// The longest side of a preview, in pixels.
const PREVIEW_SIDE: u32 = 1400;
/// The most memory decoding may take: four bytes a pixel of the largest photo, and room to work.
const DECODE_BYTES: u64 = 200 * 1024 * 1024;

/// A photo drawn anew as JPEG, so that nothing but pixels is left of it (sec_S82).
pub fn preview(media_type: &str, bytes: &[u8]) -> Result<Vec<u8>, Failure> {
    let format = MediaType::from_code(media_type).and_then(format_of).ok_or(AttachmentRefusal::NotAPhoto)?;
    check_pixels(MediaType::from_code(media_type).unwrap_or(MediaType::Png), bytes)?;
    let mut reader = ImageReader::with_format(Cursor::new(bytes), format);
    let mut limits = Limits::default();
    limits.max_alloc = Some(DECODE_BYTES);
    reader.limits(limits);
    let decoded = reader.decode().map_err(|_| AttachmentRefusal::PhotoDamaged)?;
    let small = match decoded.width().max(decoded.height()) > PREVIEW_SIDE {
        true => decoded.thumbnail(PREVIEW_SIDE, PREVIEW_SIDE),
        false => decoded,
    };
    let mut out = Cursor::new(Vec::new());
    small.to_rgb8().write_to(&mut out, ImageFormat::Jpeg).map_err(Failure::fault)?;
    Ok(out.into_inner())
}

/// Records three marks on a photo with the ratio they give. Each person's measurement is a row of its own.
pub fn measure(db: &Db, actor: &Actor, attachment: i64, marks: &Marks) -> Result<(), Failure> {
    db.change(actor, Act::MarkPhoto, &Reason::none(), |change| {
        let found = store::attachment::get(change, attachment)?;
        if !MediaType::from_code(&found.media_type).is_some_and(MediaType::is_photo) {
            return Err(AttachmentRefusal::NotAPhoto.into());
        }
        let ratio = ratio(*marks)?;
        store::attachment::insert_marks(change, attachment, marks, ratio)?;
        if let Some(subject) = found.of() {
            concerns(change, subject)?;
        }
        // The ratio is not told here: the next person measures blind.
        change.tell(found.file_name.clone());
        Ok(())
    })
}
