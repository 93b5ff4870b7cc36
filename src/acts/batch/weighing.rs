//! Weighing into a lot: the material lot by its label, the balance with its check of the day, gross, tare and net.

use rust_decimal::Decimal;

use super::step::{How, enter, new};
use super::{Loaded, at_field, open_deviation, plain};
use crate::acts::material_lot::NewTake;
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::batch::refusal::StepRefusal;
use crate::domain::batch::rule::{StepFacts, may_record};
use crate::domain::batch::weighing::{
    LotPotency, Target, TypedWeight, full_target, judge, net, parts, target, weighings,
};
use crate::domain::batch::{EntryKind, NewEntry, Verdict, Weighed};
use crate::domain::failure::Failure;
use crate::domain::instrument::{EventKind, may_use};
use crate::domain::reason::Reason;
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::material_lot::MaterialLot;

/// One weighing as it was entered.
#[derive(Clone, Debug, Default)]
pub struct NewWeighing {
    /// What was scanned or typed from the label.
    pub material_lot: String,
    pub balance: Option<i64>,
    pub typed: TypedWeight,
    /// What happened, where the amount lies above its tolerance and cannot be taken out.
    pub described: Option<String>,
}

/// Records one weighing and takes it from the material lot's ledger, both or neither.
///
/// Refuses in this order: as [`may_record`]; nothing to weigh; the figures; the material lot unknown; the balance; no
/// assay to correct by; as the ledger refuses (wrong material, not released, expired, not enough); above the tolerance
/// without a word on what happened.
pub fn weigh(db: &Db, actor: &Actor, how: &How, weighing: &NewWeighing) -> Result<i64, Failure> {
    let yours = (how, &Reason::none(), "a weighing");
    enter(db, actor, Act::RecordStep, yours, |change, loaded, facts| {
        may_record(facts, actor.account)?;
        let Some(target) = target(facts.content, &facts.planned) else {
            return Err(StepRefusal::NothingToWeigh(facts.planned.words()).into());
        };
        let unit = target.row.unit.clone();
        let (text, value) = net(&weighing.typed, target.row.rounding_step, &unit)?;
        let lot = known_lot(change, &weighing.material_lot)?;
        let (balance, balance_code, balance_check) = balance(change, weighing.balance)?;
        let (full, formula) = full(change, &target, &lot)?;
        let taken = take(change, loaded, target.row.material, &lot, (value, &unit))?;
        let mut all = parts(&weighings(&facts.planned, facts.entries));
        all.push((value, full));
        let stands = judge(&target, &all);
        let (limits, number) = (stands.limit_words(&unit), lot.facts.number.clone());
        let mut entry = NewEntry {
            typed: text,
            value: Some(value),
            unit: unit.clone(),
            verdict: if stands.is_above() { Verdict::Outside } else { Verdict::Within },
            limits: limits.clone(),
            weighed: Weighed {
                gross: typed_text(weighing.typed.gross.as_ref()),
                tare: typed_text(weighing.typed.tare.as_ref()),
                material_lot: number.clone(),
                balance: balance_code.clone(),
                balance_check,
                full_target: full,
                formula,
            },
            material_lot: Some(lot.facts.id),
            stock_entry: Some(taken),
            instrument: Some(balance),
            ..new(facts, EntryKind::Weighing)
        };
        if target.amount.is_none() {
            entry.verdict = Verdict::NoLimit;
        }
        if stands.is_above() {
            let weighed = format!("{}\u{202f}{unit}", plain(stands.weighed));
            let Some(described) = &weighing.described else {
                return Err(StepRefusal::WeightAboveLimit { weighed, limit: limits }.into());
            };
            entry.deviation = Some(too_much(change, loaded, facts, described)?);
        }
        Ok((entry, told(facts, &number, &balance_code, value, &unit)))
    })
}

fn typed_text(number: Option<&crate::domain::typed::Number>) -> String {
    number.map(|number| number.text.clone()).unwrap_or_default()
}

fn too_much(
    change: &mut Change<'_>,
    loaded: &Loaded,
    facts: &StepFacts<'_>,
    described: &str,
) -> Result<i64, Failure> {
    let title = format!("{}: weighed above its tolerance", facts.planned.words());
    let step = Some((facts.planned.number, facts.planned.words()));
    let (id, _) = open_deviation(change, &loaded.record, step, (&title, described, "weigh_deviation"))?;
    Ok(id)
}

/// Where a second person weighs in blind, the history must not tell them the first figure.
fn told(facts: &StepFacts<'_>, lot: &str, balance: &str, value: Decimal, unit: &str) -> String {
    match facts.planned.step.blind_within {
        Some(_) => format!(": weighed from {lot} on {balance}"),
        None => format!(": {} {unit} of {lot} weighed on {balance}", plain(value)),
    }
}

pub(super) fn known_lot(change: &Change<'_>, scanned: &str) -> Result<MaterialLot, Failure> {
    let found = store::material_lot::by_scan(change, scanned)?;
    found.ok_or_else(|| StepRefusal::MaterialLotUnknown(scanned.trim().to_string()).into())
}

/// The balance, its code, and its check of the day in words.
pub(super) fn balance(change: &Change<'_>, chosen: Option<i64>) -> Result<(i64, String, String), Failure> {
    let Some(id) = chosen else { return Err(StepRefusal::BalanceMissing.into()) };
    let today = change.actor().at.date();
    let facts = store::instrument::facts(change, id, today)?;
    if facts.kind != "balance" {
        return Err(StepRefusal::NotABalance { code: facts.code, is: facts.kind }.into());
    }
    at_field(may_use(&facts, today).map_err(Failure::from), "balance")?;
    let check = facts.check_of(today).map(|check| check.words(EventKind::DailyCheck));
    Ok((id, facts.code.clone(), check.unwrap_or_default()))
}

/// The whole target from this material lot, corrected by its newest assay where the record asks for it.
pub fn full(
    reader: &store::Reader<'_>,
    target: &Target<'_>,
    lot: &MaterialLot,
) -> Result<(Option<Decimal>, String), Failure> {
    if target.row.potency.is_none() {
        return Ok((full_target(target, None).map(|(full, _)| full), String::new()));
    }
    let newest = store::material_lot::assays(reader, lot.facts.id)?.into_iter().next();
    let missing = || StepRefusal::AssayMissing { number: lot.facts.number.clone() };
    let recorded = newest.ok_or_else(missing)?.recorded;
    let assay_percent = recorded.assay.ok_or_else(missing)?;
    // An assay on the material as it is holds its water already.
    let water = if recorded.assay_basis == "as is" { None } else { recorded.water };
    let lot = LotPotency { assay_percent, water_percent: water.unwrap_or_default() };
    Ok(match full_target(target, Some(lot)) {
        Some((full, formula)) => (Some(full), formula),
        None => (None, String::new()),
    })
}

/// Takes from the ledger; answers with its entry.
pub(super) fn take(
    change: &mut Change<'_>,
    loaded: &Loaded,
    material: i64,
    lot: &MaterialLot,
    (quantity, unit): (Decimal, &str),
) -> Result<i64, Failure> {
    let take = NewTake {
        material_lot: lot.facts.id,
        material,
        lot: loaded.record.lot,
        quantity,
        unit: unit.to_string(),
    };
    Ok(at_field(crate::acts::material_lot::take_inside(change, &take), "material_lot")?.stock_entry)
}
