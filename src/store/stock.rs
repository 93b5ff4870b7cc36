//! The ledgers of material lots. A trigger holds each balance to the one before it and above zero.

use rusqlite::functions::FunctionFlags;
use rusqlite::{Connection, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::stock::EntryKind;

/// A movement about to be entered, with the balance it leaves.
#[derive(Clone, Debug)]
pub struct NewStockEntry {
    pub material_lot: i64,
    pub kind: EntryKind,
    /// What it adds: less than zero where something leaves.
    pub quantity: Decimal,
    pub balance: Decimal,
    pub lot: Option<i64>,
    pub why: Option<String>,
    pub witness: Option<i64>,
}

pub fn insert(change: &Change<'_>, new: &NewStockEntry) -> Answer<i64> {
    change.insert(
        "insert into stock_entry (material_lot, kind, quantity, balance, lot, why, witness)
         values (:material_lot, :kind, :quantity, :balance, :lot, :why, :witness)",
        named_params! {
            ":material_lot": new.material_lot,
            ":kind": new.kind.words(),
            ":quantity": Exact(new.quantity),
            ":balance": Exact(new.balance),
            ":lot": new.lot,
            ":why": new.why,
            ":witness": new.witness,
        },
    )
}

/// A line of a ledger.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StockEntry {
    pub id: i64,
    pub kind: String,
    pub quantity: Decimal,
    pub balance: Decimal,
    pub lot: Option<(i64, String)>,
    pub why: String,
    pub witness: Option<String>,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The ledger of a material lot, newest first, at most `limit` lines.
pub fn of_material_lot(reader: &Reader<'_>, material_lot: i64, limit: i64) -> Answer<Vec<StockEntry>> {
    reader.all(
        "select e.id, e.kind, e.quantity, e.balance, l.id, l.number, coalesce(e.why, ''), w.full_name,
             a.full_name, a.at
         from stock_entry e
         join trail_act a on a.id = e.act
         left join lot l on l.id = e.lot
         left join account w on w.id = e.witness
         where e.material_lot = :lot
         order by e.id desc
         limit :limit",
        named_params! { ":lot": material_lot, ":limit": limit },
        |row| {
            let lot: Option<i64> = row.get(4)?;
            let number: Option<String> = row.get(5)?;
            Ok(StockEntry {
                id: row.get(0)?,
                kind: row.get(1)?,
                quantity: row.get::<_, Exact>(2)?.0,
                balance: row.get::<_, Exact>(3)?.0,
                lot: lot.zip(number),
                why: row.get(6)?,
                witness: row.get(7)?,
                by: row.get(8)?,
                at: row.get(9)?,
            })
        },
    )
}

/// What a lot took from a material lot and did not bring back.
pub fn taken_by(reader: &Reader<'_>, material_lot: i64, lot: i64) -> Answer<Decimal> {
    let moved = reader.all(
        "select quantity from stock_entry where material_lot = :material_lot and lot = :lot",
        named_params! { ":material_lot": material_lot, ":lot": lot },
        |row| Ok(row.get::<_, Exact>(0)?.0),
    )?;
    Ok(-moved.into_iter().sum::<Decimal>())
}

/// What a lot was made from: material, material lot and the quantity it took in all.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Dispensed {
    pub material_lot: i64,
    pub number: String,
    pub material: String,
    pub quantity: Decimal,
    pub unit: String,
}

/// The material lots a lot took from, in the order they were first taken.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Dispensed>> {
    let rows = reader.all(
        "select m.id, m.number, t.name, e.quantity, m.unit
         from stock_entry e
         join material_lot m on m.id = e.material_lot
         join material t on t.id = m.material
         where e.lot = :lot
         order by e.id",
        named_params! { ":lot": lot },
        |row| {
            Ok(Dispensed {
                material_lot: row.get(0)?,
                number: row.get(1)?,
                material: row.get(2)?,
                quantity: -row.get::<_, Exact>(3)?.0,
                unit: row.get(4)?,
            })
        },
    )?;
    let mut whole: Vec<Dispensed> = Vec::new();
    for row in rows {
        match whole.iter_mut().find(|one| one.material_lot == row.material_lot) {
            Some(one) => one.quantity += row.quantity,
            None => whole.push(row),
        }
    }
    Ok(whole)
}

/// Makes exact addition a function of SQL: whether the first two decimals sum to the third.
pub(in crate::store) fn register_function(connection: &Connection) -> Answer<()> {
    let pure =
        FunctionFlags::SQLITE_UTF8 | FunctionFlags::SQLITE_INNOCUOUS | FunctionFlags::SQLITE_DETERMINISTIC;
    connection.create_scalar_function("sums_to", 3, pure, |context| {
        let read = |at: usize| {
            let text = context.get_raw(at).as_str().unwrap_or_default().to_string();
            Decimal::from_str_exact(&text).ok()
        };
        let sum = read(0).zip(read(1)).and_then(|(before, change)| before.checked_add(change));
        Ok(sum.is_some() && sum == read(2))
    })?;
    Ok(())
}
