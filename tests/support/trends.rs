//! Lots that age side by side: studies of the small bench, pulls taken on their due dates, the assay completed.

use chrono::NaiveDate;
use supernate::acts;
use supernate::acts::protocol::NewProtocol;
use supernate::domain::actor::Actor;
use supernate::domain::moment::{date_stored, plus_days, plus_months};
use supernate::domain::protocol::Programme;
use supernate::domain::study::NewStudy;
use supernate::domain::version::Versioned;
use supernate::store;
use supernate::store::trend::verdict::Verdict;

use super::Lab;
use super::samples::Bench;
use super::world;

/// The first lot starts here.
pub const FIRST_DAY: &str = "2026-12-01";

/// A bench with an approved protocol for its presentation and a shelf life of 24 months.
pub struct Ageing<'a> {
    pub bench: Bench<'a>,
    protocol_version: i64,
}

/// One lot on study.
#[derive(Clone, Debug)]
pub struct Aged {
    pub lot: i64,
    pub study: i64,
    pub started_on: NaiveDate,
}

/// Invented scatter of the assay, in tenths of a percent, by lot and pull.
const SCATTER: [[i64; 8]; 6] = [
    [1, -2, 0, 3, -1, 2, -3, 1],
    [-1, 2, -3, 0, 2, -2, 1, 0],
    [2, 0, 1, -2, -1, 3, 0, -2],
    [0, -1, 2, 1, -3, 0, 2, -1],
    [-2, 1, 0, -1, 3, -1, 0, 2],
    [1, 1, -2, 2, 0, -3, 1, 0],
];

impl<'a> Ageing<'a> {
    pub fn new(lab: &'a Lab) -> Ageing<'a> {
        Ageing::promising(lab, "")
    }

    /// The same with a promise per lot in the protocol, in percent; empty is none.
    pub fn promising(lab: &'a Lab, promise: &str) -> Ageing<'a> {
        let bench = Bench::new(lab);
        bench.assigns_shelf_life();
        world::chambers(lab);
        let specification = lab
            .app
            .db
            .read(|reader| store::specification::approved_of(reader, bench.presentation))
            .unwrap()
            .unwrap();
        let new = NewProtocol {
            presentation: bench.presentation,
            code: "PR-104".to_string(),
            title: "Stability of TW-104".to_string(),
            programme: Programme::Primary,
            specification_version: specification.id,
        };
        let protocol_version = acts::protocol::add(&lab.app.db, &lab.actor("maren.oddy"), &new).unwrap();
        if !promise.is_empty() {
            let page = format!("/protocol-versions/{protocol_version}/arms");
            lab.manager().does(&page, &page, &[("trend_promise", promise)]);
        }
        world::approve(lab, Versioned::Protocol, protocol_version, "maren.oddy", "ada.whitlock");
        Ageing { bench, protocol_version }
    }

    fn lab(&self) -> &'a Lab {
        self.bench.lab
    }

    /// The site's clock at nine in the morning of a day.
    pub fn day(&self, date: NaiveDate) {
        self.lab().clock(&format!("{}T09:00:00Z", date_stored(date)));
    }

    /// A lot made and put on study so many days after the first.
    pub fn starts(&self, number: &str, days: i64) -> Aged {
        self.starts_of(number, days, self.bench.formulation_version)
    }

    /// The same of another formulation version.
    pub fn starts_of(&self, number: &str, days: i64, formulation_version: i64) -> Aged {
        let started_on = plus_days(FIRST_DAY.parse().unwrap(), days);
        self.day(started_on);
        let lot = self.bench.lot_of_version(number, started_on, formulation_version);
        let db = &self.lab().app.db;
        let mut new = NewStudy {
            number: db.read(store::study::next_number).unwrap(),
            lot,
            protocol_version: self.protocol_version,
            started_on,
            chambers: Vec::new(),
        };
        let prepared = db.read(|reader| acts::study::prepare(reader, &new, started_on)).unwrap();
        let chambers = db.read(store::chamber::all).unwrap();
        let at = |condition: i64| chambers.iter().find(|one| one.condition == condition).map(|one| one.id);
        new.chambers = prepared.facts.arms.iter().map(|arm| at(arm.condition)).collect();
        let study = acts::study::start(db, &self.lab().actor("maren.oddy"), &new).unwrap();
        Aged { lot, study, started_on }
    }

    /// The sample of a lot's pull at 25/60 upright.
    pub fn sample(&self, aged: &Aged, months: u32) -> i64 {
        self.pull(aged, months).sample
    }

    pub fn pull(&self, aged: &Aged, months: u32) -> store::pull::Pull {
        let age = supernate::domain::age::Age::Months(months).words();
        world::pull(self.lab(), aged.study, 1, &age)
    }

    /// The clock does its timed work at the present moment.
    pub fn clock_works(&self) -> usize {
        let clock = Actor::clock(self.lab().now());
        acts::forecast::seal_due(&self.lab().app.db, &clock).unwrap()
    }

    /// Takes the pull on its due date; its sample.
    pub fn takes(&self, aged: &Aged, months: u32) -> i64 {
        self.day(plus_months(aged.started_on, months));
        world::take(self.lab(), &self.pull(aged, months))
    }

    /// Takes the pull on its due date and completes the assay with both readings alike.
    pub fn reads(&self, aged: &Aged, months: u32, value: &str) -> i64 {
        let sample = self.takes(aged, months);
        self.bench.completes("rafe.tolland", sample, "assay", &[value, value]);
        sample
    }

    /// The usual assay of lot `place` at its pull `at`: 100 %, falling by 0.1 % a month, with its scatter.
    pub fn usual(place: usize, at: usize, months: u32) -> String {
        let tenths = 1000 - i64::from(months) + SCATTER[place % 6][at % 8];
        format!("{}.{}", tenths / 10, tenths % 10)
    }

    /// History: so many lots, a day apart, at 0, 3, 6, 9, 12 and 18 months, in the order of the days.
    pub fn history(&self, lots: usize) -> Vec<Aged> {
        let aged: Vec<Aged> =
            (0..lots).map(|place| self.starts(&format!("TW-104-07{place:02}"), place as i64)).collect();
        for (at, months) in [0, 3, 6, 9, 12, 18].into_iter().enumerate() {
            for (place, one) in aged.iter().enumerate() {
                self.reads(one, months, &Self::usual(place, at, months));
            }
        }
        aged
    }

    /// The verdicts on the assay of a sample, the newest version first.
    pub fn verdicts(&self, sample: i64) -> Vec<Verdict> {
        let test = self.bench.test(sample, "assay");
        self.lab().app.db.read(|reader| store::trend::verdict::of_test(reader, test)).unwrap()
    }

    /// Rule and verdict of the newest version, in order.
    pub fn judged(&self, sample: i64) -> Vec<(String, String)> {
        let verdicts = self.verdicts(sample);
        let newest = verdicts.iter().map(|one| one.version).max();
        let of_newest = verdicts.into_iter().filter(|one| Some(one.version) == newest);
        of_newest.map(|one| (one.rule, one.verdict)).collect()
    }
}
