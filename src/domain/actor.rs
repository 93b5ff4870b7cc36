//! Who is acting, with what authority, from where, and when.

use std::sync::Arc;
use std::sync::atomic::AtomicBool;

use super::moment::Moment;
use super::role::Role;

/// A person (or a system account) at one moment, about to do one act. Passed first, everywhere.
#[derive(Clone, Debug)]
pub struct Actor {
    pub account: i64,
    pub user_name: String,
    pub full_name: String,
    pub roles: Vec<Role>,
    /// The instant of the act, from the clock that was handed to the program.
    pub at: Moment,
    /// The first characters of the session's digest; never the token.
    pub session: Option<String>,
    pub address: Option<String>,
    pub submission: Option<Submission>,
}

/// The one-use key of a form, so that the same submit again cannot make a second record.
#[derive(Clone, Debug)]
pub struct Submission {
    pub key: String,
    /// Digest of what was sent, to tell a repeat from another content under the same key.
    pub content_digest: String,
    /// Set once an act of this request has been committed under the key: later acts of it are no repeats.
    pub is_claimed: Arc<AtomicBool>,
}

/// Account number of the console's system account, which cannot sign.
pub const CONSOLE: i64 = 1;
/// Account number of the system account that does timed work, which cannot sign.
pub const CLOCK: i64 = 2;

impl Actor {
    /// The console account at a moment: for work that is no person's act.
    pub fn console(at: Moment) -> Actor {
        Actor::system(CONSOLE, "console", "The console", at)
    }

    /// The account that does timed work.
    pub fn clock(at: Moment) -> Actor {
        Actor::system(CLOCK, "clock", "The clock", at)
    }

    fn system(account: i64, user_name: &str, full_name: &str, at: Moment) -> Actor {
        Actor {
            account,
            user_name: user_name.to_string(),
            full_name: full_name.to_string(),
            roles: Vec::new(),
            at,
            session: None,
            address: None,
            submission: None,
        }
    }

    pub fn is_system(&self) -> bool {
        self.account == CONSOLE || self.account == CLOCK
    }

    pub fn holds(&self, role: Role) -> bool {
        self.roles.contains(&role)
    }

    /// The same person at another moment.
    pub fn at(&self, at: Moment) -> Actor {
        Actor { at, ..self.clone() }
    }
}
