//! Adding materials.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::material::{NewMaterial, may_add};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

/// Refuses in the order of [`may_add`].
pub fn add(db: &Db, actor: &Actor, new: &NewMaterial) -> Result<i64, Failure> {
    db.change(actor, Act::AddMaterial, &Reason::none(), |change| {
        may_add(new, store::material::is_code_taken(change, &new.code)?)?;
        let id = store::material::insert(change, new)?;
        change.concerns(Kind::Material, id)?;
        change.tell(format!("{}, {} ({})", new.code, new.name, new.function));
        Ok(id)
    })
}
