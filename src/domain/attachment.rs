//! Photos and files: what may be attached, recognised by its content.

use super::refusal::NamedReason;

/// What a file is, by its first bytes and its name (sec_S80).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum MediaType {
    Png,
    Jpeg,
    Pdf,
}

impl MediaType {
    /// As stored in `attachment.media_type`, and as served.
    pub fn code(self) -> &'static str {
        match self {
            MediaType::Png => "image/png",
            MediaType::Jpeg => "image/jpeg",
            MediaType::Pdf => "application/pdf",
        }
    }

    pub fn from_code(code: &str) -> Option<MediaType> {
        [MediaType::Png, MediaType::Jpeg, MediaType::Pdf].into_iter().find(|one| one.code() == code)
    }

    pub fn is_photo(self) -> bool {
        self != MediaType::Pdf
    }

    fn endings(self) -> &'static [&'static str] {
        match self {
            MediaType::Png => &["png"],
            MediaType::Jpeg => &["jpg", "jpeg"],
            MediaType::Pdf => &["pdf"],
        }
    }
}

/// The largest file, in bytes (sec_S81).
pub const MOST_BYTES: usize = 10 * 1024 * 1024;
/// Files of one record (sec_S81).
pub const MOST_FILES: usize = 20;
/// The largest photo, in pixels, asked of its header before it is decoded (sec_S82).
pub const MOST_PIXELS: u64 = 40_000_000;

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum AttachmentRefusal {
    #[error("The file is empty. Choose a file with content.")]
    FileEmpty,
    #[error("The file has {0} bytes; at most 10 MiB fit. Send a smaller one.")]
    FileTooLarge(usize),
    #[error("“{0}” is not a PNG or JPEG photo or a PDF by its content. Send one of these.")]
    FileNotKnown(String),
    #[error("“{name}” is {is} by its content and another thing by its name. Give it the right ending.")]
    NameAndContentDiffer { name: String, is: &'static str },
    #[error("The photo has {0} million pixels; at most 40 million fit. Send it smaller.")]
    PhotoTooLarge(u64),
    #[error("The photo cannot be read: its content is damaged. Take or save it again.")]
    PhotoDamaged,
    #[error("The record has {MOST_FILES} files already. No more fit; put the rest in one PDF.")]
    TooManyFiles,
    #[error("This needs a photo, PNG or JPEG. Choose a photo.")]
    NotAPhoto,
}

impl NamedReason for AttachmentRefusal {
    fn field(&self) -> Option<String> {
        match self {
            AttachmentRefusal::TooManyFiles => None,
            _ => Some("file".to_string()),
        }
    }
}

/// Recognises a file. Refuses in this order: empty, size, content, name.
pub fn recognise(name: &str, bytes: &[u8]) -> Result<MediaType, AttachmentRefusal> {
    if bytes.is_empty() {
        return Err(AttachmentRefusal::FileEmpty);
    }
    if bytes.len() > MOST_BYTES {
        return Err(AttachmentRefusal::FileTooLarge(bytes.len()));
    }
    let Some(found) = by_content(bytes) else {
        return Err(AttachmentRefusal::FileNotKnown(name.to_string()));
    };
    let ending = name.rsplit_once('.').map(|(_, ending)| ending.to_lowercase()).unwrap_or_default();
    if !found.endings().contains(&ending.as_str()) {
        return Err(AttachmentRefusal::NameAndContentDiffer { name: name.to_string(), is: found.code() });
    }
    Ok(found)
}

fn by_content(bytes: &[u8]) -> Option<MediaType> {
    if bytes.starts_with(b"\x89PNG\r\n\x1a\n") && bytes.get(12..16) == Some(b"IHDR") {
        return Some(MediaType::Png);
    }
    if bytes.starts_with(b"\xff\xd8\xff") {
        return Some(MediaType::Jpeg);
    }
    let tail = &bytes[bytes.len().saturating_sub(1024)..];
    let ends = tail.windows(5).any(|window| window == b"%%EOF");
    (bytes.starts_with(b"%PDF-") && ends).then_some(MediaType::Pdf)
}

/// A name for the record: its last part, without signs that steer a terminal or a page.
pub fn plain_name(name: &str) -> String {
    let last = name.rsplit(['/', '\\']).next().unwrap_or_default();
    last.chars().filter(|c| !c.is_control() && !('\u{202a}'..='\u{202e}').contains(c)).take(120).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    const PNG: &[u8] = b"\x89PNG\r\n\x1a\n\x00\x00\x00\x0dIHDR";

    /// sec_S80: by content and by name, in a fixed order.
    #[test]
    fn files_are_known_by_content_and_by_name() {
        let table: [(&str, &[u8], &str); 14] = [
            ("bed.png", PNG, "Png"),
            ("bed.PNG", PNG, "Png"),
            ("bed.jpg", b"\xff\xd8\xff\xe0", "Jpeg"),
            ("bed.jpeg", b"\xff\xd8\xff\xe1", "Jpeg"),
            ("sheet.pdf", b"%PDF-1.7 ... %%EOF", "Pdf"),
            ("sheet.pdf", b"%PDF-1.7 never ends", "FileNotKnown"),
            ("bed.svg", b"<svg onload=alert(1)>", "FileNotKnown"),
            ("bed.png", b"<svg onload=alert(1)>", "FileNotKnown"),
            ("bed.html", PNG, "NameAndContentDiffer"),
            ("bed.png.html", PNG, "NameAndContentDiffer"),
            ("bed", PNG, "NameAndContentDiffer"),
            ("macro.docm", b"PK\x03\x04", "FileNotKnown"),
            ("old.png", b"GIF89a", "FileNotKnown"),
            ("none.png", b"", "FileEmpty"),
        ];
        for (name, bytes, expected) in table {
            let said = match recognise(name, bytes) {
                Ok(found) => format!("{found:?}"),
                Err(refusal) => format!("{refusal:?}"),
            };
            assert!(said.starts_with(expected), "{name}: {said}");
        }
        let large = vec![0; MOST_BYTES + 1];
        assert_eq!(recognise("x.png", &large), Err(AttachmentRefusal::FileTooLarge(MOST_BYTES + 1)));
    }

    #[test]
    fn a_name_stays_a_name() {
        assert_eq!(plain_name("../../etc/bed.png"), "bed.png");
        assert_eq!(plain_name("C:\\photos\\bed.png"), "bed.png");
        assert_eq!(plain_name("a\r\n\u{202e}gnp.exe"), "agnp.exe");
    }
}
