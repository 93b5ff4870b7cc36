//! Sessions on the server, and the counters that make password guessing slow. Technical tables.

use rusqlite::named_params;

use super::door::Housekeeping;
use super::{Answer, Reader};
use crate::domain::moment::Moment;

/// A live session as a request finds it.
#[derive(Clone, Debug)]
pub struct Session {
    pub token_digest: String,
    pub account: i64,
    pub started_at: String,
    pub last_seen: String,
    pub address: Option<String>,
    pub agent: Option<String>,
}

/// At most this many sessions a person; the oldest ends (ASVS 7.1.2).
const MOST_SESSIONS: i64 = 5;

pub fn start(work: &Housekeeping<'_>, session: &Session) -> Answer<()> {
    work.execute(
        "insert into session (token_digest, account, started_at, last_seen, address, agent)
         values (:digest, :account, :started_at, :last_seen, :address, :agent)",
        named_params! {
            ":digest": session.token_digest,
            ":account": session.account,
            ":started_at": session.started_at,
            ":last_seen": session.last_seen,
            ":address": session.address,
            ":agent": session.agent,
        },
    )?;
    work.execute(
        "update session set ended_at = :at
         where ended_at is null and account = :account and token_digest not in (
             select token_digest from session
             where account = :account and ended_at is null
             order by last_seen desc, started_at desc limit :most)",
        named_params! { ":account": session.account, ":at": session.started_at, ":most": MOST_SESSIONS },
    )?;
    Ok(())
}

pub fn find(reader: &Reader<'_>, token_digest: &str) -> Answer<Option<Session>> {
    reader.maybe(
        "select token_digest, account, started_at, last_seen, address, agent
         from session
         where token_digest = :digest and ended_at is null",
        named_params! { ":digest": token_digest },
        from_row,
    )
}

pub fn of_account(reader: &Reader<'_>, account: i64) -> Answer<Vec<Session>> {
    reader.all(
        "select token_digest, account, started_at, last_seen, address, agent
         from session
         where account = :account and ended_at is null
         order by last_seen desc",
        named_params! { ":account": account },
        from_row,
    )
}

fn from_row(row: &rusqlite::Row<'_>) -> rusqlite::Result<Session> {
    Ok(Session {
        token_digest: row.get(0)?,
        account: row.get(1)?,
        started_at: row.get(2)?,
        last_seen: row.get(3)?,
        address: row.get(4)?,
        agent: row.get(5)?,
    })
}

pub fn touch(work: &Housekeeping<'_>, token_digest: &str, at: Moment) -> Answer<()> {
    work.execute(
        "update session set last_seen = :at where token_digest = :digest",
        named_params! { ":digest": token_digest, ":at": at.stored() },
    )?;
    Ok(())
}

pub fn end(work: &Housekeeping<'_>, token_digest: &str, at: Moment) -> Answer<()> {
    work.execute(
        "update session set ended_at = :at where token_digest = :digest and ended_at is null",
        named_params! { ":digest": token_digest, ":at": at.stored() },
    )?;
    Ok(())
}

/// Ends every session of an account, at once. Called inside the act that disables it.
pub fn end_all(change: &super::door::Change<'_>, account: i64) -> Answer<()> {
    change.execute(
        "update session set ended_at = :at where account = :account and ended_at is null",
        named_params! { ":account": account, ":at": change.actor().at.stored() },
    )?;
    Ok(())
}

/// Failures counted under one key (an account, an address, a known browser).
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Failures {
    pub count: u32,
    pub wait_until: Option<String>,
}

pub fn failures(reader: &Reader<'_>, key: &str) -> Answer<Failures> {
    let found = reader.maybe(
        "select failures, wait_until from sign_in_counter where key = :key",
        named_params! { ":key": key },
        |row| Ok(Failures { count: row.get(0)?, wait_until: row.get(1)? }),
    )?;
    Ok(found.unwrap_or_default())
}

pub fn count_failure(work: &Housekeeping<'_>, key: &str, failures: &Failures, at: Moment) -> Answer<()> {
    work.execute(
        "insert into sign_in_counter (key, failures, last_at, wait_until)
         values (:key, :failures, :at, :wait_until)
         on conflict (key) do update
         set failures = excluded.failures, last_at = excluded.last_at, wait_until = excluded.wait_until",
        named_params! {
            ":key": key,
            ":failures": failures.count,
            ":at": at.stored(),
            ":wait_until": failures.wait_until,
        },
    )?;
    Ok(())
}

pub fn forget_failures(work: &Housekeeping<'_>, key: &str) -> Answer<()> {
    work.execute("delete from sign_in_counter where key = :key", named_params! { ":key": key })?;
    Ok(())
}

/// Notes that a page was read, for readers whose reading is logged.
pub fn log_reading(work: &Housekeeping<'_>, account: i64, path: &str, at: Moment) -> Answer<()> {
    work.execute(
        "insert into reading_log (account, path, at) values (:account, :path, :at)",
        named_params! { ":account": account, ":path": path, ":at": at.stored() },
    )?;
    Ok(())
}
