//! What the person who decides on a lot has before them: its corrections, and the entry of the trail they saw.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};

/// A value that was changed after it was recorded: was and is, by whom and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Correction {
    pub place: String,
    pub was: String,
    pub is: String,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The corrections that a release of the lot rests on, oldest first: readings of its samples outside the studies,
/// counts of its containers and labels, entries of its record.
pub fn corrections(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Correction>> {
    let mut found = reader.all(
        "select s.number || ', ' || t.title || ', ' || r.field, o.typed, r.typed, coalesce(a.reason, ''), a.full_name,
             a.at
         from sample s
         join sample_test t on t.sample = s.id
         join reading r on r.sample_test = t.id
         join reading o on o.id = r.supersedes
         join trail_act a on a.id = r.act
         where s.lot = :lot and s.pull is null
         order by r.id",
        named_params! { ":lot": lot },
        from_row,
    )?;
    found.extend(reader.all(
        "select i.name || ', ' || e.kind, o.count || '', e.count || '', coalesce(e.why, ''), a.full_name, a.at
         from packaging_item i
         join packaging_entry e on e.item = i.id
         join packaging_entry o on o.id = e.supersedes
         join trail_act a on a.id = e.act
         where i.lot = :lot
         order by e.id",
        named_params! { ":lot": lot },
        from_row,
    )?);
    found.extend(reader.all(
        "select b.number || ', step ' || e.step || ', ' || e.kind || case e.name when '' then '' else ' ' || e.name end,
             o.typed || ' ' || o.unit, e.typed || ' ' || e.unit, coalesce(a.reason, ''), a.full_name, a.at
         from batch_record b
         join step_entry e on e.record = b.id
         join step_entry o on o.id = e.supersedes
         join trail_act a on a.id = e.act
         where b.lot in (:lot, (select bulk_lot from lot where id = :lot))
         order by e.id",
        named_params! { ":lot": lot },
        from_row,
    )?);
    found.sort_by(|one, other| one.at.cmp(&other.at));
    Ok(found)
}

fn from_row(row: &rusqlite::Row<'_>) -> rusqlite::Result<Correction> {
    Ok(Correction {
        place: row.get(0)?,
        was: row.get(1)?,
        is: row.get(2)?,
        why: row.get(3)?,
        by: row.get(4)?,
        at: row.get(5)?,
    })
}

/// The newest entry of the trail that concerns a lot.
pub fn newest_act(reader: &Reader<'_>, lot: i64) -> Answer<i64> {
    reader.one(
        "act",
        "select coalesce(max(act), 0) from trail_subject where kind = 'lot' and subject = :lot",
        named_params! { ":lot": lot },
        |row| row.get(0),
    )
}

/// What was looked at, under the signature of the decision.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LotReview {
    pub up_to_act: i64,
    pub corrections: i64,
    /// Of the corrections, the items and the deviations as they were shown.
    pub digest: String,
}

pub fn insert(change: &Change<'_>, lot: i64, new: &LotReview, signature: i64) -> Answer<i64> {
    change.insert(
        "insert into lot_review (lot, up_to_act, corrections, digest, signature)
         values (:lot, :act, :corrections, :digest, :signature)",
        named_params! {
            ":lot": lot,
            ":act": new.up_to_act,
            ":corrections": new.corrections,
            ":digest": new.digest,
            ":signature": signature,
        },
    )
}

/// What was looked at under a signature, if anything was.
pub fn under(reader: &Reader<'_>, signature: i64) -> Answer<Option<LotReview>> {
    reader.maybe(
        "select up_to_act, corrections, digest from lot_review where signature = :signature",
        named_params! { ":signature": signature },
        |row| Ok(LotReview { up_to_act: row.get(0)?, corrections: row.get(1)?, digest: row.get(2)? }),
    )
}
