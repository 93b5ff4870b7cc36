//! Material lots: deliveries, their status, assay and ledger.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Exact, Reader, new_uuid};
use crate::domain::material_lot::{MaterialLotFacts, MaterialStatus, NewAssay, NewMaterialLot, NewStatus};

/// A material lot with what its list and page show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MaterialLot {
    pub facts: MaterialLotFacts,
    pub material_code: String,
    pub supplier: String,
    pub supplier_lot: String,
    pub received_on: NaiveDate,
    pub quantity: String,
    pub packages: Option<i64>,
    pub location: String,
}

const SELECT: &str = "select l.id, l.number, l.material, m.name, s.status,
        coalesce((select retest_on from material_lot_status
            where material_lot = l.id and retest_on is not null order by id desc limit 1), l.retest_on),
        l.expires_on, l.unit,
        coalesce((select balance from stock_entry where material_lot = l.id order by id desc limit 1), '0'),
        m.code, l.supplier, l.supplier_lot, l.received_on, l.quantity, l.packages, l.location
    from material_lot l
    join material m on m.id = l.material
    join material_lot_status s on s.id = (select max(id) from material_lot_status where material_lot = l.id)";

fn from_row(row: &Row<'_>) -> rusqlite::Result<MaterialLot> {
    let status: String = row.get(4)?;
    let day = |found: Option<Day>| found.map(|day| day.0);
    Ok(MaterialLot {
        facts: MaterialLotFacts {
            id: row.get(0)?,
            number: row.get(1)?,
            material: row.get(2)?,
            material_name: row.get(3)?,
            status: MaterialStatus::from_words(&status).unwrap_or(MaterialStatus::Quarantine),
            retest_on: day(row.get(5)?),
            expires_on: day(row.get(6)?),
            unit: row.get(7)?,
            balance: row.get::<_, Exact>(8)?.0,
        },
        material_code: row.get(9)?,
        supplier: row.get(10)?,
        supplier_lot: row.get(11)?,
        received_on: row.get::<_, Day>(12)?.0,
        quantity: row.get(13)?,
        packages: row.get(14)?,
        location: row.get(15)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<MaterialLot> {
    let sql = format!("{SELECT} where l.id = :id");
    reader.one("material lot with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The material lot whose label was scanned or typed: its number, capitals aside.
pub fn by_scan(reader: &Reader<'_>, scanned: &str) -> Answer<Option<MaterialLot>> {
    let sql = format!("{SELECT} where l.number = :number");
    reader.maybe(&sql, named_params! { ":number": scanned.trim() }, from_row)
}

/// Material lots newest first, those recorded before `before`, at most `limit`: paging by key.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<MaterialLot>> {
    let sql = format!("{SELECT} where l.id < :before order by l.id desc limit :limit");
    reader.all(&sql, named_params! { ":before": before.unwrap_or(i64::MAX), ":limit": limit }, from_row)
}

/// The lots of a material, oldest first: what a dispensing can take from.
pub fn of_material(reader: &Reader<'_>, material: i64) -> Answer<Vec<MaterialLot>> {
    let sql = format!("{SELECT} where l.material = :material order by l.id");
    reader.all(&sql, named_params! { ":material": material }, from_row)
}

pub fn insert(change: &Change<'_>, new: &NewMaterialLot) -> Answer<i64> {
    change.insert(
        "insert into material_lot (uuid, material, number, supplier, supplier_lot, received_on, quantity, unit,
             packages, retest_on, expires_on, location)
         values (:uuid, :material, :number, :supplier, :supplier_lot, :received_on, :quantity, :unit,
             :packages, :retest_on, :expires_on, :location)",
        named_params! {
            ":uuid": new_uuid(),
            ":material": new.material,
            ":number": new.number,
            ":supplier": new.supplier,
            ":supplier_lot": new.supplier_lot,
            ":received_on": Day(new.received_on),
            ":quantity": Exact(new.quantity),
            ":unit": new.unit,
            ":packages": new.packages,
            ":retest_on": new.retest_on.map(Day),
            ":expires_on": new.expires_on.map(Day),
            ":location": new.location,
        },
    )
}

/// The assay and water that count now.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Assay {
    pub recorded: NewAssay,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// Assays of a material lot, newest first; the first counts.
pub fn assays(reader: &Reader<'_>, material_lot: i64) -> Answer<Vec<Assay>> {
    reader.all(
        "select e.assay, coalesce(e.assay_unit, ''), coalesce(e.assay_basis, ''), e.water,
             coalesce(e.water_unit, ''), e.reference, a.full_name, a.at
         from material_lot_assay e join trail_act a on a.id = e.act
         where e.material_lot = :lot
         order by e.id desc",
        named_params! { ":lot": material_lot },
        |row| {
            Ok(Assay {
                recorded: NewAssay {
                    assay: row.get::<_, Option<Exact>>(0)?.map(|exact| exact.0),
                    assay_unit: row.get(1)?,
                    assay_basis: row.get(2)?,
                    water: row.get::<_, Option<Exact>>(3)?.map(|exact| exact.0),
                    water_unit: row.get(4)?,
                    reference: row.get(5)?,
                },
                by: row.get(6)?,
                at: row.get(7)?,
            })
        },
    )
}

pub fn insert_assay(change: &Change<'_>, material_lot: i64, new: &NewAssay) -> Answer<i64> {
    change.insert(
        "insert into material_lot_assay (material_lot, assay, assay_unit, assay_basis, water, water_unit, reference)
         values (:lot, :assay, :assay_unit, :basis, :water, :water_unit, :reference)",
        named_params! {
            ":lot": material_lot,
            ":assay": new.assay.map(Exact),
            ":assay_unit": new.assay.map(|_| &new.assay_unit),
            ":basis": new.assay.map(|_| &new.assay_basis),
            ":water": new.water.map(Exact),
            ":water_unit": new.water.map(|_| &new.water_unit),
            ":reference": new.reference,
        },
    )
}

pub fn insert_status(
    change: &Change<'_>,
    material_lot: i64,
    new: &NewStatus,
    signature: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into material_lot_status (material_lot, status, retest_on, why, signature)
         values (:lot, :status, :retest_on, :why, :signature)",
        named_params! {
            ":lot": material_lot,
            ":status": new.status.words(),
            ":retest_on": new.retest_on.map(Day),
            ":why": new.why,
            ":signature": signature,
        },
    )
}

/// The text that is signed under a status.
pub fn canonical(facts: &MaterialLotFacts, new: &NewStatus) -> String {
    let retest = new.retest_on.map_or("as before".to_string(), |day| day.to_string());
    format!(
        "material lot {} of {}\nstatus {}\nnext retest {retest}\nbecause {}\n",
        facts.number,
        facts.material_name,
        new.status.words(),
        new.why
    )
}

/// The text that a signature under a material lot went over, from the rows as they are.
pub fn canonical_of_signature(reader: &Reader<'_>, signature: i64) -> Answer<Option<String>> {
    let found = reader.maybe(
        "select material_lot, status, retest_on, why from material_lot_status where signature = :signature",
        named_params! { ":signature": signature },
        |row| {
            let status: String = row.get(1)?;
            let new = NewStatus {
                status: MaterialStatus::from_words(&status).unwrap_or(MaterialStatus::Quarantine),
                retest_on: row.get::<_, Option<Day>>(2)?.map(|day| day.0),
                why: row.get(3)?,
            };
            Ok((row.get::<_, i64>(0)?, new))
        },
    )?;
    let Some((lot, new)) = found else { return Ok(None) };
    Ok(Some(canonical(&get(reader, lot)?.facts, &new)))
}

/// A status row as the page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StatusLine {
    pub status: String,
    pub retest_on: Option<NaiveDate>,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
}

/// The statuses of a material lot, newest first.
pub fn statuses(reader: &Reader<'_>, material_lot: i64) -> Answer<Vec<StatusLine>> {
    reader.all(
        "select s.status, s.retest_on, s.why, a.full_name, a.at
         from material_lot_status s join trail_act a on a.id = s.act
         where s.material_lot = :lot
         order by s.id desc",
        named_params! { ":lot": material_lot },
        |row| {
            Ok(StatusLine {
                status: row.get(0)?,
                retest_on: row.get::<_, Option<Day>>(1)?.map(|day| day.0),
                why: row.get(2)?,
                by: row.get(3)?,
                at: row.get(4)?,
            })
        },
    )
}
