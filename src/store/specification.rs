//! Specifications and their versions.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::version::{self, Version};
use super::{Answer, Reader, new_uuid};
use crate::domain::specification::SpecificationContent;
use crate::domain::version::Versioned;

/// A specification with the presentation it is for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Specification {
    pub id: i64,
    pub code: String,
    pub presentation: i64,
    pub presentation_code: String,
    pub product_name: String,
    pub strength: String,
    pub pack: String,
    /// Number of the newest approved version.
    pub approved_number: Option<i64>,
}

const SELECT: &str = "select s.id, s.code, s.presentation, p.code, d.name, p.strength, p.pack,
        (select max(v.number)
         from specification_version v
         join signature g on g.kind = 'specification_version' and g.subject = v.id and g.meaning = 'approval'
         where v.specification = s.id)
    from specification s
    join presentation p on p.id = s.presentation
    join product d on d.id = p.product";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Specification> {
    Ok(Specification {
        id: row.get(0)?,
        code: row.get(1)?,
        presentation: row.get(2)?,
        presentation_code: row.get(3)?,
        product_name: row.get(4)?,
        strength: row.get(5)?,
        pack: row.get(6)?,
        approved_number: row.get(7)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Specification> {
    reader.one(
        "specification with this number",
        &format!("{SELECT} where s.id = :id"),
        named_params! { ":id": id },
        from_row,
    )
}

/// All specifications, by code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Specification>> {
    reader.all(&format!("{SELECT} order by s.code"), [], from_row)
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from specification where code = :code", named_params! { ":code": code })
}

/// The code of the presentation's specification, if it has one.
pub fn code_of_presentation(reader: &Reader<'_>, presentation: i64) -> Answer<Option<String>> {
    reader.maybe(
        "select code from specification where presentation = :presentation",
        named_params! { ":presentation": presentation },
        |row| row.get(0),
    )
}

/// Presentations that may have a specification: id and words.
pub fn presentations(reader: &Reader<'_>) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select p.id, p.code, d.name, p.strength, p.pack
         from presentation p join product d on d.id = p.product
         where d.imported is null
         order by p.code",
        [],
        |row| {
            let (code, name): (String, String) = (row.get(1)?, row.get(2)?);
            let (strength, pack): (String, String) = (row.get(3)?, row.get(4)?);
            Ok((row.get(0)?, format!("{code}, {name} {strength}, {pack}")))
        },
    )
}

pub fn insert(change: &Change<'_>, code: &str, presentation: i64) -> Answer<i64> {
    change.insert(
        "insert into specification (uuid, presentation, code) values (:uuid, :presentation, :code)",
        named_params! { ":uuid": new_uuid(), ":presentation": presentation, ":code": code },
    )
}

/// The content of one specification version, whatever its state.
pub fn content(reader: &Reader<'_>, version_id: i64) -> Answer<SpecificationContent> {
    version::get(reader, Versioned::Specification, version_id)?.read()
}

/// The newest approved version of the presentation's specification.
pub fn approved_of(reader: &Reader<'_>, presentation: i64) -> Answer<Option<Version>> {
    let found: Option<i64> = reader.maybe(
        "select v.id
         from specification s
         join specification_version v on v.specification = s.id
         join signature g on g.kind = 'specification_version' and g.subject = v.id and g.meaning = 'approval'
         where s.presentation = :presentation
         order by v.id desc
         limit 1",
        named_params! { ":presentation": presentation },
        |row| row.get(0),
    )?;
    found.map(|id| version::get(reader, Versioned::Specification, id)).transpose()
}
