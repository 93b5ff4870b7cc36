//! What stands before the first lot: products, materials, formulations, methods, specifications, registers.

use std::collections::BTreeMap;

use chrono::NaiveDate;
use rust_decimal::Decimal;

use super::player::Player;
use super::seed::{IngredientRow, LimitRow, ProductRow};
use crate::acts;
use crate::acts::method::NewMethod;
use crate::acts::protocol::NewProtocol;
use crate::acts::signature::{Approval, Authorship};
use crate::acts::version::ContentCheck;
use crate::domain::chamber::NewChamber;
use crate::domain::failure::Failure;
use crate::domain::formulation::{
    FormulationContent, Ingredient, IntendedState, NewFormulation, PhysicalData,
};
use crate::domain::instrument::{EventDetail, EventKind, NewEvent, NewInstrument, PH_METER};
use crate::domain::material::NewMaterial;
use crate::domain::moment::plus_days;
use crate::domain::product::{NewCustomer, NewPresentation, NewProduct};
use crate::domain::protocol::Programme;
use crate::domain::qualification::NewQualification;
use crate::domain::shelf_life::{ExpiryFormat, NewShelfLife};
use crate::domain::specification::{Limit, SpecificationContent, TestLimits, Way};
use crate::domain::version::Versioned;
use crate::store;

const FORMULATOR: &str = "tomas.reyle";
const SECOND_FORMULATOR: &str = "lena.marsh";
const MANAGER: &str = "maren.oddy";
const SECOND_MANAGER: &str = "otis.vane";
const QA: &str = "ada.whitlock";
const SECOND_QA: &str = "per.lindqvist";

impl Player<'_> {
    /// Everything that stands before the first lot is made.
    pub fn make_definitions(&mut self) -> Result<(), Failure> {
        let seed = self.seed;
        for material in &seed.materials {
            let new = NewMaterial {
                code: material.code.clone(),
                name: material.name.clone(),
                function: material.function.clone(),
                density_g_per_ml: material.density,
            };
            let actor = self.person(FORMULATOR)?;
            let id = acts::material::add(self.db, &actor, &new)?;
            self.made.insert(material.code.clone(), id);
        }
        for (code, name, content) in super::method::all() {
            let actor = self.person(MANAGER)?;
            let new = NewMethod { code: code.to_string(), name: name.to_string(), content };
            let version = acts::method::add(self.db, &actor, &new)?;
            self.sign_and_approve(
                Versioned::Method,
                version,
                [MANAGER, SECOND_MANAGER],
                &acts::method::check,
            )?;
            let method = self.db.read(|reader| store::method::version(reader, version))?.method;
            self.made.insert(code.to_string(), method);
            self.qualify(version)?;
        }
        for product in &seed.products {
            self.make_product(product)?;
        }
        self.make_chambers()?;
        self.make_instruments()
    }

    /// The author signs, a second person approves.
    pub fn sign_and_approve(
        &mut self,
        of: Versioned,
        version: i64,
        people: [&str; 2],
        check: ContentCheck<'_>,
    ) -> Result<(), Failure> {
        let seen = self.db.read(|reader| store::version::get(reader, of, version))?.digest();
        let author = self.person(people[0])?;
        let signed = self.sign::<Authorship>(&author)?;
        acts::version::sign(self.db, &author, of, version, &seen, &signed, check)?;
        let approver = self.person(people[1])?;
        let signed = self.sign::<Approval>(&approver)?;
        acts::version::approve(self.db, &approver, of, version, &seen, &signed, check)
    }

    fn make_product(&mut self, row: &ProductRow) -> Result<(), Failure> {
        let actor = self.person(MANAGER)?;
        let customer = match &row.customer {
            Some(name) => {
                let code = name.split(' ').next().unwrap_or(name).to_uppercase();
                Some(acts::product::add_customer(self.db, &actor, &NewCustomer { code, name: name.clone() })?)
            }
            None => None,
        };
        let new = NewProduct {
            code: row.code.clone(),
            name: row.name.clone(),
            dosage_form: row.dosage_form.clone(),
            customer,
        };
        let product = acts::product::add(self.db, &actor, &new)?;
        self.made.insert(row.code.clone(), product);
        let new = NewPresentation {
            product,
            code: row.presentation.clone(),
            strength: row.strength.clone(),
            pack: row.pack.clone(),
            container_word: row.container_word.clone(),
            fill_ml: Some(row.fill_ml),
            market: row.market.clone(),
            permeability: row.permeability.clone(),
        };
        let actor = self.person(MANAGER)?;
        let presentation = acts::product::add_presentation(self.db, &actor, &new)?;
        self.made.insert(row.presentation.clone(), presentation);
        self.make_formulation(row, product)?;
        let specification = self.make_specification(row, presentation)?;
        self.make_protocol(row, presentation, specification)?;
        self.assign_shelf_life(row, presentation)
    }

    fn make_formulation(&mut self, row: &ProductRow, product: i64) -> Result<(), Failure> {
        let actor = self.person(FORMULATOR)?;
        let new = NewFormulation { product, code: format!("F-{}", &row.code[3..]), name: row.name.clone() };
        let formulation = acts::formulation::add(self.db, &actor, &new)?;
        self.made.insert(format!("formulation {}", row.code), formulation);
        self.write_version(row, 1)
    }

    /// Writes, signs and approves one version of a product's formulation.
    pub fn write_version(&mut self, row: &ProductRow, version: u32) -> Result<(), Failure> {
        let seed = self.seed;
        let rows: Vec<&IngredientRow> =
            seed.ingredients.iter().filter(|one| one.product == row.code && one.version == version).collect();
        let Some(first) = rows.first() else { return Err(Failure::missing("ingredients of this version")) };
        let content = FormulationContent {
            dosage_form: row.dosage_form.clone(),
            intended_state: state(&row.intended_state),
            ingredients: rows.iter().map(|one| self.ingredient(one)).collect::<Result<_, _>>()?,
            quantity_basis: row.basis.clone(),
            target_total: row.target_total,
            physical: PhysicalData {
                solids_density_g_per_ml: row.solids_density,
                particle_size_d50_um: row.particle_um,
                vehicle_density_g_per_ml: row.vehicle_density,
                vehicle_low_shear_viscosity_mpa_s: row.vehicle_viscosity,
                dissolved_percent: None,
            },
            master: None,
        };
        let content = FormulationContent { master: Some(self.master(&row.code, &content)?), ..content };
        let formulation = self.number(&format!("formulation {}", row.code))?;
        let actor = self.person(FORMULATOR)?;
        let id = acts::formulation::draft(self.db, &actor, formulation, &first.reason, &content)?;
        self.made.insert(format!("{} version {version}", row.code), id);
        let people = [FORMULATOR, SECOND_FORMULATOR];
        self.sign_and_approve(Versioned::Formulation, id, people, &acts::formulation::check)
    }

    fn ingredient(&self, row: &IngredientRow) -> Result<Ingredient, Failure> {
        let material = self.seed.materials.iter().find(|one| one.code == row.material);
        let material = material.ok_or_else(|| Failure::missing(format!("material {}", row.material)))?;
        Ok(Ingredient {
            material: self.number(&row.material)?,
            material_code: row.material.clone(),
            name: material.name.clone(),
            function: material.function.clone(),
            quantity: row.quantity,
            unit: row.unit.clone(),
            is_quantity_sufficient: row.quantity_sufficient == "yes",
        })
    }

    fn make_specification(&mut self, row: &ProductRow, presentation: i64) -> Result<i64, Failure> {
        let seed = self.seed;
        let tests = seed
            .limits
            .iter()
            .filter(|limit| limit.product == row.code)
            .map(|limit| self.limits(limit))
            .collect::<Result<Vec<_>, _>>()?;
        let actor = self.person(QA)?;
        let content = SpecificationContent { tests };
        let code = format!("SP-{}", &row.code[3..]);
        let version = acts::specification::add(self.db, &actor, &code, presentation, &content)?;
        let people = [QA, SECOND_QA];
        self.sign_and_approve(Versioned::Specification, version, people, &acts::specification::check)?;
        Ok(version)
    }

    fn limits(&self, row: &LimitRow) -> Result<TestLimits, Failure> {
        let contents: BTreeMap<&str, _> =
            super::method::all().into_iter().map(|(code, _, content)| (code, content)).collect();
        let unit = contents.get(row.method.as_str()).map(|content| content.unit.clone()).unwrap_or_default();
        let (release, shelf_life) = if row.test == "appearance" {
            (appearance(&["0"]), appearance(&["0", "1"]))
        } else {
            (range(row.release_lower, row.release_upper), range(row.shelf_lower, row.shelf_upper))
        };
        Ok(TestLimits {
            test: row.test.clone(),
            title: row.title.clone(),
            method: self.number(&row.method)?,
            unit,
            release,
            shelf_life,
            in_use: Limit::None,
            way: Way::Rounding,
        })
    }

    fn make_protocol(
        &mut self,
        row: &ProductRow,
        presentation: i64,
        specification: i64,
    ) -> Result<(), Failure> {
        let actor = self.person(MANAGER)?;
        let new = NewProtocol {
            presentation,
            code: format!("PR-{}", &row.code[3..]),
            title: format!("Primary stability of {}", row.name),
            programme: Programme::Primary,
            specification_version: specification,
        };
        let version = acts::protocol::add(self.db, &actor, &new)?;
        let people = [MANAGER, SECOND_MANAGER];
        self.sign_and_approve(Versioned::Protocol, version, people, &acts::protocol::content_is_sound)?;
        self.made.insert(format!("protocol {}", row.code), version);
        Ok(())
    }

    fn assign_shelf_life(&mut self, row: &ProductRow, presentation: i64) -> Result<(), Failure> {
        let actor = self.person(QA)?;
        let signed = self.sign::<Approval>(&actor)?;
        let new = NewShelfLife {
            presentation,
            market: row.market.clone(),
            storage_statement: row.storage.clone(),
            months: row.shelf_months,
            in_use_days: row.in_use_days,
            basis: "tentative".to_string(),
            reference: "development report, accelerated data".to_string(),
            effective_from: self.now.date(),
            expiry_format: ExpiryFormat::Month,
        };
        acts::shelf_life::assign(self.db, &actor, &new, &signed).map(|_| ())
    }

    fn make_chambers(&mut self) -> Result<(), Failure> {
        let due = plus_days(self.today(), 140);
        for (code, condition, place) in [
            ("CH-25", "25/60", "hall 1, bay 2"),
            ("CH-30", "30/65", "hall 1, bay 3"),
            ("CH-40", "40/75", "hall 1, bay 4"),
        ] {
            let id = self.db.read(|reader| store::condition::by_code(reader, condition))?;
            let id = id.ok_or_else(|| Failure::missing(format!("condition {condition}")))?.id;
            let new = NewChamber {
                code: code.to_string(),
                name: format!("Walk-in chamber {condition}"),
                condition: id,
                location: place.to_string(),
                qualification_due_on: due,
            };
            let actor = self.person(MANAGER)?;
            let chamber = acts::chamber::add(self.db, &actor, &new)?;
            self.made.insert(format!("chamber {id}"), chamber);
        }
        Ok(())
    }

    fn make_instruments(&mut self) -> Result<(), Failure> {
        let register = [
            ("PHM-2", "pH meter 2", PH_METER, true),
            ("VIS-1", "Rotational viscometer 1", "viscometer", false),
            ("BAL-4", "Analytical balance 4", "balance", true),
            ("CYL-A", "Cylinders 100 mL, set A", "cylinder", false),
        ];
        for (code, name, kind, needs_daily_check) in register {
            let actor = self.person(MANAGER)?;
            let new = NewInstrument {
                code: code.to_string(),
                name: name.to_string(),
                kind: kind.to_string(),
                needs_daily_check,
            };
            let id = acts::instrument::add(self.db, &actor, &new)?;
            self.made.insert(format!("instrument {kind}"), id);
        }
        self.make_equipment()?;
        self.yearly_care()
    }

    /// Calibrations for the next thirteen months.
    pub fn yearly_care(&mut self) -> Result<(), Failure> {
        for kind in [PH_METER, "viscometer", "balance", "cylinder", "floor balance"] {
            let instrument = self.number(&format!("instrument {kind}"))?;
            let actor = self.person(MANAGER)?;
            let detail = EventDetail {
                is_within_limits: true,
                reference: format!("certificate {}", actor.at.date().format("%y%m")),
                ..EventDetail::default()
            };
            let due_on = Some(plus_days(actor.at.date(), 396));
            let new = NewEvent { kind: EventKind::Calibrated, performed_on: actor.at.date(), due_on, detail };
            acts::instrument::record_event(self.db, &actor, instrument, &new)?;
        }
        Ok(())
    }

    /// The checks of the day, once a day and instrument, before its first use.
    pub fn daily_checks(&mut self, analyst: &str) -> Result<(), Failure> {
        for kind in [PH_METER, "balance"] {
            let instrument = self.number(&format!("instrument {kind}"))?;
            let today: NaiveDate = self.now.plus_seconds(60).date();
            if self.checked_on.get(&instrument) == Some(&today) {
                continue;
            }
            let actor = self.person(analyst)?;
            let is_ph = kind == PH_METER;
            let detail = EventDetail {
                is_within_limits: true,
                buffers: if is_ph { vec![Decimal::new(700, 2), Decimal::new(1001, 2)] } else { Vec::new() },
                slope_percent: is_ph.then(|| Decimal::new(986, 1)),
                reference: if is_ph { "buffer lots B-11, B-12" } else { "weight set W-3" }.to_string(),
                note: String::new(),
            };
            let new =
                NewEvent { kind: EventKind::DailyCheck, performed_on: actor.at.date(), due_on: None, detail };
            acts::instrument::record_event(self.db, &actor, instrument, &new)?;
            self.checked_on.insert(instrument, actor.at.date());
        }
        Ok(())
    }

    /// Both analysts are qualified for a method version.
    fn qualify(&mut self, method_version: i64) -> Result<(), Failure> {
        for analyst in ["rafe.tolland", "ilse.brandt"] {
            let new = NewQualification {
                account: self.account(analyst)?,
                method_version,
                starts_on: self.now.date(),
                ends_on: plus_days(self.today(), 200),
                reference: "training record, comparison with a second analyst".to_string(),
            };
            let actor = self.person(MANAGER)?;
            acts::qualification::add(self.db, &actor, &new)?;
        }
        Ok(())
    }
}

fn range(lower: Option<Decimal>, upper: Option<Decimal>) -> Limit {
    if lower.is_none() && upper.is_none() { Limit::None } else { Limit::Between { lower, upper } }
}

/// Colour matches, no foreign matter; caking as given.
fn appearance(caking: &[&str]) -> Limit {
    let grades = |codes: &[&str]| codes.iter().map(|code| code.to_string()).collect::<Vec<_>>();
    Limit::Grades(vec![
        ("colour".to_string(), grades(&["0"])),
        ("caking".to_string(), grades(caking)),
        ("foreign_matter".to_string(), grades(&["0"])),
    ])
}

fn state(words: &str) -> IntendedState {
    match words {
        "deflocculated" => IntendedState::Deflocculated,
        "structured-vehicle" => IntendedState::StructuredVehicle,
        "powder" => IntendedState::Powder,
        _ => IntendedState::Flocculated,
    }
}
