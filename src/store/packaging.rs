//! Containers and labels of a lot: what is counted, each count, and the checks.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::packaging::{
    Count, CountKind, NewCount, NewPackagingItem, PackagingFacts, Reconciliation,
};

/// An item with its counts.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PackagingItem {
    pub id: i64,
    pub lot: i64,
    pub kind: String,
    pub material_lot: Option<(i64, String)>,
    pub facts: PackagingFacts,
    /// The check that stands, if one was made.
    pub check: Option<PackagingCheck>,
}

/// A second person's check.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PackagingCheck {
    pub newest_entry: i64,
    pub issued: i64,
    pub accounted: i64,
    pub percent: String,
    pub deviation: Option<(i64, i64)>,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

const SELECT: &str =
    "select i.id, i.lot, i.kind, i.name, m.id, m.number, i.least_percent, i.most_percent, l.number,
        exists (select 1 from lot_decision where lot = i.lot),
        c.newest_entry, c.issued, c.accounted, c.percent, d.id, d.number, a.full_name, a.at
    from packaging_item i
    join lot l on l.id = i.lot
    left join material_lot m on m.id = i.material_lot
    left join packaging_check c on c.id = (select max(id) from packaging_check where item = i.id)
    left join deviation d on d.id = c.deviation
    left join trail_act a on a.id = c.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<PackagingItem> {
    let named = |first: usize| -> rusqlite::Result<Option<(i64, String)>> {
        let id: Option<i64> = row.get(first)?;
        let name: Option<String> = row.get(first + 1)?;
        Ok(id.zip(name))
    };
    let checked_up_to: Option<i64> = row.get(10)?;
    let check = match checked_up_to {
        None => None,
        Some(newest_entry) => {
            let (id, number): (Option<i64>, Option<i64>) = (row.get(14)?, row.get(15)?);
            Some(PackagingCheck {
                newest_entry,
                issued: row.get(11)?,
                accounted: row.get(12)?,
                percent: row.get(13)?,
                deviation: id.zip(number),
                by: row.get(16)?,
                at: row.get(17)?,
            })
        }
    };
    Ok(PackagingItem {
        id: row.get(0)?,
        lot: row.get(1)?,
        kind: row.get(2)?,
        material_lot: named(4)?,
        facts: PackagingFacts {
            name: row.get(3)?,
            lot_number: row.get(8)?,
            is_decided: row.get(9)?,
            counts: Vec::new(),
            checked_up_to,
            least_percent: row.get::<_, Exact>(6)?.0,
            most_percent: row.get::<_, Exact>(7)?.0,
        },
        check,
    })
}

/// An item with its counts.
pub fn get(reader: &Reader<'_>, id: i64) -> Answer<PackagingItem> {
    let sql = format!("{SELECT} where i.id = :id");
    let mut found =
        reader.one("packaging item with this number", &sql, named_params! { ":id": id }, from_row)?;
    found.facts.counts = counts(reader, found.lot)?
        .into_iter()
        .filter(|(item, _)| *item == id)
        .map(|(_, line)| line.count)
        .collect();
    Ok(found)
}

/// The items of a lot with their counts, in the order they were added.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<PackagingItem>> {
    let sql = format!("{SELECT} where i.lot = :lot order by i.id");
    let mut found = reader.all(&sql, named_params! { ":lot": lot }, from_row)?;
    for (item, line) in counts(reader, lot)? {
        if let Some(place) = found.iter_mut().find(|one| one.id == item) {
            place.facts.counts.push(line.count);
        }
    }
    Ok(found)
}

/// A count as the page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CountLine {
    pub count: Count,
    pub supersedes: Option<i64>,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The counts of a lot with the item of each, oldest first.
pub fn counts(reader: &Reader<'_>, lot: i64) -> Answer<Vec<(i64, CountLine)>> {
    reader.all(
        "select e.item, e.id, e.kind, e.count, exists (select 1 from packaging_entry where supersedes = e.id),
             a.account, e.supersedes, coalesce(e.why, ''), a.full_name, a.at
         from packaging_item i
         join packaging_entry e on e.item = i.id
         join trail_act a on a.id = e.act
         where i.lot = :lot
         order by e.id",
        named_params! { ":lot": lot },
        |row| {
            let kind: String = row.get(2)?;
            let count = Count {
                id: row.get(1)?,
                kind: CountKind::from_words(&kind).unwrap_or(CountKind::Issued),
                count: row.get(3)?,
                is_superseded: row.get(4)?,
                by: row.get(5)?,
            };
            let line = CountLine {
                count,
                supersedes: row.get(6)?,
                why: row.get(7)?,
                by: row.get(8)?,
                at: row.get(9)?,
            };
            Ok((row.get(0)?, line))
        },
    )
}

pub fn insert_item(change: &Change<'_>, lot: i64, new: &NewPackagingItem) -> Answer<i64> {
    change.insert(
        "insert into packaging_item (lot, kind, name, material_lot, least_percent, most_percent)
         values (:lot, :kind, :name, :material_lot, :least, :most)",
        named_params! {
            ":lot": lot,
            ":kind": new.kind,
            ":name": new.name,
            ":material_lot": new.material_lot,
            ":least": Exact(new.least_percent),
            ":most": Exact(new.most_percent),
        },
    )
}

pub fn insert_count(change: &Change<'_>, item: i64, new: &NewCount) -> Answer<i64> {
    change.insert(
        "insert into packaging_entry (item, kind, count, supersedes, why)
         values (:item, :kind, :count, :supersedes, :why)",
        named_params! {
            ":item": item,
            ":kind": new.kind.words(),
            ":count": new.count,
            ":supersedes": new.supersedes,
            ":why": (!new.why.is_empty()).then_some(&new.why),
        },
    )
}

pub fn insert_check(
    change: &Change<'_>,
    item: &PackagingItem,
    found: &Reconciliation,
    deviation: Option<i64>,
) -> Answer<i64> {
    let newest: Option<i64> = item.facts.counts.iter().map(|count| count.id).max();
    let percent: Decimal = found.percent;
    change.insert(
        "insert into packaging_check (item, issued, accounted, percent, newest_entry, deviation, account)
         values (:item, :issued, :accounted, :percent, :newest, :deviation, :account)",
        named_params! {
            ":item": item.id,
            ":issued": found.issued,
            ":accounted": found.accounted,
            ":percent": Exact(percent),
            ":newest": newest,
            ":deviation": deviation,
            ":account": change.actor().account,
        },
    )
}
