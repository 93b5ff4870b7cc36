//! Methods and their versions.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader, new_uuid, version};
use crate::domain::failure::Failure;
use crate::domain::method::{MethodContent, TestKind};
use crate::domain::version::{VersionState, Versioned};

/// A method: what its versions have in common.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Method {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub kind: TestKind,
}

const SELECT: &str = "select m.id, m.code, m.name, m.kind from method m";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Method> {
    let kind: String = row.get(3)?;
    Ok(Method {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        kind: TestKind::from_code(&kind).unwrap_or(TestKind::Numeric),
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Method> {
    reader.one(
        "method with this number",
        &format!("{SELECT} where m.id = :id"),
        named_params! { ":id": id },
        from_row,
    )
}

/// All methods, by code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Method>> {
    reader.all(&format!("{SELECT} order by m.code"), [], from_row)
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from method where code = :code", named_params! { ":code": code })
}

pub fn insert(change: &Change<'_>, code: &str, name: &str, kind: TestKind) -> Answer<i64> {
    change.insert(
        "insert into method (uuid, code, name, kind) values (:uuid, :code, :name, :kind)",
        named_params! { ":uuid": new_uuid(), ":code": code, ":name": name, ":kind": kind.code() },
    )
}

/// A version of a method with its content as its type.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MethodVersion {
    pub id: i64,
    pub method: i64,
    pub code: String,
    pub name: String,
    pub kind: TestKind,
    pub number: i64,
    pub content: MethodContent,
    pub state: VersionState,
    pub is_approved: bool,
}

/// One method version.
pub fn version(reader: &Reader<'_>, version_id: i64) -> Answer<MethodVersion> {
    let found = version::get(reader, Versioned::Method, version_id)?;
    let method = get(reader, found.parent)?;
    joined(method, &found)
}

fn joined(method: Method, found: &version::Version) -> Answer<MethodVersion> {
    Ok(MethodVersion {
        id: found.id,
        method: method.id,
        code: method.code,
        name: method.name,
        kind: method.kind,
        number: found.number,
        content: found.read()?,
        state: found.state,
        is_approved: found.is_approved(),
    })
}

const VERSIONS: &str = "select m.id, m.code, m.name, m.kind, v.id, v.number, v.content
    from method m
    join method_version v on v.method = m.id
    join signature s on s.kind = 'method_version' and s.subject = v.id and s.meaning = 'approval'";

fn approved_from_row(row: &Row<'_>) -> rusqlite::Result<(Method, i64, i64, String)> {
    Ok((from_row(row)?, row.get(4)?, row.get(5)?, row.get(6)?))
}

fn approved(found: Vec<(Method, i64, i64, String)>) -> Answer<Vec<MethodVersion>> {
    let one = |(method, id, number, content): (Method, i64, i64, String)| {
        Ok(MethodVersion {
            id,
            method: method.id,
            code: method.code,
            name: method.name,
            kind: method.kind,
            number,
            content: serde_json::from_str(&content).map_err(Failure::fault)?,
            state: VersionState::Approved,
            is_approved: true,
        })
    };
    found.into_iter().map(one).collect()
}

/// Every approved version of every method, by code, newest first: for choice lists.
pub fn approved_versions(reader: &Reader<'_>) -> Answer<Vec<MethodVersion>> {
    approved(reader.all(&format!("{VERSIONS} order by m.code, v.number desc"), [], approved_from_row)?)
}

/// The newest approved version of a method.
pub fn newest_approved(reader: &Reader<'_>, method: i64) -> Answer<Option<MethodVersion>> {
    let found = reader.all(
        &format!("{VERSIONS} where m.id = :method order by v.number desc limit 1"),
        named_params! { ":method": method },
        approved_from_row,
    )?;
    Ok(approved(found)?.pop())
}
