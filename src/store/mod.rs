//! The only room that speaks SQL: one writer behind the one door, a few read-only connections.

pub mod account;
pub mod amendment;
pub mod attachment;
pub mod batch;
pub mod bench;
pub mod blank_sheet;
pub mod bulk;
pub mod certificate;
pub mod chamber;
pub mod check;
pub mod completeness;
pub mod conclusion;
pub mod condition;
pub mod container;
pub mod definitions;
pub mod deviation;
pub mod door;
pub mod equipment;
pub mod evaluation;
pub mod find;
pub mod flag;
pub mod follow_through;
pub mod formulation;
pub mod import;
pub mod instrument;
pub mod investigation;
pub mod lot;
pub mod lot_decision;
pub mod lot_file;
pub mod lot_review;
pub mod material;
pub mod material_lot;
pub mod method;
pub mod migrate;
pub mod open_pull;
pub mod packaging;
pub mod product;
pub mod protocol;
pub mod pull;
pub mod qualification;
pub mod rack;
pub mod reading;
pub mod result;
pub mod retain;
pub mod review;
pub mod sample;
pub mod series;
pub mod session;
pub mod setting;
pub mod settling;
pub mod shelf_life;
pub mod signature;
pub mod site;
pub mod specification;
pub mod stage;
pub mod stock;
pub mod stop;
pub mod study;
pub mod submission;
pub mod suggestion;
pub mod sweep;
pub mod trail;
pub mod trend;
pub mod trigger;
pub mod verify;
pub mod version;
pub mod week;

use rusqlite::types::{FromSql, ToSql, ToSqlOutput, ValueRef};
use rusqlite::{Connection, OptionalExtension, Params, Row};

use crate::domain::failure::{Failure, Fault};

/// What every store function answers with.
pub type Answer<T> = Result<T, Failure>;

impl From<rusqlite::Error> for Failure {
    fn from(error: rusqlite::Error) -> Failure {
        Failure::Fault(Fault(Box::new(error)))
    }
}

/// A connection that can only read, inside one snapshot.
pub struct Reader<'a> {
    connection: &'a Connection,
}

impl<'a> Reader<'a> {
    pub(in crate::store) fn over(connection: &'a Connection) -> Reader<'a> {
        Reader { connection }
    }

    /// The first row of a query, if there is one.
    pub(in crate::store) fn maybe<T>(
        &self,
        sql: &str,
        params: impl Params,
        map: impl FnOnce(&Row<'_>) -> rusqlite::Result<T>,
    ) -> Answer<Option<T>> {
        Ok(self.connection.prepare_cached(sql)?.query_row(params, map).optional()?)
    }

    /// The one row of a query; without it, `Missing` with these words.
    pub(in crate::store) fn one<T>(
        &self,
        what: &str,
        sql: &str,
        params: impl Params,
        map: impl FnOnce(&Row<'_>) -> rusqlite::Result<T>,
    ) -> Answer<T> {
        self.maybe(sql, params, map)?.ok_or_else(|| Failure::missing(what))
    }

    /// All rows of a query.
    pub(in crate::store) fn all<T>(
        &self,
        sql: &str,
        params: impl Params,
        map: impl FnMut(&Row<'_>) -> rusqlite::Result<T>,
    ) -> Answer<Vec<T>> {
        let mut statement = self.connection.prepare_cached(sql)?;
        let rows = statement.query_map(params, map)?.collect::<Result<Vec<T>, _>>()?;
        Ok(rows)
    }

    /// Walks all rows without keeping them.
    pub(in crate::store) fn each(
        &self,
        sql: &str,
        params: impl Params,
        mut visit: impl FnMut(&Row<'_>) -> Answer<()>,
    ) -> Answer<()> {
        let mut statement = self.connection.prepare(sql)?;
        let mut rows = statement.query(params)?;
        while let Some(row) = rows.next()? {
            visit(row)?;
        }
        Ok(())
    }

    pub(in crate::store) fn exists(&self, sql: &str, params: impl Params) -> Answer<bool> {
        Ok(self.maybe(sql, params, |_| Ok(()))?.is_some())
    }

    pub(in crate::store) fn connection(&self) -> &Connection {
        self.connection
    }
}

/// An exact decimal in a text column.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Exact(pub rust_decimal::Decimal);

impl ToSql for Exact {
    fn to_sql(&self) -> rusqlite::Result<ToSqlOutput<'_>> {
        Ok(ToSqlOutput::from(self.0.to_string()))
    }
}

impl FromSql for Exact {
    fn column_result(value: ValueRef<'_>) -> rusqlite::types::FromSqlResult<Self> {
        let text = value.as_str()?;
        rust_decimal::Decimal::from_str_exact(text)
            .map(Exact)
            .map_err(|error| rusqlite::types::FromSqlError::Other(Box::new(error)))
    }
}

/// A calendar date in a text column.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Day(pub chrono::NaiveDate);

impl ToSql for Day {
    fn to_sql(&self) -> rusqlite::Result<ToSqlOutput<'_>> {
        Ok(ToSqlOutput::from(crate::domain::moment::date_stored(self.0)))
    }
}

impl FromSql for Day {
    fn column_result(value: ValueRef<'_>) -> rusqlite::types::FromSqlResult<Self> {
        crate::domain::moment::date_from_stored(value.as_str()?)
            .map(Day)
            .ok_or(rusqlite::types::FromSqlError::InvalidType)
    }
}

/// A new time-ordered uuid for a record that leaves the house.
pub fn new_uuid() -> Vec<u8> {
    uuid::Uuid::now_v7().as_bytes().to_vec()
}
