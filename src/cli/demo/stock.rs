//! What the demo makes its lots from and in: deliveries with assay and release, equipment with its cleaning.

use rust_decimal::{Decimal, RoundingStrategy};

use super::player::Player;
use crate::acts;
use crate::acts::signature::MaterialStatus as Meaning;
use crate::domain::equipment::{EquipmentEventKind, NewEquipment, NewEquipmentEvent};
use crate::domain::failure::Failure;
use crate::domain::instrument::{EventDetail, EventKind, NewEvent, NewInstrument};
use crate::domain::master::scale::Amount;
use crate::domain::material_lot::{MaterialStatus, NewAssay, NewMaterialLot, NewStatus};
use crate::domain::moment::plus_days;

impl Player<'_> {
    /// Vessels, mill, blender and line, and the floor balance.
    pub fn make_equipment(&mut self) -> Result<(), Failure> {
        for row in &self.seed.equipment {
            let new = NewEquipment {
                code: row.code.clone(),
                name: row.name.clone(),
                class: row.class.clone(),
                location: row.location.clone(),
                clean_hold_days: 5,
                campaign_days: 0,
                needs_clean_check: true,
                needs_calibration: false,
            };
            let actor = self.person("maren.oddy")?;
            let id = acts::equipment::add(self.db, &actor, &new)?;
            self.made.insert(format!("equipment {}", row.class), id);
        }
        let actor = self.person("maren.oddy")?;
        let new = NewInstrument {
            code: "BAL-9".to_string(),
            name: "Floor balance 9".to_string(),
            kind: "balance".to_string(),
            needs_daily_check: true,
        };
        let id = acts::instrument::add(self.db, &actor, &new)?;
        self.made.insert("instrument floor balance".to_string(), id);
        Ok(())
    }

    /// The check of the floor balance, once a day.
    pub fn check_floor_balance(&mut self) -> Result<i64, Failure> {
        let balance = self.number("instrument floor balance")?;
        let today = self.now.plus_seconds(60).date();
        if self.checked_on.get(&balance) != Some(&today) {
            let actor = self.person("rafe.tolland")?;
            let detail = EventDetail {
                is_within_limits: true,
                reference: "weight set W-5".to_string(),
                ..EventDetail::default()
            };
            let new =
                NewEvent { kind: EventKind::DailyCheck, performed_on: actor.at.date(), due_on: None, detail };
            acts::instrument::record_event(self.db, &actor, balance, &new)?;
            self.checked_on.insert(balance, actor.at.date());
        }
        Ok(balance)
    }

    /// Cleaned by one operator and looked at by the other, before a lot.
    pub fn clean(&mut self, class: &str) -> Result<(), Failure> {
        let id = self.number(&format!("equipment {class}"))?;
        let events = [
            ("bea.skelton", EquipmentEventKind::Cleaned, "hot water, agent 3, rinsed to conductivity"),
            ("colm.fadden", EquipmentEventKind::CheckedClean, "dry, nothing seen in the outlet"),
        ];
        for (who, kind, note) in events {
            let actor = self.person(who)?;
            let new = NewEquipmentEvent {
                kind,
                happened_on: actor.at.date(),
                due_on: None,
                lot: None,
                note: note.to_string(),
            };
            acts::equipment::record_event(self.db, &actor, id, &new)?;
        }
        Ok(())
    }

    /// The material lot in use: a delivery serves some lots and one year, then the next one comes.
    pub fn material_lot(&mut self, amount: &Amount) -> Result<String, Failure> {
        let target = amount.target.unwrap_or_default();
        let needed = target * Decimal::new(105, 2);
        let today = self.now.date();
        let known =
            self.db.read(|reader| crate::store::material_lot::of_material(reader, amount.material))?;
        let in_use = known.iter().rev().find(|lot| {
            lot.facts.balance >= needed && lot.facts.expires_on.is_some_and(|on| on > plus_days(today, 60))
        });
        match in_use {
            Some(lot) => Ok(lot.facts.number.clone()),
            None => self.receive_lot(amount, target, known.len() + 1),
        }
    }

    fn receive_lot(&mut self, amount: &Amount, target: Decimal, count: usize) -> Result<String, Failure> {
        let seed = self.seed;
        let code = seed.materials.iter().find(|row| self.made.get(&row.code) == Some(&amount.material));
        let code = code.map(|row| row.code.clone()).unwrap_or_default();
        let number = format!("{}-{count:02}", code.replace("MAT-", "ML-"));
        let quantity = (target * Decimal::from(5)).round_dp_with_strategy(1, RoundingStrategy::AwayFromZero);
        let today = self.now.date();
        let new = NewMaterialLot {
            material: amount.material,
            number: number.clone(),
            supplier: "Fellside Minerals".to_string(),
            supplier_lot: format!("F{}{count:02}", today.format("%y%m")),
            received_on: plus_days(today, -1),
            quantity,
            unit: amount.unit.clone(),
            packages: Some(10),
            retest_on: None,
            expires_on: Some(plus_days(today, 720)),
            location: "warehouse 1".to_string(),
        };
        let actor = self.person("colm.fadden")?;
        let id = acts::material_lot::receive(self.db, &actor, &new)?;
        if seed.weighing.iter().any(|row| row.material == code && row.corrected == "yes") {
            let assay = NewAssay {
                assay: Some(Decimal::new(986, 1)),
                assay_unit: "%".to_string(),
                assay_basis: "anhydrous".to_string(),
                water: Some(Decimal::new(134, 1)),
                water_unit: "%".to_string(),
                reference: format!("certificate {}", new.supplier_lot),
            };
            let actor = self.person("rafe.tolland")?;
            acts::material_lot::record_assay(self.db, &actor, id, &assay)?;
        }
        let qa = self.person("ada.whitlock")?;
        let why = "certificate and identity test agree".to_string();
        let status = NewStatus { status: MaterialStatus::Released, retest_on: None, why };
        let signed = self.sign::<Meaning>(&qa)?;
        acts::material_lot::set_status(self.db, &qa, id, &status, &signed)?;
        Ok(number)
    }
}
