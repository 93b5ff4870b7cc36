//! Overrides of a register's stop: one person or instrument, one day, one signature.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::stop::{NewOverride, Stop};

pub fn insert(change: &Change<'_>, new: &NewOverride, signature: i64) -> Answer<i64> {
    change.insert(
        "insert into stop_override (stop, instrument, account, method_version, valid_on, signature)
         values (:stop, :instrument, :account, :method_version, :valid_on, :signature)",
        named_params! {
            ":stop": new.stop.words(),
            ":instrument": new.instrument,
            ":account": new.account,
            ":method_version": new.method_version,
            ":valid_on": Day(new.valid_on),
            ":signature": signature,
        },
    )
}

/// An override with what it lifts in words and who signed it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Override {
    pub lifted: NewOverride,
    /// `calibration of PH-02`, `qualification of Rafe Tolland for PH-01 version 2`.
    pub words: String,
    pub signature: i64,
    pub signer_name: String,
    /// As stored: UTC.
    pub signed_at: String,
    pub digest: String,
}

const SELECT: &str = "select o.stop, o.instrument, o.account, o.method_version, o.valid_on, s.statement,
        coalesce(i.code, p.full_name || ' for ' || m.code || ' version ' || v.number),
        s.id, s.signer_name, a.at, s.digest
    from stop_override o
    join signature s on s.id = o.signature
    join trail_act a on a.id = o.act
    left join instrument i on i.id = o.instrument
    left join account p on p.id = o.account
    left join method_version v on v.id = o.method_version
    left join method m on m.id = v.method";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Override> {
    let stop: String = row.get(0)?;
    let whose: String = row.get::<_, Option<String>>(6)?.unwrap_or_default();
    Ok(Override {
        lifted: NewOverride {
            stop: Stop::from_words(&stop).ok_or(rusqlite::Error::InvalidQuery)?,
            instrument: row.get(1)?,
            account: row.get(2)?,
            method_version: row.get(3)?,
            valid_on: row.get::<_, Day>(4)?.0,
            reason: row.get::<_, Option<String>>(5)?.unwrap_or_default(),
        },
        words: format!("{stop} of {whose}"),
        signature: row.get(7)?,
        signer_name: row.get(8)?,
        signed_at: row.get(9)?,
        digest: row.get(10)?,
    })
}

/// The override that a signature stands under: its signed text is `lifted.canonical()`.
pub fn of_signature(reader: &Reader<'_>, signature: i64) -> Answer<Option<Override>> {
    reader.maybe(
        &format!("{SELECT} where o.signature = :signature"),
        named_params! { ":signature": signature },
        from_row,
    )
}

/// The overrides of an instrument, newest first.
pub fn of_instrument(reader: &Reader<'_>, instrument: i64) -> Answer<Vec<Override>> {
    reader.all(
        &format!("{SELECT} where o.instrument = :instrument order by o.id desc"),
        named_params! { ":instrument": instrument },
        from_row,
    )
}

/// The overrides for a day or later, newest first.
pub fn since(reader: &Reader<'_>, day: NaiveDate) -> Answer<Vec<Override>> {
    reader.all(
        &format!("{SELECT} where o.valid_on >= :day order by o.id desc"),
        named_params! { ":day": Day(day) },
        from_row,
    )
}
