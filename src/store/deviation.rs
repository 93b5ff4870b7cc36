//! Deviations and their working records.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::deviation::{DeviationClass, DeviationFacts, NewDeviation, NewDeviationEntry};

/// A deviation with what its list and page show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Deviation {
    pub id: i64,
    pub facts: DeviationFacts,
    pub title: String,
    pub described: String,
    pub occurred_on: NaiveDate,
    pub lot_number: Option<String>,
    pub step: Option<i64>,
    pub step_words: Option<String>,
    pub material_lot: Option<(i64, String)>,
    pub equipment: Option<(i64, String)>,
    pub study: Option<(i64, String)>,
    pub opened_by: String,
    /// As stored: UTC.
    pub opened_at: String,
}

const SELECT: &str = "select d.id, d.number, d.lot,
        (select class from deviation_entry where deviation = d.id and kind = 'classified' order by id desc limit 1),
        exists (select 1 from deviation_entry where deviation = d.id and kind = 'cause'),
        exists (select 1 from deviation_entry where deviation = d.id and kind = 'other lots assessed'),
        exists (select 1 from deviation_entry where deviation = d.id
            and kind in ('added to stability', 'not added to stability')),
        exists (select 1 from deviation_entry where deviation = d.id and kind = 'continued'),
        exists (select 1 from deviation_entry where deviation = d.id and kind = 'closed'),
        a.account, d.title, d.described, d.occurred_on, l.number, d.step, d.step_words, d.material_lot, m.number,
        d.equipment, q.code, d.study, s.number, a.full_name, a.at
    from deviation d
    join trail_act a on a.id = d.act
    left join lot l on l.id = d.lot
    left join material_lot m on m.id = d.material_lot
    left join equipment q on q.id = d.equipment
    left join study s on s.id = d.study";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Deviation> {
    let class: Option<String> = row.get(3)?;
    let named = |first: usize| -> rusqlite::Result<Option<(i64, String)>> {
        let id: Option<i64> = row.get(first)?;
        let name: Option<String> = row.get(first + 1)?;
        Ok(id.zip(name))
    };
    Ok(Deviation {
        id: row.get(0)?,
        facts: DeviationFacts {
            number: row.get(1)?,
            lot: row.get(2)?,
            class: class.as_deref().and_then(DeviationClass::from_words),
            has_cause: row.get(4)?,
            are_other_lots_assessed: row.get(5)?,
            is_stability_answered: row.get(6)?,
            is_continued: row.get(7)?,
            is_closed: row.get(8)?,
            opened_by: row.get(9)?,
        },
        title: row.get(10)?,
        described: row.get(11)?,
        occurred_on: row.get::<_, Day>(12)?.0,
        lot_number: row.get(13)?,
        step: row.get(14)?,
        step_words: row.get(15)?,
        material_lot: named(16)?,
        equipment: named(18)?,
        study: named(20)?,
        opened_by: row.get(22)?,
        opened_at: row.get(23)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Deviation> {
    let sql = format!("{SELECT} where d.id = :id");
    reader.one("deviation with this number", &sql, named_params! { ":id": id }, from_row)
}

/// Deviations newest first, those opened before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<Deviation>> {
    let sql = format!("{SELECT} where d.id < :before order by d.id desc limit :limit");
    reader.all(&sql, named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit }, from_row)
}

/// The deviations of a lot, oldest first, with those of the bulk lot it was filled from.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Deviation>> {
    let sql =
        format!("{SELECT} where d.lot in (:lot, (select bulk_lot from lot where id = :lot)) order by d.id");
    reader.all(&sql, named_params! { ":lot": lot }, from_row)
}

/// Opens a deviation with the next number; answers with its id and number.
pub fn insert(change: &Change<'_>, new: &NewDeviation) -> Answer<(i64, i64)> {
    let number = change.one("number", "select coalesce(max(number), 0) + 1 from deviation", [], |row| {
        row.get::<_, i64>(0)
    })?;
    let id = change.insert(
        "insert into deviation (uuid, number, title, described, occurred_on, lot, step, step_words, material_lot,
             equipment, study)
         values (:uuid, :number, :title, :described, :on, :lot, :step, :step_words, :material_lot,
             :equipment, :study)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": number,
            ":title": new.title,
            ":described": new.described,
            ":on": Day(new.occurred_on),
            ":lot": new.lot,
            ":step": new.step.as_ref().and_then(|(step, _)| *step),
            ":step_words": new.step.as_ref().map(|(_, words)| words),
            ":material_lot": new.material_lot,
            ":equipment": new.equipment,
            ":study": new.study,
        },
    )?;
    Ok((id, number))
}

/// One line of the working record.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DeviationEntry {
    pub kind: String,
    pub class: Option<String>,
    pub text: String,
    pub other_lot: Option<String>,
    pub study: Option<String>,
    pub signature: Option<i64>,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The lines of the working record, oldest first.
pub fn entries(reader: &Reader<'_>, deviation: i64) -> Answer<Vec<DeviationEntry>> {
    reader.all(
        "select e.kind, e.class, e.text, l.number, s.number, e.signature, a.full_name, a.at
         from deviation_entry e
         join trail_act a on a.id = e.act
         left join lot l on l.id = e.other_lot
         left join study s on s.id = e.study
         where e.deviation = :deviation
         order by e.id",
        named_params! { ":deviation": deviation },
        |row| {
            Ok(DeviationEntry {
                kind: row.get(0)?,
                class: row.get(1)?,
                text: row.get(2)?,
                other_lot: row.get(3)?,
                study: row.get(4)?,
                signature: row.get(5)?,
                by: row.get(6)?,
                at: row.get(7)?,
            })
        },
    )
}

pub fn insert_entry(
    change: &Change<'_>,
    deviation: i64,
    new: &NewDeviationEntry,
    signature: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into deviation_entry (deviation, kind, class, text, other_lot, study, signature)
         values (:deviation, :kind, :class, :text, :other_lot, :study, :signature)",
        named_params! {
            ":deviation": deviation,
            ":kind": new.kind.words(),
            ":class": new.class.map(DeviationClass::words),
            ":text": new.text,
            ":other_lot": new.other_lot,
            ":study": new.study,
            ":signature": signature,
        },
    )
}

/// The text that is signed: what happened, every line before, and the line that decides.
pub fn canonical(found: &Deviation, entries: &[DeviationEntry], kind: &str, text: &str) -> String {
    let of = |named: &Option<(i64, String)>| named.as_ref().map_or("none", |(_, name)| name).to_string();
    let mut whole = format!(
        "deviation {}\n{}\n{}\non {}\nlot {}, step {}, material lot {}, equipment {}, study {}\n",
        found.facts.number,
        found.title,
        found.described,
        found.occurred_on,
        found.lot_number.as_deref().unwrap_or("none"),
        found.step_words.as_deref().unwrap_or("none"),
        of(&found.material_lot),
        of(&found.equipment),
        of(&found.study)
    );
    for entry in entries {
        let parts =
            [&entry.class, &entry.other_lot, &entry.study].map(|part| part.clone().unwrap_or_default());
        whole.push_str(&format!(
            "{} {} {}: {} {}\n",
            entry.at,
            entry.by,
            entry.kind,
            entry.text,
            parts.join(" ")
        ));
    }
    whole.push_str(&format!("{kind} {text}\n"));
    whole
}

/// The text that a signature under a deviation went over, from the rows as they are.
pub fn canonical_of_signature(reader: &Reader<'_>, id: i64, signature: i64) -> Answer<Option<String>> {
    let (found, entries) = (get(reader, id)?, entries(reader, id)?);
    let place = entries.iter().position(|entry| entry.signature == Some(signature));
    Ok(place.map(|at| canonical(&found, &entries[..at], &entries[at].kind, &entries[at].text)))
}
