//! Versions of formulations, methods, specifications and protocols: four tables of one shape.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader, new_uuid};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::version::{VersionState, Versioned};

/// One version with its whole content.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Version {
    pub id: i64,
    /// The definition it belongs to.
    pub parent: i64,
    pub number: i64,
    pub reason: String,
    /// The canonical JSON document.
    pub content: String,
    pub state: VersionState,
    /// Who last wrote it.
    pub author: i64,
    pub author_name: String,
    /// As stored: UTC.
    pub written_at: String,
}

impl Version {
    /// The text that is signed: number, reason and content.
    pub fn canonical(&self) -> String {
        format!("version {}\nreason {}\n{}", self.number, self.reason, self.content)
    }

    pub fn digest(&self) -> String {
        sha256_hex(self.canonical().as_bytes())
    }

    /// The content as its type.
    pub fn read<T: serde::de::DeserializeOwned>(&self) -> Answer<T> {
        serde_json::from_str(&self.content).map_err(Failure::fault)
    }

    pub fn is_approved(&self) -> bool {
        self.state == VersionState::Approved
    }
}

/// The select list with table and parent column of the kind. Both come from the code, never from a person.
fn select(of: Versioned) -> String {
    let (table, parent, draft) = (of.kind().code(), of.parent().code(), of.draft_act().code());
    format!(
        "select v.id, v.{parent}, v.number, v.reason, v.content, v.imported is not null,
             exists (select 1 from signature where kind = '{table}' and subject = v.id and meaning = 'authorship'),
             exists (select 1 from signature where kind = '{table}' and subject = v.id and meaning = 'approval'),
             a.account, a.full_name, a.at
         from {table} v
         join trail_act a on a.id = coalesce(
             (select max(t.act) from trail_subject t join trail_act w on w.id = t.act
              where t.kind = '{table}' and t.subject = v.id and w.act = '{draft}'
                  and not exists (select 1 from signature where act = w.id)), v.act)"
    )
}

fn from_row(row: &Row<'_>) -> rusqlite::Result<Version> {
    let (is_imported, is_signed, is_approved): (bool, bool, bool) = (row.get(5)?, row.get(6)?, row.get(7)?);
    let state = match (is_imported, is_signed, is_approved) {
        (true, _, _) => VersionState::Imported,
        (_, _, true) => VersionState::Approved,
        (_, true, _) => VersionState::SignedByAuthor,
        _ => VersionState::Draft,
    };
    Ok(Version {
        id: row.get(0)?,
        parent: row.get(1)?,
        number: row.get(2)?,
        reason: row.get(3)?,
        content: row.get(4)?,
        state,
        author: row.get(8)?,
        author_name: row.get(9)?,
        written_at: row.get(10)?,
    })
}

pub fn get(reader: &Reader<'_>, of: Versioned, id: i64) -> Answer<Version> {
    reader.one(
        "version with this number",
        &format!("{} where v.id = :id", select(of)),
        named_params! { ":id": id },
        from_row,
    )
}

/// All versions of a definition, newest first.
pub fn of_parent(reader: &Reader<'_>, of: Versioned, parent: i64) -> Answer<Vec<Version>> {
    let column = of.parent().code();
    reader.all(
        &format!("{} where v.{column} = :parent order by v.number desc", select(of)),
        named_params! { ":parent": parent },
        from_row,
    )
}

/// The newest approved version of a definition.
pub fn approved(reader: &Reader<'_>, of: Versioned, parent: i64) -> Answer<Option<Version>> {
    Ok(of_parent(reader, of, parent)?.into_iter().find(Version::is_approved))
}

/// Inserts the next version of a definition as a draft (or as imported).
pub fn insert(
    change: &Change<'_>,
    of: Versioned,
    parent: i64,
    reason: &str,
    content: &str,
    imported: Option<i64>,
) -> Answer<i64> {
    let (table, column) = (of.kind().code(), of.parent().code());
    change.insert(
        &format!(
            "insert into {table} (uuid, {column}, number, reason, content, imported)
             values (:uuid, :parent,
                 (select coalesce(max(number), 0) + 1 from {table} where {column} = :parent),
                 :reason, :content, :imported)"
        ),
        named_params! {
            ":uuid": new_uuid(),
            ":parent": parent,
            ":reason": reason,
            ":content": content,
            ":imported": imported,
        },
    )
}

/// Rewrites a draft; the schema refuses a signed version.
pub fn update(change: &Change<'_>, of: Versioned, id: i64, reason: &str, content: &str) -> Answer<()> {
    let table = of.kind().code();
    change.execute(
        &format!("update {table} set reason = :reason, content = :content where id = :id"),
        named_params! { ":id": id, ":reason": reason, ":content": content },
    )?;
    Ok(())
}
