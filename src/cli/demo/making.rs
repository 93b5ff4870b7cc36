//! Making the demo's lots: every step through the acts, by two operators who check each other.

use rust_decimal::{Decimal, RoundingStrategy};

use super::player::{Player, Scene, working_day};
use super::seed::LotRow;
use crate::acts;
use crate::acts::batch::Loaded;
use crate::acts::batch::step::{How, Read};
use crate::acts::batch::weighing::NewWeighing;
use crate::acts::batch::yields::Entered;
use crate::acts::signature::{Authorship, Closure};
use crate::domain::batch::rule::to_weigh_again;
use crate::domain::batch::start::NewBatch;
use crate::domain::batch::state::slots;
use crate::domain::batch::weighing::{TypedWeight, full_target, target};
use crate::domain::batch::yields::NewYield;
use crate::domain::deviation::{DeviationClass, DeviationEntryKind, NewDeviationEntry};
use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;
use crate::domain::lot::Scale;
use crate::domain::master::{StepKind, StepValue};
use crate::domain::moment::plus_days;
use crate::domain::typed::Number;
use crate::store;

const DOER: &str = "bea.skelton";
const CHECKER: &str = "colm.fadden";

/// A number as it would be typed.
fn typed(value: Decimal) -> Number {
    Number { text: value.to_string(), value, decimals: value.scale() }
}

impl Player<'_> {
    /// Starts the record of a lot and carries it out as far as its story goes; answers with the lot.
    pub fn carry_out(
        &mut self,
        row: &LotRow,
        presentation: i64,
        version: i64,
        pack: &str,
    ) -> Result<i64, Failure> {
        let new = NewBatch {
            number: row.number.clone(),
            presentation,
            formulation_version: version,
            size: row.size,
            scale: Scale::Production,
            container_closure: pack.to_string(),
        };
        let actor = self.person(DOER)?;
        let record = acts::batch::start(self.db, &actor, &new)?;
        let loaded = self.db.read(|reader| Loaded::of(reader, record))?;
        let content = &loaded.record.content;
        self.check_floor_balance()?;
        let mut classes: Vec<String> =
            content.steps().iter().map(|planned| planned.step.equipment_class.clone()).collect();
        classes.retain(|class| !class.is_empty());
        classes.sort();
        classes.dedup();
        for class in classes {
            self.clean(&class)?;
        }
        let most = if row.making == "half" { 3 } else { usize::MAX };
        for planned in content.steps().into_iter().take(most) {
            self.carry_out_step(record, planned.number)?;
            let is_last = content.step(planned.number + 1).is_none_or(|next| next.phase != planned.phase);
            if is_last && content.phase(planned.phase).is_some_and(|phase| phase.theory.is_some()) {
                self.yield_of(record, planned.phase, row)?;
            }
        }
        if row.making != "half" {
            self.close_record(record)?;
        }
        Ok(loaded.record.lot)
    }

    fn at_step(&self, record: i64, step: usize) -> Result<(How, Loaded), Failure> {
        let loaded = self.db.read(|reader| Loaded::of(reader, record))?;
        let seen = loaded.entries.iter().map(|one| one.id).max().unwrap_or_default();
        Ok((How { record, step, seen, ..How::default() }, loaded))
    }

    fn carry_out_step(&mut self, record: i64, number: usize) -> Result<(), Failure> {
        let (how, loaded) = self.at_step(record, number)?;
        let planned = loaded.facts(number)?.planned;
        let equipment = match planned.step.equipment_class.as_str() {
            "" => None,
            class => Some(self.number(&format!("equipment {class}"))?),
        };
        let actor = self.person(DOER)?;
        acts::batch::step::start(self.db, &actor, &how, equipment, planned.step.kind == StepKind::Fill)?;
        if planned.step.dispense.is_some() {
            self.weigh(record, number)?;
        }
        let (_, loaded) = self.at_step(record, number)?;
        let facts = loaded.facts(number)?;
        for (at, slot) in slots(&facts.planned, facts.entries).iter().enumerate() {
            let read = self.usual(
                &loaded.record.content.product,
                &planned.step.title,
                &planned.step.values[slot.value],
            )?;
            let (how, _) = self.at_step(record, number)?;
            let actor = self.person(DOER)?;
            acts::batch::step::value(self.db, &actor, &how, at, &read)?;
        }
        self.now = self.now.plus_minutes(i64::from(planned.step.least_minutes.unwrap_or(0)) + 1);
        let (how, _) = self.at_step(record, number)?;
        let actor = self.person(DOER)?;
        acts::batch::step::end(self.db, &actor, &how, None)?;
        if planned.step.needs_check {
            self.check(record, number)?;
        }
        Ok(())
    }

    fn weigh(&mut self, record: i64, number: usize) -> Result<(), Failure> {
        let (how, loaded) = self.at_step(record, number)?;
        let planned = loaded.facts(number)?.planned;
        let content = &loaded.record.content;
        let amount = planned.step.dispense.and_then(|dispense| content.scaled.amount(dispense.material));
        let amount = amount.ok_or_else(|| Failure::missing("amount of this step"))?;
        let material_lot = self.material_lot(amount)?;
        let target = target(content, &planned).ok_or_else(|| Failure::missing("target of this step"))?;
        let full = self.db.read(|reader| {
            let lot = store::material_lot::by_scan(reader, &material_lot)?;
            let lot = lot.ok_or_else(|| Failure::missing("material lot of this step"))?;
            Ok(acts::batch::weighing::full(reader, &target, &lot)?.0)
        })?;
        let net = full.or(full_target(&target, None).map(|(full, _)| full)).unwrap_or_default();
        let tare = target.row.rounding_step * Decimal::from(120);
        let weighing = NewWeighing {
            material_lot,
            balance: Some(self.number("instrument floor balance")?),
            typed: TypedWeight {
                gross: Some(typed(net + tare)),
                tare: Some(typed(tare)),
                net: Some(typed(net)),
            },
            described: None,
        };
        let actor = self.person(DOER)?;
        acts::batch::weighing::weigh(self.db, &actor, &how, &weighing)?;
        Ok(())
    }

    /// What is usually read of a value.
    fn usual(&self, product: &str, step: &str, value: &StepValue) -> Result<Read, Failure> {
        let rows = self.seed.values.iter();
        let row = rows
            .filter(|row| product.starts_with(&row.product) && row.step == step)
            .find(|row| row.name == value.name);
        let typical = row.map(|row| row.typical.as_str()).unwrap_or_default();
        if value.is_words {
            return Ok(Read::Words("conforms"));
        }
        let number: Decimal = typical.parse().map_err(Failure::fault)?;
        Ok(Read::Number(typed(number)))
    }

    fn check(&mut self, record: i64, number: usize) -> Result<(), Failure> {
        let (how, loaded) = self.at_step(record, number)?;
        let first = to_weigh_again(&loaded.facts(number)?).first().map(|one| (one.id, one.value));
        let mut how = how;
        if let Some((first, Some(value))) = first {
            let actor = self.person(CHECKER)?;
            let balance = Some(self.number("instrument floor balance")?);
            let weight = TypedWeight { net: Some(typed(value)), ..TypedWeight::default() };
            acts::batch::check::weigh_again(self.db, &actor, &how, first, balance, &weight)?;
            how = self.at_step(record, number)?.0;
        }
        let actor = self.person(CHECKER)?;
        acts::batch::check::check(self.db, &actor, &how)?;
        Ok(())
    }

    fn yield_of(&mut self, record: i64, phase: usize, row: &LotRow) -> Result<(), Failure> {
        let (_, loaded) = self.at_step(record, 1)?;
        let Some((name, theory)) =
            loaded.record.content.phase(phase).and_then(|one| Some((&one.name, one.theory.as_ref()?)))
        else {
            return Ok(());
        };
        let usual = self.seed.yields.iter().find(|one| one.product == row.product && one.phase == *name);
        let is_low = row.making == "low yield" && phase == 1;
        let percent =
            if is_low { Decimal::new(913, 1) } else { usual.map(|one| one.typical).unwrap_or_default() };
        let theoretical = row.size * theory.per_size_unit;
        let part = |percent: Decimal| {
            let exact = theoretical * percent / Decimal::ONE_HUNDRED;
            exact.round_dp_with_strategy(0, RoundingStrategy::MidpointAwayFromZero)
        };
        let described = "The bottom valve of the vessel leaked in the night; about 150 L were found on the floor and \
                         thrown away.";
        let entered = Entered {
            figures: NewYield {
                actual: part(percent),
                samples: part(Decimal::new(2, 1)),
                rejects: Decimal::ZERO,
                waste: part(Decimal::new(4, 1)),
            },
            described: is_low.then(|| described.to_string()),
            seen: 0,
        };
        let actor = self.person(DOER)?;
        acts::batch::yields::record(self.db, &actor, record, phase, &entered)?;
        let loaded = self.db.read(|reader| Loaded::of(reader, record))?;
        let percent = loaded.yields.last().map(|one| one.percent).unwrap_or_default();
        let actor = self.person(CHECKER)?;
        acts::batch::yields::check(self.db, &actor, record, phase, percent)
    }

    fn close_record(&mut self, record: i64) -> Result<(), Failure> {
        let canonical = self.db.read(|reader| store::batch::canonical(reader, record, None))?;
        let actor = self.person(CHECKER)?;
        let signed = self.sign::<Authorship>(&actor)?;
        acts::batch::close(self.db, &actor, record, &sha256_hex(canonical.as_bytes()), &signed)
    }

    /// What follows when the yield was too low: the deviation is worked on and closed, the lot rejected.
    pub fn plan_low_yield(&mut self, at: usize) {
        let today = self.now.date();
        self.plan(working_day(plus_days(today, 5)), 10, 0, Scene::CloseDeviations(at));
        self.plan(working_day(plus_days(today, 6)), 11, 0, Scene::DecideLot(at));
    }

    pub fn close_deviations(&mut self, at: usize) -> Result<(), Failure> {
        let lot = self.number(&self.seed.lots[at].number.clone())?;
        let open = self.db.read(|reader| store::deviation::of_lot(reader, lot))?;
        let lines = [
            (
                DeviationEntryKind::Classified,
                Some(DeviationClass::Major),
                "The bulk stood open to the room for hours.",
            ),
            (
                DeviationEntryKind::Cause,
                None,
                "The seal of the bottom valve was worn; it was last changed two years ago.",
            ),
            (
                DeviationEntryKind::Action,
                None,
                "Seals of all vessels changed; a yearly change is in the plan.",
            ),
            (
                DeviationEntryKind::OtherLotsAssessed,
                None,
                "Yields of the lots before it lie within 98 to 100 %.",
            ),
            (
                DeviationEntryKind::NotAddedToStability,
                None,
                "The lot is rejected, so nothing of it is stored.",
            ),
        ];
        for deviation in open {
            for (kind, class, text) in lines {
                let new =
                    NewDeviationEntry { kind, class, text: text.to_string(), other_lot: None, study: None };
                let actor = self.person("maren.oddy")?;
                acts::deviation::write(self.db, &actor, deviation.id, &new)?;
            }
            let qa = self.person("ada.whitlock")?;
            let signed = self.sign::<Closure>(&qa)?;
            let conclusion = "Cause found and mended; the rest of the lot is rejected.";
            acts::deviation::close(self.db, &qa, deviation.id, conclusion, &signed)?;
        }
        Ok(())
    }
}
