//! Ending sessions.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Signs the actor out: the session's row is ended, the token is worth nothing from now on.
pub fn sign_out(db: &Db, actor: &Actor, token_digest: &str) -> Result<(), Failure> {
    db.change(actor, Act::SignOut, &Reason::none(), |change| change.concerns(Kind::Account, actor.account))?;
    db.housekeeping(|work| store::session::end(work, token_digest, actor.at))
}

/// Ends another of the actor's own sessions.
pub fn end_own(db: &Db, actor: &Actor, digest_start: &str) -> Result<(), Failure> {
    let sessions = db.read(|reader| store::session::of_account(reader, actor.account))?;
    let found = sessions.into_iter().find(|session| session.token_digest.starts_with(digest_start));
    let Some(session) = found.filter(|_| digest_start.len() >= 8) else {
        return Err(Failure::missing("session of yours with this number"));
    };
    db.change(actor, Act::EndSession, &Reason::none(), |change| {
        change.concerns(Kind::Account, actor.account)
    })?;
    db.housekeeping(|work| store::session::end(work, &session.token_digest, actor.at))
}
