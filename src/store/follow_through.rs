//! What was seen on containers that are never opened.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::follow_through::NewObservation;

/// An observation as stored.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Observation {
    pub id: i64,
    pub pull: Option<i64>,
    /// `6 months`; empty at loading.
    pub age: String,
    pub weight_g: Decimal,
    pub bed_top_mm: Option<Decimal>,
    pub fill_line_mm: Option<Decimal>,
    pub attachment: Option<i64>,
    pub note: Option<String>,
    pub supersedes: Option<i64>,
    pub act: i64,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

fn from_row(row: &Row<'_>) -> rusqlite::Result<Observation> {
    let exact =
        |at: usize| Ok::<_, rusqlite::Error>(row.get::<_, Option<Exact>>(at)?.map(|Exact(value)| value));
    Ok(Observation {
        id: row.get(0)?,
        pull: row.get(1)?,
        age: row.get(2)?,
        weight_g: row.get::<_, Exact>(3)?.0,
        bed_top_mm: exact(4)?,
        fill_line_mm: exact(5)?,
        attachment: row.get(6)?,
        note: row.get(7)?,
        supersedes: row.get(8)?,
        act: row.get(9)?,
        by: row.get(10)?,
        at: row.get(11)?,
    })
}

/// All rows of a container, oldest first; a corrected one is superseded by a later one.
pub fn of_container(reader: &Reader<'_>, container: i64) -> Answer<Vec<Observation>> {
    reader.all(
        "select o.id, o.pull, coalesce(p.age_text, ''), o.weight_g, o.bed_top_mm, o.fill_line_mm, o.attachment, o.note,
             o.supersedes, o.act, t.full_name, t.at
         from container_observation o
         join trail_act t on t.id = o.act
         left join pull p on p.id = o.pull
         where o.container = :container
         order by o.id",
        named_params! { ":container": container },
        from_row,
    )
}

/// The ages of the container's arm that were not superseded: pull and its words, young to old.
pub fn ages(reader: &Reader<'_>, container: i64) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "select p.id, p.age_text
         from container k
         join pull p on p.study_arm = k.study_arm
         where k.id = :container and not exists (select 1 from pull n where n.supersedes = p.id)
         order by p.due_on, p.id",
        named_params! { ":container": container },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

pub fn insert(
    change: &Change<'_>,
    container: i64,
    new: &NewObservation,
    attachment: Option<i64>,
    supersedes: Option<i64>,
) -> Answer<i64> {
    let why = new.why.trim();
    change.insert(
        "insert into container_observation
             (container, pull, weight_g, bed_top_mm, fill_line_mm, attachment, note, supersedes)
         values (:container, :pull, :weight_g, :bed_top_mm, :fill_line_mm, :attachment, :note, :supersedes)",
        named_params! {
            ":container": container,
            ":pull": new.pull,
            ":weight_g": Exact(new.weight_g),
            ":bed_top_mm": new.bed_top_mm.map(Exact),
            ":fill_line_mm": new.fill_line_mm.map(Exact),
            ":attachment": attachment,
            ":note": Some(why).filter(|why| !why.is_empty()),
            ":supersedes": supersedes,
        },
    )
}

/// A container of a study that is followed unopened.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Followed {
    pub container: i64,
    pub label: String,
    pub condition: String,
    pub orientation: String,
    /// Loading and ages that are recorded.
    pub recorded: i64,
}

/// The containers of a study that are followed unopened, arm by arm.
pub fn of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<Followed>> {
    reader.all(
        "select k.id, k.label, c.name, a.orientation,
             (select count(*) from container_observation o where o.container = k.id and o.supersedes is null)
         from study_arm a
         join container k on k.study_arm = a.id and k.purpose = 'follow-through'
         join condition c on c.id = a.condition
         where a.study = :study
         order by a.position, k.number",
        named_params! { ":study": study },
        |row| {
            Ok(Followed {
                container: row.get(0)?,
                label: row.get(1)?,
                condition: row.get(2)?,
                orientation: row.get(3)?,
                recorded: row.get(4)?,
            })
        },
    )
}
