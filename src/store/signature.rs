//! Signatures: who signed which record, with which meaning, over which content.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::signature::Meaning;
use crate::domain::subject::{Kind, Subject};

/// A signature as it is shown and verified.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Signature {
    pub id: i64,
    pub subject: Subject,
    pub meaning: Meaning,
    pub account: i64,
    pub signer_name: String,
    /// SHA-256 of the canonical record, hexadecimal.
    pub digest: String,
    pub statement: Option<String>,
    pub act: i64,
    /// As stored: UTC.
    pub at: String,
    pub role: Option<String>,
}

const SELECT: &str =
    "select s.id, s.kind, s.subject, s.meaning, s.account, s.signer_name, s.digest, s.statement,
        s.act, a.at, a.role
    from signature s join trail_act a on a.id = s.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Signature> {
    let kind: String = row.get(1)?;
    let meaning: String = row.get(3)?;
    Ok(Signature {
        id: row.get(0)?,
        subject: Subject::new(Kind::from_code(&kind).unwrap_or(Kind::Site), row.get(2)?),
        meaning: Meaning::from_code(&meaning).unwrap_or(Meaning::Authorship),
        account: row.get(4)?,
        signer_name: row.get(5)?,
        digest: row.get(6)?,
        statement: row.get(7)?,
        act: row.get(8)?,
        at: row.get(9)?,
        role: row.get(10)?,
    })
}

/// All signatures of a record, oldest first.
pub fn of(reader: &Reader<'_>, kind: Kind, subject: i64) -> Answer<Vec<Signature>> {
    reader.all(
        &format!("{SELECT} where s.kind = :kind and s.subject = :subject order by s.id"),
        named_params! { ":kind": kind.code(), ":subject": subject },
        from_row,
    )
}

/// Every signature there is, for verification.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Signature>> {
    reader.all(&format!("{SELECT} order by s.id"), [], from_row)
}

pub fn insert(
    change: &Change<'_>,
    subject: Subject,
    meaning: Meaning,
    digest: &str,
    statement: Option<&str>,
) -> Answer<i64> {
    change.insert(
        "insert into signature (kind, subject, meaning, account, signer_name, digest, statement)
         values (:kind, :subject, :meaning, :account, :name, :digest, :statement)",
        named_params! {
            ":kind": subject.kind.code(),
            ":subject": subject.id,
            ":meaning": meaning.code(),
            ":account": change.actor().account,
            ":name": change.actor().full_name,
            ":digest": digest,
            ":statement": statement,
        },
    )
}
