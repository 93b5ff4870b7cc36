//! Protocols: which arms a study has.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader, method, new_uuid, specification, version};
use crate::domain::protocol::cost::Need;
use crate::domain::protocol::rules::{ConditionFact, ProtocolFacts};
use crate::domain::protocol::{PlannedTest, ProtocolContent};
use crate::domain::study::Needs;
use crate::domain::version::Versioned;

/// A protocol of a presentation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Protocol {
    pub id: i64,
    pub code: String,
    pub title: String,
    pub presentation: i64,
    pub presentation_code: String,
    pub presentation_words: String,
    pub fill_ml: Option<String>,
    pub container_word: String,
    pub versions: i64,
    pub approved: Option<i64>,
}

const SELECT: &str = "select r.id, r.code, r.title, p.id, p.code,
        d.name || ', ' || p.strength || ', ' || p.pack, p.fill_ml, p.container_word,
        (select count(*) from protocol_version where protocol = r.id),
        (select max(v.number) from protocol_version v where v.protocol = r.id and exists (
            select 1 from signature
            where kind = 'protocol_version' and subject = v.id and meaning = 'approval'))
    from protocol r
    join presentation p on p.id = r.presentation
    join product d on d.id = p.product";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Protocol> {
    Ok(Protocol {
        id: row.get(0)?,
        code: row.get(1)?,
        title: row.get(2)?,
        presentation: row.get(3)?,
        presentation_code: row.get(4)?,
        presentation_words: row.get(5)?,
        fill_ml: row.get(6)?,
        container_word: row.get(7)?,
        versions: row.get(8)?,
        approved: row.get(9)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Protocol> {
    let sql = format!("{SELECT} where r.id = :id");
    reader.one("protocol with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All protocols, by code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Protocol>> {
    reader.all(&format!("{SELECT} order by r.code"), [], from_row)
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from protocol where code = :code", named_params! { ":code": code })
}

pub fn insert(change: &Change<'_>, presentation: i64, code: &str, title: &str) -> Answer<i64> {
    change.insert(
        "insert into protocol (uuid, presentation, code, title)
         values (:uuid, :presentation, :code, :title)",
        named_params! {
            ":uuid": new_uuid(), ":presentation": presentation, ":code": code, ":title": title,
        },
    )
}

/// The approved protocol versions of a presentation as choices, newest first.
pub fn approved_of(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select v.id, r.code || ' version ' || v.number || ': ' || r.title
         from protocol_version v
         join protocol r on r.id = v.protocol
         where r.presentation = :presentation and v.imported is null and exists (
             select 1 from signature
             where kind = 'protocol_version' and subject = v.id and meaning = 'approval')
         order by r.code, v.number desc",
        named_params! { ":presentation": presentation },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// What the rules of a protocol ask about the things it names.
pub fn facts(reader: &Reader<'_>, presentation: i64, content: &ProtocolContent) -> Answer<ProtocolFacts> {
    let bound = version::get(reader, Versioned::Specification, content.specification_version)?;
    let limits = specification::content(reader, bound.id)?;
    let owner = specification::get(reader, bound.parent)?;
    let approved = method::approved_versions(reader)?;
    Ok(ProtocolFacts {
        conditions: condition_facts(reader)?,
        approved_methods: approved.into_iter().map(|version| version.id).collect(),
        is_specification_approved: bound.is_approved(),
        is_specification_of_presentation: owner.presentation == presentation,
        tests_with_limits: limits.tests.into_iter().map(|test| test.test).collect(),
    })
}

pub fn condition_facts(reader: &Reader<'_>) -> Answer<Vec<ConditionFact>> {
    let all = super::condition::all(reader)?;
    let fact = |found: super::condition::Condition| ConditionFact {
        id: found.id,
        code: found.code,
        name: found.name,
        used_for: found.used_for,
    };
    Ok(all.into_iter().map(fact).collect())
}

/// What each test of a protocol needs of a pull, in the order of the protocol. One query for all methods.
pub fn needs(reader: &Reader<'_>, content: &ProtocolContent) -> Answer<Needs> {
    let approved = method::approved_versions(reader)?;
    let need = |test: &PlannedTest| {
        let found = approved.iter().find(|version| version.id == test.method_version)?;
        Some((test.test.clone(), Need::of(&found.content)))
    };
    Ok(content.tests.iter().filter_map(need).collect())
}
