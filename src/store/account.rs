//! Accounts, their roles and states, and one-time codes.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::actor::{CLOCK, CONSOLE};
use crate::domain::role::Role;

/// An account with what counts now.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Account {
    pub id: i64,
    pub user_name: String,
    pub full_name: String,
    pub is_person: bool,
    pub roles: Vec<Role>,
    pub is_enabled: bool,
    pub password_hash: Option<String>,
}

const SELECT: &str = "select a.id, a.user_name, a.full_name, a.kind,
        coalesce((select roles from account_roles where account = a.id order by id desc limit 1), ''),
        coalesce((select state from account_state where account = a.id order by id desc limit 1), 'enabled'),
        a.password_hash
    from account a";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Account> {
    let roles: String = row.get(4)?;
    Ok(Account {
        id: row.get(0)?,
        user_name: row.get(1)?,
        full_name: row.get(2)?,
        is_person: row.get::<_, String>(3)? == "person",
        roles: roles.split(',').filter_map(Role::from_code).collect(),
        is_enabled: row.get::<_, String>(5)? == "enabled",
        password_hash: row.get(6)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Account> {
    reader.one(
        "account with this number",
        &format!("{SELECT} where a.id = :id"),
        named_params! { ":id": id },
        from_row,
    )
}

pub fn by_user_name(reader: &Reader<'_>, user_name: &str) -> Answer<Option<Account>> {
    reader.maybe(
        &format!("{SELECT} where a.user_name = :user_name"),
        named_params! { ":user_name": user_name },
        from_row,
    )
}

/// All people, by name.
pub fn people(reader: &Reader<'_>) -> Answer<Vec<Account>> {
    reader.all(&format!("{SELECT} where a.kind = 'person' order by a.full_name"), [], from_row)
}

pub fn has_people(reader: &Reader<'_>) -> Answer<bool> {
    reader.exists("select 1 from account where kind = 'person' limit 1", [])
}

pub fn insert_person(
    change: &Change<'_>,
    user_name: &str,
    full_name: &str,
    identity_verified_by: &str,
) -> Answer<i64> {
    change.insert(
        "insert into account (user_name, full_name, kind, identity_verified_by)
         values (:user_name, :full_name, 'person', :verified_by)",
        named_params! { ":user_name": user_name, ":full_name": full_name, ":verified_by": identity_verified_by },
    )
}

/// The console and the clock, with their fixed numbers, made by the very first act.
pub(in crate::store) fn ensure_system_accounts(change: &Change<'_>) -> Answer<()> {
    if change.exists("select 1 from account where id = :id", named_params! { ":id": CONSOLE })? {
        return Ok(());
    }
    for (id, user_name, full_name) in [(CONSOLE, "console", "The console"), (CLOCK, "clock", "The clock")] {
        change.insert(
            "insert into account (id, user_name, full_name, kind) values (:id, :user_name, :full_name, 'system')",
            named_params! { ":id": id, ":user_name": user_name, ":full_name": full_name },
        )?;
    }
    Ok(())
}

pub fn set_roles(change: &Change<'_>, account: i64, roles: &[Role]) -> Answer<()> {
    let codes: Vec<&str> = roles.iter().map(|role| role.code()).collect();
    change.insert(
        "insert into account_roles (account, roles) values (:account, :roles)",
        named_params! { ":account": account, ":roles": codes.join(",") },
    )?;
    Ok(())
}

pub fn set_state(change: &Change<'_>, account: i64, is_enabled: bool) -> Answer<()> {
    let state = if is_enabled { "enabled" } else { "disabled" };
    change.insert(
        "insert into account_state (account, state) values (:account, :state)",
        named_params! { ":account": account, ":state": state },
    )?;
    Ok(())
}

pub fn set_password_hash(change: &Change<'_>, account: i64, hash: &str) -> Answer<()> {
    change.execute(
        "update account set password_hash = :hash where id = :account",
        named_params! { ":account": account, ":hash": hash },
    )?;
    Ok(())
}

/// A one-time code, found by its digest.
#[derive(Clone, Debug)]
pub struct Code {
    pub id: i64,
    /// The account whose password it sets; `None` makes the first administrator.
    pub account: Option<i64>,
    pub expires_at: String,
    pub is_used: bool,
}

pub fn insert_code(change: &Change<'_>, account: Option<i64>, digest: &str, expires_at: &str) -> Answer<i64> {
    change.insert(
        "insert into account_code (account, code_digest, expires_at) values (:account, :digest, :expires_at)",
        named_params! { ":account": account, ":digest": digest, ":expires_at": expires_at },
    )
}

pub fn code(reader: &Reader<'_>, digest: &str) -> Answer<Option<Code>> {
    reader.maybe(
        "select id, account, expires_at, used_at is not null from account_code where code_digest = :digest",
        named_params! { ":digest": digest },
        |row| {
            Ok(Code { id: row.get(0)?, account: row.get(1)?, expires_at: row.get(2)?, is_used: row.get(3)? })
        },
    )
}

pub fn use_code(change: &Change<'_>, id: i64) -> Answer<()> {
    change.execute(
        "update account_code set used_at = :at where id = :id",
        named_params! { ":id": id, ":at": change.actor().at.stored() },
    )?;
    Ok(())
}
