//! Qualifying a person for a method version.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::qualification::{NewQualification, may_qualify};
use crate::domain::reason::Reason;
use crate::domain::role::Role;
use crate::domain::subject::{Kind, Subject};
use crate::domain::version::{VersionRefusal, Versioned};
use crate::store;
use crate::store::door::Db;

/// Records that a person may do tests by an approved method version, from a first to a last day.
///
/// Refuses in this order: the version is not approved, then [`may_qualify`].
pub fn add(db: &Db, actor: &Actor, new: &NewQualification) -> Result<i64, Failure> {
    db.change(actor, Act::QualifyPerson, &Reason::none(), |change| {
        let version = store::version::get(change, Versioned::Method, new.method_version)?;
        if !version.is_approved() {
            return Err(VersionRefusal::VersionNotApproved.into());
        }
        let person = store::account::get(change, new.account)?;
        let does_tests = person.is_enabled
            && person.roles.iter().any(|role| matches!(role, Role::Analyst | Role::LabManager));
        may_qualify(new, actor.account, does_tests)?;
        let id = store::qualification::insert(change, new)?;
        let facts = store::qualification::facts(change, new.account, new.method_version, actor.at.date())?;
        let about = Subject::new(Kind::MethodVersion, new.method_version);
        change.concerns(Kind::Account, new.account)?;
        change.concerns(about.kind, about.id)?;
        let (from, to) = (date_shown(new.starts_on), date_shown(new.ends_on));
        change.tell(format!("{} for {}, {from} to {to}", facts.full_name, facts.method));
        Ok(id)
    })
}
