//! Storage conditions.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Exact, Reader};
use crate::domain::condition::{self, HumidityRule, NewCondition, Use};
use crate::domain::moment::Moment;

/// A condition as pages and rules need it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Condition {
    pub id: i64,
    /// `25/60`.
    pub code: String,
    /// `25 °C/60 % RH`.
    pub name: String,
    pub temperature_tolerance_c: Option<String>,
    pub humidity_tolerance_percent: Option<String>,
    pub used_for: Use,
    pub least_months: Option<u32>,
    pub source: String,
    pub is_in_catalogue: bool,
}

const SELECT: &str = "select id, code, name, temperature_tolerance_c, humidity_tolerance_percent, use,
        least_months, source, in_catalogue
    from condition";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Condition> {
    Ok(Condition {
        id: row.get(0)?,
        code: row.get(1)?,
        name: row.get(2)?,
        temperature_tolerance_c: row.get(3)?,
        humidity_tolerance_percent: row.get(4)?,
        used_for: Use::from_words(&row.get::<_, String>(5)?),
        least_months: row.get(6)?,
        source: row.get(7)?,
        is_in_catalogue: row.get(8)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Condition> {
    let sql = format!("{SELECT} where id = :id");
    reader.one("condition with this number", &sql, named_params! { ":id": id }, from_row)
}

pub fn by_code(reader: &Reader<'_>, code: &str) -> Answer<Option<Condition>> {
    reader.maybe(&format!("{SELECT} where code = :code"), named_params! { ":code": code }, from_row)
}

/// All conditions that a protocol can name: the catalogue first, then those of the site's own; none imported.
pub fn all(reader: &Reader<'_>) -> Answer<Vec<Condition>> {
    let sql = format!("{SELECT} where source <> 'imported' order by in_catalogue desc, id");
    reader.all(&sql, [], from_row)
}

pub fn insert(change: &Change<'_>, new: &NewCondition, is_in_catalogue: bool) -> Answer<i64> {
    change.insert(
        "insert into condition (code, name, temperature_c, temperature_tolerance_c, humidity_percent,
             humidity_tolerance_percent, humidity_rule, use, least_months, source, in_catalogue)
         values (:code, :name, :temperature, :temperature_tolerance, :humidity, :humidity_tolerance,
             :humidity_rule, :use, :least_months, :source, :in_catalogue)",
        named_params! {
            ":code": new.code,
            ":name": new.name(),
            ":temperature": Exact(new.temperature_c),
            ":temperature_tolerance": Exact(new.temperature_tolerance_c),
            ":humidity": new.humidity_percent.map(Exact),
            ":humidity_tolerance": new.humidity_tolerance_percent.map(Exact),
            ":humidity_rule": new.humidity_rule.words(),
            ":use": new.used_for.words(),
            ":least_months": new.least_months,
            ":source": new.source,
            ":in_catalogue": is_in_catalogue,
        },
    )
}

/// The text that QA signed for a condition outside the catalogue, from its row and the act that added it; `None` for
/// one of the catalogue.
pub fn canonical_of(reader: &Reader<'_>, id: i64) -> Answer<Option<String>> {
    reader.maybe(
        "select c.code, c.temperature_c, c.temperature_tolerance_c, c.humidity_percent,
             c.humidity_tolerance_percent, c.humidity_rule, c.use, c.least_months, c.source,
             coalesce(a.reason, ''), a.at, a.zone
         from condition c join trail_act a on a.id = c.act
         where c.id = :id and c.in_catalogue = 0 and c.source <> 'imported'",
        named_params! { ":id": id },
        |row| {
            let rule: String = row.get(5)?;
            let zone: String = row.get(11)?;
            let added =
                zone.parse().ok().and_then(|zone| Moment::from_stored(&row.get::<_, String>(10).ok()?, zone));
            let new = NewCondition {
                code: row.get(0)?,
                temperature_c: row.get::<_, Exact>(1)?.0,
                temperature_tolerance_c: row.get::<_, Exact>(2)?.0,
                humidity_percent: row.get::<_, Option<Exact>>(3)?.map(|exact| exact.0),
                humidity_tolerance_percent: row.get::<_, Option<Exact>>(4)?.map(|exact| exact.0),
                humidity_rule: HumidityRule::from_words(&rule).ok_or(rusqlite::Error::InvalidQuery)?,
                used_for: Use::from_words(&row.get::<_, String>(6)?),
                least_months: row.get(7)?,
                source: row.get(8)?,
            };
            let added = added.ok_or(rusqlite::Error::InvalidQuery)?;
            Ok(condition::canonical(&new, &row.get::<_, String>(9)?, added.date()))
        },
    )
}
