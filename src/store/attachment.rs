//! Attachments and what was measured on photos. The bytes lie in the data folder, named by their SHA-256.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Exact, Reader, new_uuid};
use crate::domain::photo::Marks;
use crate::domain::subject::{Kind, Subject};

/// An attachment as stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Attachment {
    pub id: i64,
    pub kind: String,
    pub subject: i64,
    pub file_name: String,
    pub media_type: String,
    pub size_bytes: i64,
    pub sha256: String,
    pub about: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

impl Attachment {
    /// The record it is attached to.
    pub fn of(&self) -> Option<Subject> {
        Kind::from_code(&self.kind).map(|kind| Subject::new(kind, self.subject))
    }
}

const SELECT: &str = "select f.id, f.kind, f.subject, f.file_name, f.media_type, f.size_bytes, f.sha256,
        coalesce(f.about, ''), a.full_name, a.at
    from attachment f join trail_act a on a.id = f.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Attachment> {
    Ok(Attachment {
        id: row.get(0)?,
        kind: row.get(1)?,
        subject: row.get(2)?,
        file_name: row.get(3)?,
        media_type: row.get(4)?,
        size_bytes: row.get(5)?,
        sha256: row.get(6)?,
        about: row.get(7)?,
        by: row.get(8)?,
        at: row.get(9)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Attachment> {
    reader.one(
        "file with this number",
        &format!("{SELECT} where f.id = :id"),
        named_params! { ":id": id },
        from_row,
    )
}

/// The files of a record, oldest first.
pub fn of_subject(reader: &Reader<'_>, subject: Subject) -> Answer<Vec<Attachment>> {
    reader.all(
        &format!("{SELECT} where f.kind = :kind and f.subject = :subject order by f.id"),
        named_params! { ":kind": subject.kind.code(), ":subject": subject.id },
        from_row,
    )
}

/// A file about to be attached: its bytes are in the folder already.
#[derive(Clone, Debug)]
pub struct NewAttachment {
    pub subject: Subject,
    pub file_name: String,
    pub media_type: &'static str,
    pub size_bytes: i64,
    pub sha256: String,
    pub about: String,
}

pub fn insert(change: &Change<'_>, new: &NewAttachment) -> Answer<i64> {
    change.insert(
        "insert into attachment (uuid, kind, subject, file_name, media_type, size_bytes, sha256, about)
         values (:uuid, :kind, :subject, :file_name, :media_type, :size, :sha256, :about)",
        named_params! {
            ":uuid": new_uuid(),
            ":kind": new.subject.kind.code(),
            ":subject": new.subject.id,
            ":file_name": new.file_name,
            ":media_type": new.media_type,
            ":size": new.size_bytes,
            ":sha256": new.sha256,
            ":about": new.about,
        },
    )
}

/// A measurement on a photo.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Measured {
    pub marks: Marks,
    pub ratio: Decimal,
    pub account: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

const MEASURED: &str =
    "select m.base_y, m.interface_y, m.fill_line_y, m.base_x, m.interface_x, m.fill_line_x,
        m.ratio, m.account, a.full_name, a.at, m.attachment
    from photo_mark m join trail_act a on a.id = m.act";

fn measured_row(row: &Row<'_>) -> rusqlite::Result<Measured> {
    let across = |place: usize| row.get::<_, Option<Exact>>(place).map(|found| found.map(|exact| exact.0));
    Ok(Measured {
        marks: Marks {
            base_y: row.get::<_, Exact>(0)?.0,
            interface_y: row.get::<_, Exact>(1)?.0,
            fill_line_y: row.get::<_, Exact>(2)?.0,
            base_x: across(3)?,
            interface_x: across(4)?,
            fill_line_x: across(5)?,
        },
        ratio: row.get::<_, Exact>(6)?.0,
        account: row.get(7)?,
        by: row.get(8)?,
        at: row.get(9)?,
    })
}

/// The measurements on a photo, oldest first.
pub fn measured(reader: &Reader<'_>, attachment: i64) -> Answer<Vec<Measured>> {
    reader.all(
        &format!("{MEASURED} where m.attachment = :attachment order by m.id"),
        named_params! { ":attachment": attachment },
        measured_row,
    )
}

/// The measurements on all photos of a record with the number of each photo, oldest first.
pub fn measured_of(reader: &Reader<'_>, subject: Subject) -> Answer<Vec<(i64, Measured)>> {
    reader.all(
        &format!(
            "{MEASURED} join attachment f on f.id = m.attachment
             where f.kind = :kind and f.subject = :subject
             order by m.id"
        ),
        named_params! { ":kind": subject.kind.code(), ":subject": subject.id },
        |row| Ok((row.get(10)?, measured_row(row)?)),
    )
}

pub fn insert_marks(change: &Change<'_>, attachment: i64, marks: &Marks, ratio: Decimal) -> Answer<i64> {
    change.insert(
        "insert into photo_mark (attachment, base_y, interface_y, fill_line_y, base_x, interface_x, fill_line_x,
             ratio, account)
         values (:attachment, :base, :interface, :fill, :base_x, :interface_x, :fill_x, :ratio, :account)",
        named_params! {
            ":attachment": attachment,
            ":base": Exact(marks.base_y),
            ":interface": Exact(marks.interface_y),
            ":fill": Exact(marks.fill_line_y),
            ":base_x": marks.base_x.map(Exact),
            ":interface_x": marks.interface_x.map(Exact),
            ":fill_x": marks.fill_line_x.map(Exact),
            ":ratio": Exact(ratio),
            ":account": change.actor().account,
        },
    )
}

/// Whether there is such a pull; `Missing` otherwise.
pub fn has_pull(reader: &Reader<'_>, pull: i64) -> Answer<()> {
    reader.one(
        "pull with this number",
        "select 1 from pull where id = :id",
        named_params! { ":id": pull },
        |_| Ok(()),
    )
}
