//! Investigations: the working record of a result out of specification.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};

/// An investigation with what its list and page show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Investigation {
    pub id: i64,
    pub number: i64,
    pub result: i64,
    pub sample: i64,
    pub sample_number: String,
    pub sample_test: i64,
    pub test_title: String,
    pub lot: i64,
    pub lot_number: String,
    pub shown: String,
    pub unit: String,
    /// The sentence of the flag that opened it.
    pub sentence: String,
    /// As stored: UTC.
    pub first_known_at: String,
    pub first_known_by: String,
    pub steered_by: Option<String>,
    pub clock_due_on: Option<NaiveDate>,
    pub is_concluded: bool,
}

const SELECT: &str =
    "select i.id, i.number, i.result, s.id, s.number, t.id, t.title, s.lot, l.number, r.shown, r.unit,
        coalesce((select f.sentence from flag f where f.result = r.id and f.level = 'exception'
            order by f.kind <> 'out of specification', f.id limit 1), ''),
        i.first_known_at, coalesce(a.full_name, ''),
        (select p.full_name from investigation_entry e join account p on p.id = e.account
            where e.investigation = i.id and e.kind = 'steered by' order by e.id desc limit 1),
        i.clock_due_on,
        exists (select 1 from investigation_entry e where e.investigation = i.id and e.kind = 'conclusion')
    from investigation i
    join result r on r.id = i.result
    join sample_test t on t.id = r.sample_test
    join sample s on s.id = t.sample
    join lot l on l.id = s.lot
    left join trail_act a on a.id = i.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Investigation> {
    Ok(Investigation {
        id: row.get(0)?,
        number: row.get(1)?,
        result: row.get(2)?,
        sample: row.get(3)?,
        sample_number: row.get(4)?,
        sample_test: row.get(5)?,
        test_title: row.get(6)?,
        lot: row.get(7)?,
        lot_number: row.get(8)?,
        shown: row.get(9)?,
        unit: row.get(10)?,
        sentence: row.get(11)?,
        first_known_at: row.get(12)?,
        first_known_by: row.get(13)?,
        steered_by: row.get(14)?,
        clock_due_on: row.get::<_, Option<Day>>(15)?.map(|day| day.0),
        is_concluded: row.get(16)?,
    })
}

/// All investigations, open ones first, then the newest.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Investigation>> {
    reader.all(&format!("{SELECT} order by 17, i.number desc"), [], from_row)
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Investigation> {
    reader.one(
        "investigation with this number",
        &format!("{SELECT} where i.id = :id"),
        named_params! { ":id": id },
        from_row,
    )
}

/// The investigations of a test, whichever version of its result opened them.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Investigation>> {
    reader.all(
        &format!("{SELECT} where t.id = :test order by i.number"),
        named_params! { ":test": sample_test },
        from_row,
    )
}

/// The investigations of a lot.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Investigation>> {
    reader.all(
        &format!("{SELECT} where s.lot = :lot order by i.number"),
        named_params! { ":lot": lot },
        from_row,
    )
}

/// Opens an investigation with the next number; answers with its id and number.
pub fn insert(change: &Change<'_>, result: i64, clock_due_on: Option<NaiveDate>) -> Answer<(i64, i64)> {
    let number =
        change.one("number", "select coalesce(max(number), 0) + 1 from investigation", [], |row| {
            row.get::<_, i64>(0)
        })?;
    let id = change.insert(
        "insert into investigation (uuid, number, result, first_known_at, clock_due_on)
         values (:uuid, :number, :result, :at, :due)",
        named_params! {
            ":uuid": new_uuid(),
            ":number": number,
            ":result": result,
            ":at": change.actor().at.stored(),
            ":due": clock_due_on.map(Day),
        },
    )?;
    Ok((id, number))
}

/// One line of the working record.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct InvestigationEntry {
    pub id: i64,
    pub kind: String,
    pub text: String,
    pub other_lot: Option<String>,
    pub person: Option<String>,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The lines of the working record, oldest first.
pub fn entries(reader: &Reader<'_>, investigation: i64) -> Answer<Vec<InvestigationEntry>> {
    reader.all(
        "select e.id, e.kind, e.text, l.number, p.full_name, a.full_name, a.at
         from investigation_entry e
         join trail_act a on a.id = e.act
         left join lot l on l.id = e.other_lot
         left join account p on p.id = e.account
         where e.investigation = :investigation
         order by e.id",
        named_params! { ":investigation": investigation },
        |row| {
            Ok(InvestigationEntry {
                id: row.get(0)?,
                kind: row.get(1)?,
                text: row.get(2)?,
                other_lot: row.get(3)?,
                person: row.get(4)?,
                by: row.get(5)?,
                at: row.get(6)?,
            })
        },
    )
}

/// The text that is signed: the result, every line of the working record, the conclusion.
pub fn canonical(found: &Investigation, entries: &[InvestigationEntry], conclusion: &str) -> String {
    let mut text = format!(
        "investigation {}\nresult {} of {} {}: {} {}\nfirst known {}\n",
        found.number,
        found.result,
        found.sample_number,
        found.test_title,
        found.shown,
        found.unit,
        found.first_known_at
    );
    for entry in entries.iter().filter(|entry| entry.kind != "conclusion") {
        let lot = entry.other_lot.as_deref().unwrap_or_default();
        text.push_str(&format!("{} {} {}: {} {lot}\n", entry.at, entry.by, entry.kind, entry.text));
    }
    text.push_str(&format!("conclusion {conclusion}\n"));
    text
}

/// The text that the conclusion's signature went over, from the rows as they are; `None` without a conclusion.
pub fn canonical_of(reader: &Reader<'_>, id: i64) -> Answer<Option<String>> {
    let (found, entries) = (get(reader, id)?, entries(reader, id)?);
    let conclusion = entries.iter().find(|entry| entry.kind == "conclusion");
    Ok(conclusion.map(|entry| canonical(&found, &entries, &entry.text)))
}

/// What is written into the working record.
#[derive(Clone, Debug, Default)]
pub struct NewEntry {
    pub kind: String,
    pub text: String,
    pub other_lot: Option<i64>,
    pub account: Option<i64>,
    pub signature: Option<i64>,
}

pub fn insert_entry(change: &Change<'_>, investigation: i64, new: &NewEntry) -> Answer<i64> {
    change.insert(
        "insert into investigation_entry (investigation, kind, text, other_lot, account, signature)
         values (:investigation, :kind, :text, :other_lot, :account, :signature)",
        named_params! {
            ":investigation": investigation,
            ":kind": new.kind,
            ":text": new.text,
            ":other_lot": new.other_lot,
            ":account": new.account,
            ":signature": new.signature,
        },
    )
}
