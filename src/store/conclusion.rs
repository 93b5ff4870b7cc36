//! Signed conclusions of evaluations: the rows and the text under the signature.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader, new_uuid};
use crate::domain::conclusion::Content;
use crate::domain::failure::Failure;

/// A conclusion as it is shown and verified.
#[derive(Clone, Debug)]
pub struct Conclusion {
    pub id: i64,
    pub presentation: i64,
    pub presentation_code: String,
    pub study_arm: i64,
    pub months: u32,
    pub inputs_digest: String,
    /// The canonical text, as signed.
    pub text: String,
    pub concluded_by: String,
    /// As stored: UTC.
    pub concluded_at: String,
}

impl Conclusion {
    /// The document, read from its text.
    pub fn content(&self) -> Answer<Content> {
        serde_json::from_str(&self.text).map_err(Failure::fault)
    }
}

const SELECT: &str = "select c.id, c.presentation, p.code, c.study_arm, c.months, c.inputs_digest, c.content,
        a.full_name, a.at
    from evaluation_conclusion c
    join presentation p on p.id = c.presentation
    join trail_act a on a.id = c.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Conclusion> {
    Ok(Conclusion {
        id: row.get(0)?,
        presentation: row.get(1)?,
        presentation_code: row.get(2)?,
        study_arm: row.get(3)?,
        months: row.get(4)?,
        inputs_digest: row.get(5)?,
        text: row.get(6)?,
        concluded_by: row.get(7)?,
        concluded_at: row.get(8)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Conclusion> {
    let sql = format!("{SELECT} where c.id = :id");
    reader.one("conclusion with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The conclusions on a presentation, the newest first.
pub fn of_presentation(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<Conclusion>> {
    let sql = format!("{SELECT} where c.presentation = :presentation order by c.id desc");
    reader.all(&sql, named_params! { ":presentation": presentation }, from_row)
}

/// The conclusions that a lot was chosen for, the newest first: number, months, condition.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<(i64, u32, String)>> {
    reader.all(
        "select c.id, c.months, json_extract(c.content, '$.condition')
         from evaluation_conclusion_lot l
         join evaluation_conclusion c on c.id = l.conclusion
         where l.lot = :lot and l.left_out_because is null
         order by c.id desc",
        named_params! { ":lot": lot },
        |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)),
    )
}

pub fn insert(change: &Change<'_>, presentation: i64, study_arm: i64, content: &Content) -> Answer<i64> {
    let id = change.insert(
        "insert into evaluation_conclusion (uuid, presentation, study_arm, months, inputs_digest, content)
         values (:uuid, :presentation, :arm, :months, :digest, :content)",
        named_params! {
            ":uuid": new_uuid(),
            ":presentation": presentation,
            ":arm": study_arm,
            ":months": content.proposed_months,
            ":digest": content.inputs_digest(),
            ":content": content.canonical(),
        },
    )?;
    let chosen = content.lots.iter().map(|lot| (lot.id, None));
    let left_out = content.left_out.iter().map(|lot| (lot.id, Some(lot.why.as_str())));
    for (lot, why) in chosen.chain(left_out) {
        change.insert(
            "insert into evaluation_conclusion_lot (conclusion, lot, left_out_because)
             values (:conclusion, :lot, :why)",
            named_params! { ":conclusion": id, ":lot": lot, ":why": why },
        )?;
    }
    Ok(id)
}
