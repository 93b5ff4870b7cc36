//! The yield of a phase, worked out by one person and checked by another.

use rust_decimal::Decimal;

use super::{Loaded, concerns, open_deviation};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::rule::may_enter;
use crate::domain::batch::state::own_state;
use crate::domain::batch::yields::{NewYield, YieldRefusal, compute, may_check};
use crate::domain::batch::{Verdict, yield_of};
use crate::domain::failure::{Failure, Stale};
use crate::domain::master::{Phase, TheoreticalYield};
use crate::domain::moment::Moment;
use crate::domain::reason::Reason;
use crate::store;
use crate::store::door::Db;

/// A yield as it was entered.
#[derive(Clone, Debug)]
pub struct Entered {
    pub figures: NewYield,
    /// What happened, where the yield lies outside its limits.
    pub described: Option<String>,
    /// The newest yield of the phase that the page showed.
    pub seen: i64,
}

/// Records the yield of a phase, counted from 0; outside its limits a deviation is opened in the same act. A later one
/// takes its place and asks for a new check.
///
/// Refuses in this order: lot decided, record closed, no yield here, steps open, changed meanwhile, the figures,
/// outside without a word on what happened.
pub fn record(db: &Db, actor: &Actor, id: i64, phase: usize, entered: &Entered) -> Result<i64, Failure> {
    db.change(actor, Act::RecordYield, &Reason::none(), |change| {
        let loaded = Loaded::of(change, id)?;
        concerns(change, &loaded.record)?;
        may_enter(&loaded.facts(1)?)?;
        let (found, theory) = theory_of(&loaded, phase)?;
        if let Some(there) = yield_of(&loaded.yields, phase).filter(|there| there.id > entered.seen) {
            let at = Moment::from_stored(&there.at, actor.at.zone);
            return Err(Failure::Stale(Stale {
                what: format!("The yield of {}", found.name),
                changed_by: there.by.clone(),
                changed_at: at.map(|at| at.shown()).unwrap_or_else(|| there.at.clone()),
                theirs: format!("{} {}", there.actual, there.unit),
                yours: format!("{} {}", entered.figures.actual, theory.unit),
            }));
        }
        let computed = compute(&entered.figures, theory, loaded.record.content.size)?;
        let mut deviation = None;
        if computed.verdict == Verdict::Outside {
            let Some(described) = &entered.described else {
                let (percent, limits) = (computed.percent, computed.limits);
                return Err(YieldRefusal::YieldOutside { percent, limits }.into());
            };
            let title = format!("{}: yield {} %", found.name, computed.percent);
            let (opened, _) = open_deviation(change, &loaded.record, None, (&title, described, "deviation"))?;
            deviation = Some(opened);
        }
        let figures = (&entered.figures, &computed);
        let row = store::batch::yields::insert(change, id, phase, &theory.unit, figures, deviation)?;
        change.tell(format!(
            "{}, {}: {} {} of {}, {} %, accountable {} %, {}",
            loaded.record.lot_number,
            found.name,
            entered.figures.actual,
            theory.unit,
            computed.theoretical,
            computed.percent,
            computed.accountable_percent,
            computed.verdict.words()
        ));
        Ok(row)
    })
}

/// The phase and its theoretical yield, once its steps are done.
fn theory_of(loaded: &Loaded, phase: usize) -> Result<(&Phase, &TheoreticalYield), Failure> {
    let content = &loaded.record.content;
    let found = content.phase(phase).ok_or_else(|| Failure::missing("phase of this record"))?;
    let Some(theory) = &found.theory else {
        return Err(YieldRefusal::NoYieldHere(found.name.clone()).into());
    };
    let is_open = content
        .steps()
        .iter()
        .any(|planned| planned.phase == phase && !own_state(planned, &loaded.entries).is_settled());
    if is_open { Err(YieldRefusal::PhaseNotDone(found.name.clone()).into()) } else { Ok((found, theory)) }
}

/// A second person works the percent out again and types what came out. Refuses in this order: lot decided, record
/// closed, then as [`may_check`] does.
pub fn check(db: &Db, actor: &Actor, id: i64, phase: usize, percent: Decimal) -> Result<(), Failure> {
    db.change(actor, Act::CheckYield, &Reason::none(), |change| {
        let loaded = Loaded::of(change, id)?;
        concerns(change, &loaded.record)?;
        may_enter(&loaded.facts(1)?)?;
        let found = yield_of(&loaded.yields, phase);
        may_check(found, actor.account, percent)?;
        let Some(found) = found else { return Err(YieldRefusal::YieldMissing.into()) };
        store::batch::yields::insert_check(change, found.id)?;
        let name = loaded.record.content.phase(phase).map(|phase| phase.name.clone()).unwrap_or_default();
        change.tell(format!("{}, {name}: {} %", loaded.record.lot_number, found.percent));
        Ok(())
    })
}
