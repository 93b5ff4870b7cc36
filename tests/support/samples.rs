//! A bench of the small named world: a presentation with two numeric tests, its lots and their samples.

use chrono::NaiveDate;
use rust_decimal::Decimal;
use supernate::acts;
use supernate::acts::reading::How;
use supernate::acts::signature::Approval;
use supernate::domain::lot::{NewLot, Scale};
use supernate::domain::method::{MethodContent, Reportable, RoundTo, TestKind, preset};
use supernate::domain::qualification::NewQualification;
use supernate::domain::reading::{Entry, Said};
use supernate::domain::reason::Reason;
use supernate::domain::sample::{NewSample, Purpose};
use supernate::domain::shelf_life::{ExpiryFormat, NewShelfLife, STORAGE_STATEMENTS};
use supernate::domain::specification::{SpecificationContent, TestLimits, Way};
use supernate::domain::typed::Number;
use supernate::domain::version::Versioned;
use supernate::store;
use supernate::store::bench::BenchSample;

use super::world::{approve, approved_formulation, between, method_with, presentation, product, signed};
use super::{Lab, Seen};

/// Two analysts qualified for two tests, `assay` (95.0 to 105.0 %, release 97.0 to 103.0) and `density`.
pub struct Bench<'a> {
    pub lab: &'a Lab,
    pub presentation: i64,
    pub formulation_version: i64,
}

fn content(unit: &str, decimals: u32) -> MethodContent {
    let mut content = preset::of(TestKind::Numeric);
    content.unit = unit.to_string();
    content.reading_decimals = decimals;
    content.rounding.to = RoundTo::Decimals(decimals);
    content.reportable =
        Reportable::Mean { range_at_most: Some(Decimal::from(20)), rsd_percent_at_most: None };
    content
}

impl<'a> Bench<'a> {
    pub fn new(lab: &'a Lab) -> Bench<'a> {
        let product = product(lab, "TW");
        let presentation = presentation(lab, product, "TW-104");
        let formulation_version = approved_formulation(lab, product);
        let assay = method_with(lab, "AS-01", "Assay", content("%", 1));
        let density = method_with(lab, "DE-01", "Density", content("g/mL", 2));
        let limits = |test: &str, title: &str, method_version: i64, release, shelf_life| {
            let method = lab.app.db.read(|reader| store::method::version(reader, method_version)).unwrap();
            TestLimits {
                test: test.to_string(),
                title: title.to_string(),
                method: method.method,
                unit: method.content.unit,
                release,
                shelf_life,
                in_use: between("", ""),
                way: Way::Rounding,
            }
        };
        let tests = vec![
            limits("assay", "Assay", assay, between("97.0", "103.0"), between("95.0", "105.0")),
            limits("density", "Density", density, between("1.00", "1.20"), between("1.00", "1.20")),
        ];
        let tests = SpecificationContent { tests };
        let manager = lab.actor("maren.oddy");
        let id = acts::specification::add(&lab.app.db, &manager, "SP-104", presentation, &tests).unwrap();
        approve(lab, Versioned::Specification, id, "maren.oddy", "ada.whitlock");
        let bench = Bench { lab, presentation, formulation_version };
        for person in ["rafe.tolland", "ilse.brandt"] {
            bench.qualifies(person, assay);
            bench.qualifies(person, density);
        }
        bench
    }

    fn qualifies(&self, user_name: &str, method_version: i64) {
        let new = NewQualification {
            account: self.lab.actor(user_name).account,
            method_version,
            starts_on: NaiveDate::from_ymd_opt(2026, 1, 1).unwrap(),
            ends_on: supernate::domain::moment::plus_days(self.lab.now().date(), 1100),
            reference: "training record 12".to_string(),
        };
        acts::qualification::add(&self.lab.app.db, &self.lab.actor("maren.oddy"), &new).unwrap();
    }

    pub fn lot(&self, number: &str) -> i64 {
        self.lot_made_on(number, NaiveDate::from_ymd_opt(2026, 11, 20).unwrap())
    }

    pub fn lot_made_on(&self, number: &str, made_on: NaiveDate) -> i64 {
        self.lot_of_version(number, made_on, self.formulation_version)
    }

    pub fn lot_of_version(&self, number: &str, made_on: NaiveDate, formulation_version: i64) -> i64 {
        let new = NewLot {
            number: number.to_string(),
            presentation: self.presentation,
            formulation_version,
            made_on,
            size: None,
            size_unit: None,
            scale: Scale::Production,
            container_closure: "PET bottle, PP cap".to_string(),
            bulk_lot: None,
        };
        acts::lot::make(&self.lab.app.db, &self.lab.actor("bea.skelton"), &new).unwrap()
    }

    /// A sample of a lot with these tests.
    pub fn receives(&self, lot: i64, purpose: Purpose, tests: &[&str]) -> i64 {
        let analyst = self.lab.actor("rafe.tolland");
        let new = NewSample {
            lot,
            purpose,
            containers: 2,
            condition_on_receipt: "sealed, clean".to_string(),
            handed_over_by: "Bea Skelton".to_string(),
            received_on: analyst.at.date(),
            tests: tests.iter().map(|test| test.to_string()).collect(),
        };
        acts::sample::receive(&self.lab.app.db, &analyst, &new).unwrap()
    }

    /// QA assigns 24 months, printed as a month, from today on.
    pub fn assigns_shelf_life(&self) {
        let actor = self.lab.actor("ada.whitlock");
        let new = NewShelfLife {
            presentation: self.presentation,
            market: "United Kingdom".to_string(),
            storage_statement: STORAGE_STATEMENTS[0].to_string(),
            months: 24,
            in_use_days: None,
            basis: "tentative".to_string(),
            reference: "protocol PR-104 and report RP-7".to_string(),
            effective_from: actor.at.date(),
            expiry_format: ExpiryFormat::Month,
        };
        let signed = signed::<Approval>(self.lab, &actor);
        acts::shelf_life::assign(&self.lab.app.db, &actor, &new, &signed).unwrap();
    }

    pub fn sample(&self, sample: i64) -> BenchSample {
        self.lab.app.db.read(|reader| store::bench::sample(reader, sample)).unwrap()
    }

    /// The number of a sample's test by its code.
    pub fn test(&self, sample: i64, code: &str) -> i64 {
        self.sample(sample).tests.iter().find(|test| test.test == code).unwrap().id
    }

    fn entry(&self, sample: &BenchSample, test: i64, place: usize, value: &str) -> Entry {
        let slots = sample.slots(sample.test(test).unwrap());
        let slot = slots.into_iter().filter(|slot| slot.key.field == "value").nth(place).unwrap();
        let decimal: Decimal = value.parse().unwrap();
        Entry {
            slot,
            said: Said::Number(Number { text: value.to_string(), value: decimal, decimals: decimal.scale() }),
        }
    }

    fn how(&self, sample: &BenchSample, test: i64) -> How {
        let seen = sample.readings.iter().map(|(_, reading)| reading.id).max().unwrap_or_default();
        let label = sample.containers.first().map_or(sample.number.clone(), |first| first.label.clone());
        How { sample_test: test, label, seen, ..How::default() }
    }

    /// A person records the readings of a test, keeps what is questioned, and completes it.
    pub fn completes(&self, user_name: &str, sample: i64, code: &str, values: &[&str]) {
        self.records(user_name, sample, code, values);
        self.completes_again(user_name, sample, code);
    }

    /// A person records the readings of a test and keeps what is questioned.
    pub fn records(&self, user_name: &str, sample: i64, code: &str, values: &[&str]) {
        let (db, actor) = (&self.lab.app.db, self.lab.actor(user_name));
        let test = self.test(sample, code);
        for (place, value) in values.iter().enumerate() {
            let found = self.sample(sample);
            let entry = self.entry(&found, test, place, value);
            let how = self.how(&found, test);
            acts::reading::record(db, &actor, &how, &[entry], &Reason::none()).unwrap();
        }
        self.keeps(user_name, sample, code);
    }

    fn keeps(&self, user_name: &str, sample: i64, code: &str) {
        let (db, actor) = (&self.lab.app.db, self.lab.actor(user_name));
        let test = self.test(sample, code);
        let readings = self.sample(sample).readings_of(test);
        for reading in supernate::domain::reading::standing(&readings) {
            if reading.has_open_question() {
                acts::reading::keep(db, &actor, test, reading.id).unwrap();
            }
        }
    }

    /// A person completes a test from the readings that stand.
    pub fn completes_again(&self, user_name: &str, sample: i64, code: &str) {
        self.keeps(user_name, sample, code);
        let (db, actor) = (&self.lab.app.db, self.lab.actor(user_name));
        let test = self.test(sample, code);
        acts::result::complete(db, &actor, test).unwrap();
    }

    /// A person corrects one reading.
    pub fn corrects(&self, user_name: &str, sample: i64, code: &str, place: usize, value: &str) {
        let found = self.sample(sample);
        let test = self.test(sample, code);
        let entry = self.entry(&found, test, place, value);
        let reason = Reason::given("mistyped").unwrap();
        let how = self.how(&found, test);
        acts::reading::correct(&self.lab.app.db, &self.lab.actor(user_name), &how, &entry, &reason).unwrap();
    }

    /// The second analyst checks a test through its page.
    pub fn checks(&self, user_name: &str, sample: i64, code: &str) -> Seen {
        let page = format!("/checks/{}", self.test(sample, code));
        self.lab.person(user_name).does(&page, &page, &[])
    }

    /// A sample with both tests within limits, read by one analyst and checked by the other.
    pub fn ready(&self, lot: i64, purpose: Purpose) -> i64 {
        let sample = self.receives(lot, purpose, &["assay", "density"]);
        self.completes("rafe.tolland", sample, "assay", &["99.6", "100.2"]);
        self.completes("rafe.tolland", sample, "density", &["1.11", "1.12"]);
        self.checks("ilse.brandt", sample, "assay");
        self.checks("ilse.brandt", sample, "density");
        sample
    }

    /// A sample whose assay is above its limit, checked.
    pub fn outside(&self, lot: i64, purpose: Purpose) -> i64 {
        let sample = self.receives(lot, purpose, &["assay"]);
        self.completes("rafe.tolland", sample, "assay", &["107.6", "108.2"]);
        self.checks("ilse.brandt", sample, "assay");
        sample
    }
}
