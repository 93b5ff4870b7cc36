//! Signing in and confirming a password, with waits that grow after failures.

use super::secret::Secrets;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::reason::Reason;
use crate::domain::refusal::NamedReason;
use crate::domain::signature::SignatureRefusal;
use crate::domain::subject::Kind;
use crate::domain::throttle::{MOST_FAILURES, wait_s};
use crate::store;
use crate::store::account::Account;
use crate::store::door::Db;
use crate::store::session::{Failures, Session};

/// One answer for an unknown name, a wrong password, a wait and a disabled account (sec_S19).
#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum SignInRefusal {
    #[error("The user name or the password is not right, or sign-in is waiting after failed tries.")]
    NotSignedIn,
}

impl NamedReason for SignInRefusal {
    fn field(&self) -> Option<String> {
        Some("password".to_string())
    }
}

/// Where a sign-in comes from.
#[derive(Clone, Debug, Default)]
pub struct Origin {
    pub address: Option<String>,
    pub agent: Option<String>,
    /// Digest of the browser's own cookie, if it signed in before: it has its own counter, so that strangers
    /// cannot lock a person out.
    pub known_browser: Option<String>,
}

/// Signs a person in: answers with the account and a fresh session token, which is stored only as a digest.
pub fn sign_in(
    db: &Db,
    secrets: &Secrets,
    at: Moment,
    user_name: &str,
    password: &str,
    origin: &Origin,
) -> Result<(Account, String), Failure> {
    let account = verified(db, secrets, at, user_name, password, origin)?;
    let token = super::secret::token()?;
    let session = Session {
        token_digest: sha256_hex(token.as_bytes()),
        account: account.id,
        started_at: at.stored(),
        last_seen: at.stored(),
        address: origin.address.clone(),
        agent: origin.agent.clone(),
    };
    let actor = actor_of(&account, at, &session.token_digest, origin.address.clone());
    db.change(&actor, Act::SignIn, &Reason::none(), |change| change.concerns(Kind::Account, account.id))?;
    db.housekeeping(|work| store::session::start(work, &session))?;
    Ok((account, token))
}

/// The person behind an account, at one moment.
pub fn actor_of(account: &Account, at: Moment, token_digest: &str, address: Option<String>) -> Actor {
    Actor {
        account: account.id,
        user_name: account.user_name.clone(),
        full_name: account.full_name.clone(),
        roles: account.roles.clone(),
        at,
        session: Some(token_digest.chars().take(8).collect()),
        address,
        submission: None,
    }
}

/// The account whose name and password these are.
fn verified(
    db: &Db,
    secrets: &Secrets,
    at: Moment,
    user_name: &str,
    password: &str,
    origin: &Origin,
) -> Result<Account, Failure> {
    let key = counter_key(user_name, origin);
    let (account, failures, of_address) = db.read(|reader| {
        let of_address = match &origin.address {
            Some(address) => store::session::failures(reader, &format!("address:{address}"))?,
            None => Failures::default(),
        };
        Ok((
            store::account::by_user_name(reader, user_name)?,
            store::session::failures(reader, &key)?,
            of_address,
        ))
    })?;
    if is_waiting(&failures, at) || is_waiting(&of_address, at) {
        return Err(SignInRefusal::NotSignedIn.into());
    }
    let hash = account.as_ref().and_then(|account| account.password_hash.as_deref());
    let is_right = secrets.verify(password, hash)?;
    match account.filter(|account| is_right && account.is_enabled && account.is_person) {
        Some(account) => {
            db.housekeeping(|work| store::session::forget_failures(work, &key))?;
            Ok(account)
        }
        None => {
            count_failure(db, &key, failures, at)?;
            if let Some(address) = &origin.address {
                count_address_failure(db, address, of_address, at)?;
            }
            Err(SignInRefusal::NotSignedIn.into())
        }
    }
}

fn counter_key(user_name: &str, origin: &Origin) -> String {
    let name = user_name.to_lowercase();
    match &origin.known_browser {
        Some(browser) => format!("browser:{browser}:{name}"),
        None => format!("account:{name}"),
    }
}

fn is_waiting(failures: &Failures, at: Moment) -> bool {
    failures.count >= MOST_FAILURES
        || failures.wait_until.as_ref().is_some_and(|until| until.as_str() > at.stored().as_str())
}

fn count_failure(db: &Db, key: &str, before: Failures, at: Moment) -> Result<(), Failure> {
    let count = before.count + 1;
    let wait = wait_s(count);
    let wait_until = (wait > 0).then(|| at.plus_seconds(wait).stored());
    tracing::warn!(event = "failed password", counter = %sha256_hex(key.as_bytes()), count);
    db.housekeeping(|work| store::session::count_failure(work, key, &Failures { count, wait_until }, at))?;
    if count == 5 || count == MOST_FAILURES {
        let console = Actor::console(at);
        db.change(&console, Act::ReportMisuse, &Reason::none(), |change| {
            change.tell(format!("{count} failed passwords in a row for one account"));
            Ok(())
        })?;
    }
    Ok(())
}

/// An address may fail 30 times, then waits a minute each time.
fn count_address_failure(db: &Db, address: &str, before: Failures, at: Moment) -> Result<(), Failure> {
    let has_rested = before.wait_until.as_ref().is_some_and(|until| until.as_str() <= at.stored().as_str());
    let count = if has_rested { 1 } else { before.count + 1 };
    let wait_until = (count >= 30).then(|| at.plus_seconds(60).stored());
    // The counter starts anew after a wait, and never reaches the account limit.
    let failures = Failures { count: count.min(30), wait_until };
    let key = format!("address:{address}");
    db.housekeeping(|work| store::session::count_failure(work, &key, &failures, at))
}

/// The person behind a name and password, for one command: no session is started.
pub fn identify(
    db: &Db,
    secrets: &Secrets,
    at: Moment,
    user_name: &str,
    password: &str,
) -> Result<Actor, Failure> {
    let account = verified(db, secrets, at, user_name, password, &Origin::default())?;
    Ok(Actor { session: None, ..actor_of(&account, at, "", None) })
}

/// Proof that the actor's own password was typed just now.
pub struct Confirmed(());

/// Confirms the actor's own user name and password, throttled like sign-in.
///
/// Refuses in this order: another person's name, then the password.
pub fn confirm_password(
    db: &Db,
    secrets: &Secrets,
    actor: &Actor,
    user_name: &str,
    password: &str,
) -> Result<Confirmed, Failure> {
    if !user_name.trim().eq_ignore_ascii_case(&actor.user_name) {
        return Err(SignatureRefusal::NotOwnName(actor.user_name.clone()).into());
    }
    let origin = Origin { known_browser: actor.session.clone(), ..Origin::default() };
    match verified(db, secrets, actor.at, &actor.user_name, password, &origin) {
        Ok(_) => Ok(Confirmed(())),
        Err(Failure::Refused(_)) => Err(SignatureRefusal::NotAuthenticated.into()),
        Err(other) => Err(other),
    }
}
