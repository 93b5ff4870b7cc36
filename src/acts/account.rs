//! Accounts: creating, roles, disabling, one-time codes, passwords.

use chrono::Duration;

use super::secret::{Secrets, one_time_code};
use crate::domain::account::{self, AccountRefusal, NewPerson};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::password;
use crate::domain::reason::Reason;
use crate::domain::role::{Role, may_hold};
use crate::domain::subject::Kind;
use crate::store;
use crate::store::account::Account;
use crate::store::door::{Change, Db};

/// The first administrator's code works this long.
const FIRST_CODE_HOURS: i64 = 1;
/// A code to set a password works this long.
const RESET_CODE_HOURS: i64 = 24;

/// A one-time code for the first administrator: shown on the console, kept only as a digest.
///
/// Refused once there is a person.
pub fn issue_first_code(db: &Db, console: &Actor) -> Result<String, Failure> {
    let code = one_time_code()?;
    db.change(console, Act::IssueFirstCode, &Reason::none(), |change| {
        if store::account::has_people(change)? {
            return Err(AccountRefusal::AdministratorExists.into());
        }
        insert_code(change, None, &code, FIRST_CODE_HOURS)?;
        Ok(())
    })?;
    Ok(code)
}

fn insert_code(change: &Change<'_>, account: Option<i64>, code: &str, hours: i64) -> Result<i64, Failure> {
    let at = change.actor().at;
    let expires = Moment::new(at.utc + Duration::hours(hours), at.zone);
    store::account::insert_code(change, account, &sha256_hex(code.as_bytes()), &expires.stored())
}

/// Creates a person's account without a password and answers with a code to set one.
///
/// Refuses in the order of [`account::may_create`].
pub fn create(db: &Db, actor: &Actor, new: &NewPerson) -> Result<(i64, String), Failure> {
    let code = one_time_code()?;
    let id = db.change(actor, Act::CreateAccount, &Reason::none(), |change| {
        let is_taken = store::account::by_user_name(change, &new.user_name)?.is_some();
        account::may_create(new, is_taken)?;
        let id = insert_person(change, new)?;
        insert_code(change, Some(id), &code, RESET_CODE_HOURS)?;
        Ok(id)
    })?;
    Ok((id, code))
}

fn insert_person(change: &mut Change<'_>, new: &NewPerson) -> Result<i64, Failure> {
    let id = store::account::insert_person(
        change,
        &new.user_name,
        new.full_name.trim(),
        new.identity_verified_by.trim(),
    )?;
    store::account::set_roles(change, id, &new.roles)?;
    change.concerns(Kind::Account, id)?;
    change.tell(format!("{} ({}): {}", new.full_name.trim(), new.user_name, role_words(&new.roles)));
    Ok(id)
}

fn role_words(roles: &[Role]) -> String {
    roles.iter().map(|role| role.code()).collect::<Vec<_>>().join(", ")
}

/// Changes the roles of another person.
pub fn grant_roles(
    db: &Db,
    actor: &Actor,
    account: i64,
    roles: &[Role],
    reason: &Reason,
) -> Result<(), Failure> {
    if account == actor.account {
        return Err(AccountRefusal::OwnAccount.into());
    }
    if !may_hold(roles) {
        return Err(AccountRefusal::RolesExcludeEachOther.into());
    }
    db.change(actor, Act::GrantRoles, reason, |change| {
        let before = store::account::get(change, account)?;
        store::account::set_roles(change, account, roles)?;
        change.concerns(Kind::Account, account)?;
        change.tell(format!(
            "{}: was {}, is {}",
            before.full_name,
            role_words(&before.roles),
            role_words(roles)
        ));
        Ok(())
    })
}

/// Disables an account and ends all its sessions at once; or enables it again.
pub fn set_enabled(
    db: &Db,
    actor: &Actor,
    account: i64,
    is_enabled: bool,
    reason: &Reason,
) -> Result<(), Failure> {
    if account == actor.account {
        return Err(AccountRefusal::OwnAccount.into());
    }
    let act = if is_enabled { Act::EnableAccount } else { Act::DisableAccount };
    db.change(actor, act, reason, |change| {
        let person = store::account::get(change, account)?;
        store::account::set_state(change, account, is_enabled)?;
        if !is_enabled {
            store::session::end_all(change, account)?;
        }
        change.concerns(Kind::Account, account)?;
        change.tell(person.full_name);
        Ok(())
    })
}

/// A code with which the person sets a new password; nobody else sees or picks it.
pub fn issue_reset_code(db: &Db, actor: &Actor, account: i64, reason: &Reason) -> Result<String, Failure> {
    let code = one_time_code()?;
    db.change(actor, Act::IssueResetCode, reason, |change| {
        let person = store::account::get(change, account)?;
        insert_code(change, Some(account), &code, RESET_CODE_HOURS)?;
        change.concerns(Kind::Account, account)?;
        change.tell(person.full_name);
        Ok(())
    })?;
    Ok(code)
}

/// What a person types to redeem a code.
#[derive(Clone, Debug)]
pub struct Redemption {
    pub code: String,
    /// For the first administrator only; a code that belongs to an account ignores it.
    pub new: Option<NewPerson>,
    pub password: String,
    pub password_again: String,
}

/// Sets a password with a one-time code. With the first administrator's code the account is made by the same act.
///
/// Refuses in this order: the code, the first administrator's data, the two passwords, the password itself.
pub fn redeem(db: &Db, secrets: &Secrets, at: Moment, wanted: &Redemption) -> Result<Account, Failure> {
    let digest = sha256_hex(wanted.code.trim().to_lowercase().as_bytes());
    let code = db.read(|reader| store::account::code(reader, &digest))?;
    let code = code.filter(|code| !code.is_used && code.expires_at >= at.stored());
    let Some(code) = code else { return Err(AccountRefusal::CodeNotUsable.into()) };
    if wanted.password != wanted.password_again {
        return Err(AccountRefusal::PasswordsDiffer.into());
    }
    let hash = secrets.hash(&wanted.password)?;
    let console = Actor::console(at);
    db.change(&console, Act::SetPasswordByCode, &Reason::none(), |change| {
        // Asked again inside the transaction: of two redemptions at once only one finds the code unused.
        if store::account::code(change, &digest)?.is_none_or(|code| code.is_used) {
            return Err(AccountRefusal::CodeNotUsable.into());
        }
        let account = match code.account {
            Some(account) => account,
            None => first_administrator(change, wanted)?,
        };
        let person = store::account::get(change, account)?;
        password::may_be(&wanted.password, &[&person.user_name, &person.full_name, "supernate"])?;
        store::account::set_password_hash(change, account, &hash)?;
        store::account::use_code(change, code.id)?;
        change.concerns(Kind::Account, account)?;
        change.tell(format!("for {}", person.full_name));
        store::account::get(change, account)
    })
}

fn first_administrator(change: &mut Change<'_>, wanted: &Redemption) -> Result<i64, Failure> {
    if store::account::has_people(change)? {
        return Err(AccountRefusal::AdministratorExists.into());
    }
    let Some(new) = &wanted.new else { return Err(AccountRefusal::UserNameShape.into()) };
    account::may_create(new, false)?;
    insert_person(change, new)
}

/// Changes the own password; asks the present one.
pub fn change_password(
    db: &Db,
    secrets: &Secrets,
    actor: &Actor,
    present: &str,
    wanted: &str,
) -> Result<(), Failure> {
    let _signed = super::sign_in::confirm_password(db, secrets, actor, &actor.user_name, present)?;
    password::may_be(wanted, &[&actor.user_name, &actor.full_name, "supernate"])?;
    let hash = secrets.hash(wanted)?;
    db.change(actor, Act::ChangePassword, &Reason::none(), |change| {
        store::account::set_password_hash(change, actor.account, &hash)?;
        change.concerns(Kind::Account, actor.account)
    })
}

/// An invented person with a known password, for a data folder that is marked as a demo and no other.
pub fn create_demo_person(
    db: &Db,
    secrets: &Secrets,
    console: &Actor,
    new: &NewPerson,
    password: &str,
) -> Result<i64, Failure> {
    let site = db.read(store::site::get)?;
    if !site.is_some_and(|site| site.is_demo) {
        return Err(Failure::missing("demo site in this data folder"));
    }
    let hash = secrets.hash(password)?;
    db.change(console, Act::CreateAccount, &Reason::stated("invented person of the demo"), |change| {
        account::may_create(new, store::account::by_user_name(change, &new.user_name)?.is_some())?;
        let id = insert_person(change, new)?;
        store::account::set_password_hash(change, id, &hash)?;
        Ok(id)
    })
}
