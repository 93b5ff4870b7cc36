//! Lots of the demo: made, tested for release, decided, and put on a study.

use super::bench::Twist;
use super::player::{Player, Scene, working_day};
use crate::acts;
use crate::acts::signature::{Rejection, Release};
use crate::domain::completeness::statement::{NewAnswer, NewElsewhere};
use crate::domain::completeness::{AnswerKind, judge};
use crate::domain::failure::Failure;
use crate::domain::lot::NewDistribution;
use crate::domain::lot_decision::Looked;
use crate::domain::moment::plus_days;
use crate::domain::packaging::{CountKind, LABEL, NewCount, NewPackagingItem};
use crate::domain::protocol::ProtocolContent;
use crate::domain::sample::{NewSample, Purpose};
use crate::domain::study::NewStudy;
use crate::domain::version::Versioned;
use crate::store;
use rust_decimal::Decimal;

impl Player<'_> {
    pub fn make_lot(&mut self, at: usize) -> Result<(), Failure> {
        let seed = self.seed;
        let row = &seed.lots[at];
        let product = seed.products.iter().find(|one| one.code == row.product);
        let product = product.ok_or_else(|| Failure::missing("product of the lot"))?;
        let version = format!("{} version {}", row.product, row.version);
        if !self.made.contains_key(&version) {
            self.write_version(product, row.version)?;
        }
        let made_on = self.now.date();
        let (presentation, version) = (self.number(&product.presentation)?, self.number(&version)?);
        let lot = self.carry_out(row, presentation, version, &product.pack)?;
        self.made.insert(row.number.clone(), lot);
        if row.making == "low yield" {
            self.plan_low_yield(at);
        } else if !row.decision.is_empty() {
            self.plan(working_day(plus_days(made_on, 4)), 9, 10, Scene::TestRelease(at));
        }
        Ok(())
    }

    pub fn test_release(&mut self, at: usize) -> Result<(), Failure> {
        let row = &self.seed.lots[at];
        let lot = self.number(&row.number)?;
        let tests = self.seed.limits.iter().filter(|limit| limit.product == row.product);
        let tests = tests
            .filter(|limit| limit.test != "as-stored-sediment")
            .map(|limit| limit.test.clone())
            .collect();
        let actor = self.person("ilse.brandt")?;
        let new = NewSample {
            lot,
            purpose: Purpose::Release,
            containers: 6,
            condition_on_receipt: "sealed, room temperature".to_string(),
            handed_over_by: "Bea Skelton".to_string(),
            received_on: actor.at.date(),
            tests,
        };
        let sample = acts::sample::receive(self.db, &actor, &new)?;
        self.made.insert(format!("release {}", row.number), sample);
        let today = self.now.date();
        self.test_sample(sample, today, "ilse.brandt", &Twist::default())?;
        self.plan(
            working_day(plus_days(today, 3)),
            11,
            0,
            Scene::CheckSample { sample, checker: "rafe.tolland" },
        );
        self.plan(working_day(plus_days(today, 5)), 14, 0, Scene::ReviewSample(sample));
        self.plan(working_day(plus_days(today, 8)), 15, 30, Scene::DecideLot(at));
        Ok(())
    }

    pub fn decide_lot(&mut self, at: usize) -> Result<(), Failure> {
        let row = &self.seed.lots[at];
        let lot = self.number(&row.number)?;
        let actor = self.person("per.lindqvist")?;
        if row.decision == "rejected" {
            let signed = self.sign::<Rejection>(&actor)?;
            let why = match row.making.as_str() {
                "low yield" => {
                    "Yield 91.3 % of theory: the bulk ran out through a worn valve and stood open."
                }
                _ => "Viscosity below the release limit: the bentonite was hydrated too short.",
            };
            return acts::lot_decision::reject(self.db, &actor, lot, &signed.stating(why));
        }
        let signed = self.sign::<Release>(&actor)?;
        self.complete_record(lot, &row.number)?;
        let newest_act = self.db.read(|reader| store::lot_review::newest_act(reader, lot))?;
        let looked = Looked { up_to_act: newest_act, is_reviewed: true };
        acts::lot_decision::release(self.db, &actor, lot, looked, &signed)?;
        let today = self.now.date();
        let actor = self.person("ada.whitlock")?;
        let new = NewDistribution { first_on: today, markets: "UK".to_string() };
        acts::lot::distribute(self.db, &actor, lot, &new)?;
        if !row.study.is_empty() {
            self.plan(working_day(plus_days(today, 5)), 9, 0, Scene::StartStudy(at));
        }
        Ok(())
    }

    /// What the rows of the making do not show: labels counted and checked, the specimen and the examination stated.
    /// A lot that was not carried out here says where its executed record is kept.
    fn complete_record(&mut self, lot: i64, number: &str) -> Result<(), Failure> {
        let manager = self.person("maren.oddy")?;
        let evidence = self.db.read(|reader| store::completeness::evidence(reader, lot))?;
        if evidence.record.is_none() {
            let new = NewElsewhere {
                reference: format!("BR-{number}"),
                place: "paper archive, room 2".to_string(),
                why: "carried out on paper before this program was in use".to_string(),
            };
            return acts::completeness::refer(self.db, &manager, lot, &new);
        }
        self.count_labels(lot)?;
        let stated = [
            (6, "Filling room 2 inspected before and after use, line book page 41"),
            (8, "Specimen on page 3 of the packing sheet, kept in the label folder"),
            (13, "20 packed bottles examined at the end of filling, no fault, packing sheet page 5"),
        ];
        let evidence = self.db.read(|reader| store::completeness::evidence(reader, lot))?;
        let open: Vec<u8> =
            judge(&evidence).iter().filter(|item| item.is_missing()).map(|item| item.number).collect();
        for (item, text) in stated.into_iter().filter(|(item, _)| open.contains(item)) {
            let new = NewAnswer { item, kind: AnswerKind::Present, text: text.to_string() };
            acts::completeness::answer(self.db, &manager, lot, &new)?;
        }
        Ok(())
    }

    fn count_labels(&mut self, lot: i64) -> Result<(), Failure> {
        let (operator, manager) = (self.person("bea.skelton")?, self.person("maren.oddy")?);
        let new = NewPackagingItem {
            kind: LABEL.to_string(),
            name: "label 60 × 40, version 3".to_string(),
            material_lot: None,
            least_percent: Decimal::from(98),
            most_percent: Decimal::ONE_HUNDRED,
        };
        let item = acts::packaging::add(self.db, &operator, lot, &new)?;
        for (kind, count) in [(CountKind::Issued, 2600), (CountKind::Used, 2480), (CountKind::Destroyed, 112)]
        {
            let new = NewCount { kind, count, supersedes: None, why: String::new() };
            acts::packaging::count(self.db, &operator, item, &new)?;
        }
        acts::packaging::check(self.db, &manager, item)?;
        Ok(())
    }

    pub fn start_study(&mut self, at: usize) -> Result<(), Failure> {
        let row = &self.seed.lots[at];
        let protocol_version = self.number(&format!("protocol {}", row.product))?;
        let content: ProtocolContent = self
            .db
            .read(|reader| store::version::get(reader, Versioned::Protocol, protocol_version)?.read())?;
        let chambers = content
            .arms
            .iter()
            .map(|arm| self.made.get(&format!("chamber {}", arm.condition)).copied())
            .collect();
        let actor = self.person("maren.oddy")?;
        let new = NewStudy {
            number: row.study.clone(),
            lot: self.number(&row.number)?,
            protocol_version,
            started_on: actor.at.date(),
            chambers,
        };
        let study = acts::study::start(self.db, &actor, &new)?;
        let pulls = self.db.read(|reader| store::pull::of_study(reader, study))?;
        for pull in pulls {
            let Some(due) = pull.facts.due_on else { continue };
            self.plan(pull.facts.earliest_on.unwrap_or(due), 0, 5, Scene::SealForecasts);
            self.plan(working_day(due), 9, 20, Scene::TakePull { lot: at, pull: pull.id });
        }
        Ok(())
    }
}
