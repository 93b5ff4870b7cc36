//! The lot file as a document: the same facts by section and by time, on a page and as a file of its own.

mod section;
mod words;

use askama::Template;

use super::chart::Drawn;
use super::cylinder::Strip;
use crate::domain::lot_file::{Export, LotFile};

/// A document of sections, embedded in a page or in an exported file.
#[derive(Clone, Debug, Template)]
#[template(path = "lot_file/document.html")]
pub struct Document {
    pub sections: Vec<Section>,
}

impl askama::filters::HtmlSafe for Document {}

/// A part of the document with its heading.
#[derive(Clone, Debug, Default)]
pub struct Section {
    pub anchor: String,
    pub title: String,
    /// A section of its own, or a part of the one above.
    pub is_part: bool,
    pub lead: String,
    pub facts: Vec<(String, String)>,
    pub charts: Vec<Drawn>,
    /// The cylinders of each arm over its ages.
    pub strips: Vec<(String, Strip)>,
    pub grids: Vec<Grid>,
}

/// A table of the document.
#[derive(Clone, Debug, Default)]
pub struct Grid {
    pub caption: String,
    pub heads: Vec<(String, bool)>,
    pub rows: Vec<Line>,
}

/// One line: where it can be linked to, its cells, and the entry it came by.
#[derive(Clone, Debug, Default)]
pub struct Line {
    pub anchor: String,
    pub cells: Vec<(String, bool)>,
    pub entry: Option<Entry>,
}

/// The entry of the trail a line came by.
#[derive(Clone, Debug, Default)]
pub struct Entry {
    pub act: String,
    pub address: String,
    /// The first eight digits of its seal.
    pub seal: String,
}

/// Where entries are found: on the pages, or in the file beside this one.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Place {
    Page,
    File,
}

/// Everything about the lot, section by section, in the order of its life.
pub fn by_section(file: &LotFile, place: Place) -> Document {
    section::by_section(file, place)
}

/// One line per event, oldest first; filtered by person and day where they are given.
pub fn by_time(file: &LotFile, place: Place, person: Option<&str>, day: Option<&str>) -> Document {
    section::by_time(file, place, person, day)
}

/// The name of the file in each order.
pub const BY_SECTION: &str = "lot-file.html";
pub const BY_TIME: &str = "by-time.html";

#[derive(Template)]
#[template(path = "lot_file/file.html")]
struct FilePage<'a> {
    file: &'a LotFile,
    title: String,
    other: (&'static str, &'static str),
    export: &'a Export,
    document: Document,
}

/// The document in one order as a file of its own, with the style sheet inside.
pub fn html(file: &LotFile, export: &Export, is_by_time: bool) -> Result<Vec<u8>, askama::Error> {
    let document =
        if is_by_time { by_time(file, Place::File, None, None) } else { by_section(file, Place::File) };
    let other = if is_by_time { (BY_SECTION, "By section") } else { (BY_TIME, "By time") };
    let title = format!("Lot file {}", file.number);
    Ok(FilePage { file, title, other, export, document }.render()?.into_bytes())
}

/// How to check the archive without this program.
pub fn read_me(file: &LotFile) -> Vec<u8> {
    format!(
        "Lot file of lot {}\r\n\
         \r\n\
         lot-file.html   everything about the lot, by section; opens in any browser, prints with page numbers\r\n\
         by-time.html    the entries of the audit trail of this lot, one line each, oldest first\r\n\
         csv/            the same records as tables, for spreadsheets\r\n\
         lot.json        the same records with the exact text of every value\r\n\
         attachments/    the attached files, named by their SHA-256\r\n\
         EXPORT.txt      when, by whom and with which program this file was made, and the head of the trail then\r\n\
         MANIFEST.sha256 the SHA-256 of every file but itself\r\n\
         \r\n\
         To check that nothing was changed, without the program that made it:\r\n\
         1. Unpack the archive and run in its folder: sha256sum --check MANIFEST.sha256\r\n\
         \x20  (macOS: shasum -a 256 -c MANIFEST.sha256; Windows: certutil -hashfile FILE SHA256, line by line)\r\n\
         2. Run sha256sum on the archive itself and compare with the digest that the audit trail of the site shows\r\n\
         \x20  for this export, or with the one noted on paper. Only this shows that the manifest is the first one.\r\n\
         \r\n\
         In the CSV files a text that a spreadsheet could take for a formula has one ' before it. lot.json has it\r\n\
         without. Every field is quoted, lines end with CR LF, the decimal mark is a point, instants are UTC.\r\n\
         Seals are SHA-256 over the entry and the seal before it; the whole chain is in the site's database.\r\n",
        file.number
    )
    .into_bytes()
}

/// The one part that differs between two exports of the same records, besides the lines of it in the HTML files.
pub fn export_text(export: &Export) -> Vec<u8> {
    let mut text = format!(
        "exported at {}\r\nexported by {}\r\nprogram {}\r\nhead of the trail {}\r\n",
        export.at, export.by, export.program, export.head
    );
    for (name, words) in &export.systems {
        text.push_str(&format!("{}: {words}\r\n", name.to_lowercase()));
    }
    text.into_bytes()
}
