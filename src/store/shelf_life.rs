//! Shelf-life assignments of presentations.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::shelf_life::{ExpiryFormat, NewShelfLife};

/// An assignment with who made it.
#[derive(Clone, Debug)]
pub struct ShelfLife {
    pub id: i64,
    pub assigned: NewShelfLife,
    pub assigned_by: String,
    /// As stored: UTC.
    pub assigned_at: String,
}

const SELECT: &str =
    "select s.id, s.presentation, s.market, s.storage_statement, s.months, s.in_use_days, s.basis,
        s.reference, s.effective_from, s.expiry_format, a.full_name, a.at
    from shelf_life_assignment s join trail_act a on a.id = s.act";

fn from_row(row: &Row<'_>) -> rusqlite::Result<ShelfLife> {
    let format: String = row.get(9)?;
    Ok(ShelfLife {
        id: row.get(0)?,
        assigned: NewShelfLife {
            presentation: row.get(1)?,
            market: row.get(2)?,
            storage_statement: row.get(3)?,
            months: row.get(4)?,
            in_use_days: row.get(5)?,
            basis: row.get(6)?,
            reference: row.get(7)?,
            effective_from: row.get::<_, Day>(8)?.0,
            expiry_format: ExpiryFormat::from_code(&format).unwrap_or(ExpiryFormat::Day),
        },
        assigned_by: row.get(10)?,
        assigned_at: row.get(11)?,
    })
}

pub fn insert(change: &Change<'_>, new: &NewShelfLife) -> Answer<i64> {
    change.insert(
        "insert into shelf_life_assignment (presentation, market, storage_statement, months, in_use_days, basis,
             reference, effective_from, expiry_format)
         values (:presentation, :market, :statement, :months, :in_use_days, :basis, :reference, :from, :format)",
        named_params! {
            ":presentation": new.presentation,
            ":market": new.market,
            ":statement": new.storage_statement,
            ":months": new.months,
            ":in_use_days": new.in_use_days,
            ":basis": new.basis,
            ":reference": new.reference,
            ":from": Day(new.effective_from),
            ":format": new.expiry_format.code(),
        },
    )
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<ShelfLife> {
    let sql = format!("{SELECT} where s.id = :id");
    reader.one("shelf life with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All assignments of a presentation, newest first.
pub fn of_presentation(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<ShelfLife>> {
    let sql =
        format!("{SELECT} where s.presentation = :presentation order by s.effective_from desc, s.id desc");
    reader.all(&sql, named_params! { ":presentation": presentation }, from_row)
}

/// The assignment that holds for a lot of a presentation made on a day: the newest that was effective by then.
pub fn for_lot_made_on(
    reader: &Reader<'_>,
    presentation: i64,
    market: &str,
    made_on: chrono::NaiveDate,
) -> Answer<Option<ShelfLife>> {
    let sql = format!(
        "{SELECT} where s.presentation = :presentation and s.market = :market and s.effective_from <= :made_on
         order by s.effective_from desc, s.id desc limit 1"
    );
    reader.maybe(
        &sql,
        named_params! { ":presentation": presentation, ":market": market, ":made_on": Day(made_on) },
        from_row,
    )
}
