//! Recording a lot and its distribution.

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot::{self, BulkFacts, LotFacts, LotState, NewDistribution, NewLot};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store;
use crate::store::door::{Change, Db};

/// Records a lot made to an approved formulation version, with the digest of the version's content.
///
/// Refuses in the order of [`lot::may_make`].
pub fn make(db: &Db, actor: &Actor, new: &NewLot) -> Result<i64, Failure> {
    db.change(actor, Act::MakeLot, &Reason::none(), |change| {
        let id = make_inside(change, new)?;
        change.tell(format!("{}, made on {}", new.number, crate::domain::moment::date_shown(new.made_on)));
        Ok(id)
    })
}

/// [`make`] as part of a larger act, such as starting the record of a lot.
pub(in crate::acts) fn make_inside(change: &mut Change<'_>, new: &NewLot) -> Result<i64, Failure> {
    let version = store::version::get(change, Versioned::Formulation, new.formulation_version)?;
    let facts = LotFacts {
        is_number_taken: store::lot::by_number(change, &new.number)?.is_some(),
        version_state: version.state,
        version_product: store::lot::product_of_formulation(change, version.parent)?,
        presentation_product: store::lot::product_of_presentation(change, new.presentation)?,
        today: change.actor().at.date(),
        bulk: bulk_facts(change, new.bulk_lot)?,
    };
    lot::may_make(new, &facts)?;
    let id = store::lot::insert(change, new, &sha256_hex(version.content.as_bytes()))?;
    change.concerns(Kind::Lot, id)?;
    change.concerns(Kind::Presentation, new.presentation)?;
    change.concerns(Kind::FormulationVersion, new.formulation_version)?;
    if let Some(bulk) = new.bulk_lot {
        change.concerns(Kind::Lot, bulk)?;
    }
    Ok(id)
}

fn bulk_facts(change: &Change<'_>, bulk: Option<i64>) -> Result<Option<BulkFacts>, Failure> {
    let Some(bulk) = bulk else { return Ok(None) };
    let bulk = store::lot::get(change, bulk)?;
    Ok(Some(BulkFacts {
        formulation_version: bulk.formulation_version,
        made_on: bulk.made_on,
        is_imported: bulk.imported.is_some(),
        is_rejected: bulk.state() == LotState::Rejected,
    }))
}

/// Records from when a lot was distributed and to which markets.
///
/// Refuses in the order of [`lot::may_distribute`].
pub fn distribute(db: &Db, actor: &Actor, id: i64, new: &NewDistribution) -> Result<(), Failure> {
    db.change(actor, Act::RecordDistribution, &Reason::none(), |change| {
        let found = store::lot::get(change, id)?;
        lot::may_distribute(new, found.state(), found.made_on, actor.at.date())?;
        store::lot::insert_distribution(change, id, new)?;
        change.concerns(Kind::Lot, id)?;
        let first_on = crate::domain::moment::date_shown(new.first_on);
        change.tell(format!("{} from {first_on} to {}", found.number, new.markets));
        Ok(())
    })
}
