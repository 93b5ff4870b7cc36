//! Signing: the only place where a [`Signed`] is made, so an act that needs one cannot be called without it.

use std::marker::PhantomData;

use super::secret::Secrets;
use super::sign_in::confirm_password;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::signature::Meaning;
use crate::domain::subject::Subject;
use crate::store;
use crate::store::door::{Change, Db};

/// A meaning as a type, so that an approval cannot stand in for a review.
pub trait Means {
    const MEANING: Meaning;
}

macro_rules! meanings {
    ($($name:ident)*) => {
        $(
            #[doc = concat!("The meaning `", stringify!($name), "`.")]
            pub struct $name;
            impl Means for $name {
                const MEANING: Meaning = Meaning::$name;
            }
        )*
    };
}
meanings! {
    Authorship Approval Review Release Rejection Override Conclusion MaterialStatus Continuation Closure Certification
}

/// Proof that the actor typed user name and password for this meaning, in this request.
pub struct Signed<M: Means> {
    account: i64,
    statement: Option<String>,
    meaning: PhantomData<M>,
}

/// Asks user name and password anew, every time.
pub fn authenticate<M: Means>(
    db: &Db,
    secrets: &Secrets,
    actor: &Actor,
    user_name: &str,
    password: &str,
) -> Result<Signed<M>, Failure> {
    confirm_password(db, secrets, actor, user_name, password)?;
    Ok(Signed { account: actor.account, statement: None, meaning: PhantomData })
}

impl<M: Means> Signed<M> {
    /// Adds the signer's own sentence.
    pub fn stating(self, statement: &str) -> Signed<M> {
        Signed { statement: Some(statement.trim().to_string()), ..self }
    }

    pub fn statement(&self) -> Option<&str> {
        self.statement.as_deref()
    }

    /// Puts the signature under a record, over the digest of its canonical text.
    pub fn put_under(
        &self,
        change: &mut Change<'_>,
        subject: Subject,
        canonical: &str,
    ) -> Result<i64, Failure> {
        if change.actor().account != self.account {
            return Err(Failure::NoSession);
        }
        let digest = sha256_hex(canonical.as_bytes());
        change.concerns(subject.kind, subject.id)?;
        store::signature::insert(change, subject, M::MEANING, &digest, self.statement.as_deref())
    }
}
