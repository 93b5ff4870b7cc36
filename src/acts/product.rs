//! Adding customers, products and presentations.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::product::{NewCustomer, NewPresentation, NewProduct, may_add_presentation, may_take_code};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::store;
use crate::store::door::Db;

pub fn add_customer(db: &Db, actor: &Actor, new: &NewCustomer) -> Result<i64, Failure> {
    db.change(actor, Act::AddCustomer, &Reason::none(), |change| {
        may_take_code(&new.code, store::product::is_customer_code_taken(change, &new.code)?)?;
        let id = store::product::insert_customer(change, new)?;
        change.concerns(Kind::Customer, id)?;
        change.tell(format!("{}, {}", new.code, new.name));
        Ok(id)
    })
}

pub fn add(db: &Db, actor: &Actor, new: &NewProduct) -> Result<i64, Failure> {
    db.change(actor, Act::AddProduct, &Reason::none(), |change| {
        may_take_code(&new.code, store::product::is_code_taken(change, &new.code)?)?;
        let id = store::product::insert(change, new)?;
        change.concerns(Kind::Product, id)?;
        if let Some(customer) = new.customer {
            change.concerns(Kind::Customer, customer)?;
        }
        change.tell(format!("{}, {}, {}", new.code, new.name, new.dosage_form));
        Ok(id)
    })
}

/// Refuses in the order of [`may_add_presentation`].
pub fn add_presentation(db: &Db, actor: &Actor, new: &NewPresentation) -> Result<i64, Failure> {
    db.change(actor, Act::AddPresentation, &Reason::none(), |change| {
        let product = store::product::get(change, new.product)?;
        may_add_presentation(new, store::product::is_presentation_code_taken(change, &new.code)?)?;
        let id = store::product::insert_presentation(change, new)?;
        change.concerns(Kind::Presentation, id)?;
        change.concerns(Kind::Product, product.id)?;
        change.tell(format!("{} of {}: {}, {}", new.code, product.code, new.strength, new.pack));
        Ok(id)
    })
}
