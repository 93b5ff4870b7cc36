//! Formulations: adding one, writing, signing and approving its versions.

use super::version::{self, Written};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::formulation::{
    FormulationContent, FormulationRefusal, NewFormulation, in_one_line, may_write,
};
use crate::domain::master;
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::version::Version;

/// Adds a formulation of a product; its first version is written next.
pub fn add(db: &Db, actor: &Actor, new: &NewFormulation) -> Result<i64, Failure> {
    db.change(actor, Act::AddFormulation, &Reason::none(), |change| {
        if store::formulation::is_code_taken(change, &new.code)? {
            return Err(FormulationRefusal::FormulationCodeTaken(new.code.clone()).into());
        }
        let product = store::product::get(change, new.product)?;
        let id = store::formulation::insert(change, new)?;
        change.concerns(Kind::Formulation, id)?;
        change.concerns(Kind::Product, product.id)?;
        change.tell(format!("{}, {} of {}", new.code, new.name, product.code));
        Ok(id)
    })
}

/// Writes the next version as a draft. Refuses in this order: [`may_write`], a draft that is open.
pub fn draft(
    db: &Db,
    actor: &Actor,
    formulation: i64,
    reason: &str,
    content: &FormulationContent,
) -> Result<i64, Failure> {
    may_write(content)?;
    version::draft(db, actor, Versioned::Formulation, formulation, &written(reason, content)?)
}

/// Rewrites a draft. `seen` is the digest the form was filled from; another one is `Stale`, told in words.
pub fn rewrite(
    db: &Db,
    actor: &Actor,
    id: i64,
    reason: &str,
    content: &FormulationContent,
    seen: &str,
) -> Result<(), Failure> {
    may_write(content)?;
    let rewritten = version::rewrite(db, actor, Versioned::Formulation, id, &written(reason, content)?, seen);
    match rewritten {
        Err(Failure::Stale(mut stale)) => {
            stale.theirs = serde_json::from_str(&stale.theirs).map(|theirs| in_one_line(&theirs))?;
            stale.yours = in_one_line(content);
            Err(Failure::Stale(stale))
        }
        other => other,
    }
}

fn written(reason: &str, content: &FormulationContent) -> Result<Written, Failure> {
    Ok(Written { reason: reason.to_string(), content: serde_json::to_string(content)? })
}

/// What is checked before a signature: the content still keeps its rules, and its master record is whole.
pub fn check(_: &Change<'_>, version: &Version) -> Result<(), Failure> {
    let content: FormulationContent = version.read()?;
    may_write(&content)?;
    master::rule::may_sign(&content)?;
    Ok(())
}
