//! Changing a setting of the site.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;
use crate::domain::setting::Setting;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Changes settings; the history shows was and is. Values that stay as they are leave no row.
pub fn change(db: &Db, actor: &Actor, values: &[(Setting, i64)], reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::ChangeSetting, reason, |change| {
        let mut told = Vec::new();
        for (setting, value) in values {
            setting.may_be(*value)?;
            let was = setting.value(store::setting::get(change, setting.name)?.as_deref());
            if was != *value {
                store::setting::set(change, setting.name, &value.to_string())?;
                told.push(format!("{}: was {was}, is {value}", setting.label));
            }
        }
        change.concerns(Kind::Site, 1)?;
        change.tell(if told.is_empty() { "nothing differed".to_string() } else { told.join("; ") });
        Ok(())
    })
}

/// The administrator has looked at the computer's clock and it is right.
pub fn confirm_clock(db: &Db, actor: &Actor, reason: &Reason) -> Result<(), Failure> {
    db.change(actor, Act::ConfirmClock, reason, |change| {
        change.concerns(Kind::Site, 1)?;
        change.tell(format!("it shows {}", actor.at.shown()));
        Ok(())
    })
}
