//! Formulations, and the lots made to their versions.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader, new_uuid};
use crate::domain::formulation::NewFormulation;

/// A formulation with its product and where its versions stand.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Formulation {
    pub id: i64,
    pub product: i64,
    pub product_code: String,
    pub product_name: String,
    pub code: String,
    pub name: String,
    pub versions: i64,
    /// Number of the newest approved version.
    pub approved: Option<i64>,
    pub lots: i64,
}

const SELECT: &str = "select f.id, p.id, p.code, p.name, f.code, f.name,
        (select count(*) from formulation_version where formulation = f.id),
        (select max(v.number) from formulation_version v where v.formulation = f.id and exists (
            select 1 from signature
            where kind = 'formulation_version' and subject = v.id and meaning = 'approval')),
        (select count(*) from formulation_version v join lot l on l.formulation_version = v.id
         where v.formulation = f.id)
    from formulation f join product p on p.id = f.product";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Formulation> {
    Ok(Formulation {
        id: row.get(0)?,
        product: row.get(1)?,
        product_code: row.get(2)?,
        product_name: row.get(3)?,
        code: row.get(4)?,
        name: row.get(5)?,
        versions: row.get(6)?,
        approved: row.get(7)?,
        lots: row.get(8)?,
    })
}

pub fn insert(change: &Change<'_>, new: &NewFormulation) -> Answer<i64> {
    change.insert(
        "insert into formulation (uuid, product, code, name) values (:uuid, :product, :code, :name)",
        named_params! {
            ":uuid": new_uuid(),
            ":product": new.product,
            ":code": new.code,
            ":name": new.name,
        },
    )
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from formulation where code = :code", named_params! { ":code": code })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Formulation> {
    let sql = format!("{SELECT} where f.id = :id");
    reader.one("formulation with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All formulations by product and code.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Formulation>> {
    reader.all(&format!("{SELECT} order by p.code, f.code"), [], from_row)
}

/// The formulations of a product by code.
pub fn of_product(reader: &Reader<'_>, product: i64) -> Answer<Vec<Formulation>> {
    let sql = format!("{SELECT} where f.product = :product order by f.code");
    reader.all(&sql, named_params! { ":product": product }, from_row)
}

/// A lot made to a version.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Lot {
    pub id: i64,
    pub number: String,
    pub made_on: Option<NaiveDate>,
    pub formulation_version: i64,
}

/// The lots made to any version of a formulation, newest first.
pub fn lots(reader: &Reader<'_>, formulation: i64) -> Answer<Vec<Lot>> {
    reader.all(
        "select l.id, l.number, l.made_on, v.id
         from formulation_version v join lot l on l.formulation_version = v.id
         where v.formulation = :formulation
         order by l.id desc",
        named_params! { ":formulation": formulation },
        |row| {
            Ok(Lot {
                id: row.get(0)?,
                number: row.get(1)?,
                made_on: row.get::<_, Option<Day>>(2)?.map(|day| day.0),
                formulation_version: row.get(3)?,
            })
        },
    )
}

/// The import that brought a formulation version: its number and file name.
pub fn import_of(reader: &Reader<'_>, version: i64) -> Answer<Option<(i64, String)>> {
    reader.maybe(
        "select i.id, i.file_name
         from formulation_version v
         join import i on i.id = v.imported
         where v.id = :version",
        named_params! { ":version": version },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}
