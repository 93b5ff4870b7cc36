//! Lifting a register's stop for one day, signed by QA.

use super::signature::{Override, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::date_shown;
use crate::domain::reason::Reason;
use crate::domain::stop::{NewOverride, may_override};
use crate::domain::subject::{Kind, Subject};
use crate::store;
use crate::store::door::Db;

/// Lifts one stop of an instrument, or of a person with a method version, for one day.
///
/// The signature stands under the instrument or the person, over [`NewOverride::canonical`]; its statement is
/// the reason. Refuses in the order of [`may_override`].
pub fn lift(db: &Db, actor: &Actor, new: &NewOverride, signed: Signed<Override>) -> Result<i64, Failure> {
    let signed = signed.stating(&new.reason);
    db.change(actor, Act::OverrideStop, &Reason::stated(&new.reason), |change| {
        may_override(new, actor.account, actor.at.date())?;
        let subject = match (new.instrument, new.account) {
            (Some(instrument), _) => Subject::new(Kind::Instrument, instrument),
            (None, Some(account)) => Subject::new(Kind::Account, account),
            (None, None) => Subject::new(Kind::Site, 1),
        };
        let signature = signed.put_under(change, subject, &new.canonical())?;
        let id = store::stop::insert(change, new, signature)?;
        if let Some(version) = new.method_version {
            change.concerns(Kind::MethodVersion, version)?;
        }
        let words = store::stop::of_signature(change, signature)?.map(|found| found.words);
        change.tell(format!("{}, for {}", words.unwrap_or_default(), date_shown(new.valid_on)));
        Ok(id)
    })
}
