//! Materials, and the formulation versions that name them.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Exact, Reader, new_uuid};
use crate::domain::material::NewMaterial;

#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Material {
    pub id: i64,
    pub code: String,
    pub name: String,
    pub function: String,
    pub density_g_per_ml: Option<rust_decimal::Decimal>,
}

const SELECT: &str = "select id, code, name, function, density_g_per_ml from material";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Material> {
    Ok(Material {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        function: row.get(3)?,
        density_g_per_ml: row.get::<_, Option<Exact>>(4)?.map(|exact| exact.0),
    })
}

pub fn insert(change: &Change<'_>, new: &NewMaterial) -> Answer<i64> {
    change.insert(
        "insert into material (uuid, code, name, function, density_g_per_ml)
         values (:uuid, :code, :name, :function, :density)",
        named_params! {
            ":uuid": new_uuid(),
            ":code": new.code,
            ":name": new.name,
            ":function": new.function,
            ":density": new.density_g_per_ml.map(Exact),
        },
    )
}

pub fn is_code_taken(reader: &Reader<'_>, code: &str) -> Answer<bool> {
    reader.exists("select 1 from material where code = :code", named_params! { ":code": code })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Material> {
    let sql = format!("{SELECT} where id = :id");
    reader.one("material with this number", &sql, named_params! { ":id": id }, from_row)
}

/// All materials by name.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Material>> {
    reader.all(&format!("{SELECT} order by name, code"), [], from_row)
}

/// A formulation version that names a material, with its quantity.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Use {
    pub formulation_version: i64,
    pub formulation_code: String,
    pub number: i64,
    pub quantity: String,
    pub unit: String,
    pub function: String,
}

/// The formulation versions that name a material, the newest of each formulation first.
pub fn uses(reader: &Reader<'_>, material: i64) -> Answer<Vec<Use>> {
    reader.all(
        "select v.id, f.code, v.number, i.value ->> 'quantity', i.value ->> 'unit', i.value ->> 'function'
         from formulation_version v
         join formulation f on f.id = v.formulation,
         json_each(v.content, '$.ingredients') i
         where i.value ->> 'material' = :material
         order by f.code, v.number desc",
        named_params! { ":material": material },
        |row| {
            Ok(Use {
                formulation_version: row.get(0)?,
                formulation_code: row.get(1)?,
                number: row.get(2)?,
                quantity: row.get(3)?,
                unit: row.get(4)?,
                function: row.get(5)?,
            })
        },
    )
}
