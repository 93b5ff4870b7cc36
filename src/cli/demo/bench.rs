//! The bench of the demo: every test of a sample read and completed, through the acts.

use rust_decimal::Decimal;

use super::player::{Player, Scene};
use super::reading::{self, Place};
use crate::acts;
use crate::acts::reading::How;
use crate::domain::failure::Failure;
use crate::domain::method::TestKind;
use crate::domain::reading::{Entry, standing};
use crate::domain::reason::Reason;
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};

/// What was planned to happen to a sample at the bench beyond the plain work.
#[derive(Clone, Debug, Default)]
pub struct Twist {
    /// A test and the text that was mistyped into its first box, corrected afterwards.
    pub mistyped: Option<(String, String)>,
    /// A test whose level is set instead of drawn.
    pub level: Option<(String, Decimal)>,
    /// Stop after this many tests: the sample is in work.
    pub stop_after: Option<usize>,
}

impl Player<'_> {
    /// Reads and completes the tests of a sample; cylinders go on the agenda.
    pub fn test_sample(
        &mut self,
        sample: i64,
        made_on: chrono::NaiveDate,
        analyst: &str,
        twist: &Twist,
    ) -> Result<(), Failure> {
        self.daily_checks(analyst)?;
        let bench = self.db.read(|reader| store::bench::sample(reader, sample))?;
        let place = Place::of(self, &bench, made_on);
        let planned = twist.stop_after.unwrap_or(usize::MAX);
        for test in bench.tests.iter().take(planned) {
            let level = match &twist.level {
                Some((code, level)) if *code == test.test => *level,
                _ => reading::value(self, &place, &test.test),
            };
            self.read_test(&bench, test, &place, level, analyst, twist)?;
        }
        if planned >= bench.tests.len() { self.read_second_parts(&bench, &place, analyst) } else { Ok(()) }
    }

    /// What is looked at after the label shake, once the containers are redispersed.
    fn read_second_parts(
        &mut self,
        bench: &BenchSample,
        place: &Place,
        analyst: &str,
    ) -> Result<(), Failure> {
        for test in bench.tests.iter().filter(|test| test.content.stages().len() > 1) {
            let first = test.content.stages()[0];
            let mut entries = self.entries(bench, test, place, Decimal::ZERO)?;
            entries.retain(|entry| entry.slot.stage != first);
            self.record_part(bench, test, entries, analyst)?;
            self.complete(test.id, analyst)?;
        }
        Ok(())
    }

    fn record_part(
        &mut self,
        bench: &BenchSample,
        test: &BenchTest,
        entries: Vec<Entry>,
        analyst: &str,
    ) -> Result<(), Failure> {
        let how = self.how(bench, test)?;
        let actor = self.person(analyst)?;
        acts::reading::record(self.db, &actor, &how, &entries, &Reason::none()).map(|_| ())
    }

    fn read_test(
        &mut self,
        bench: &BenchSample,
        test: &BenchTest,
        place: &Place,
        level: Decimal,
        analyst: &str,
        twist: &Twist,
    ) -> Result<(), Failure> {
        let entries = self.entries(bench, test, place, level)?;
        if test.kind == TestKind::Sedimentation {
            return self.start_cylinder(bench, test, entries, analyst);
        }
        let stages = test.content.stages();
        if stages.len() > 1 {
            let of_first = entries.into_iter().filter(|entry| entry.slot.stage == stages[0]);
            return self.record_part(bench, test, of_first.collect(), analyst);
        }
        let mut first = entries.clone();
        if let Some((_, text)) = twist.mistyped.as_ref().filter(|(code, _)| *code == test.test) {
            first[0].said = first[0].slot.read(text).map_err(Failure::missing)?;
        }
        let how = self.how(bench, test)?;
        let actor = self.person(analyst)?;
        acts::reading::record(self.db, &actor, &how, &first, &Reason::none())?;
        if first != entries {
            let how = self.how(bench, test)?;
            let actor = self.person(analyst)?;
            acts::reading::correct(self.db, &actor, &how, &entries[0], &Reason::given("mistyped")?)?;
        }
        self.complete(test.id, analyst)
    }

    /// Keeps what was asked about, then completes.
    fn complete(&mut self, test: i64, analyst: &str) -> Result<(), Failure> {
        let bench = self.db.read(|reader| store::bench::of_test(reader, test))?;
        let readings = bench.readings_of(test);
        let asked: Vec<i64> =
            standing(&readings).iter().filter(|one| one.has_open_question()).map(|one| one.id).collect();
        for reading in asked {
            let actor = self.person(analyst)?;
            acts::reading::keep(self.db, &actor, test, reading)?;
        }
        let actor = self.person(analyst)?;
        acts::result::complete(self.db, &actor, test).map(|_| ())
    }

    fn entries(
        &mut self,
        bench: &BenchSample,
        test: &BenchTest,
        place: &Place,
        level: Decimal,
    ) -> Result<Vec<Entry>, Failure> {
        let mut entries = Vec::new();
        let mut weight = Decimal::from(5);
        for slot in bench.slots(test) {
            let text = match slot.key.field.as_str() {
                "found" => Some(reading::found(self, level, weight)),
                _ => reading::typed(self, place, test, &slot, level),
            };
            let Some(text) = text else { continue };
            if slot.key.field == "weight" {
                weight = text.parse().unwrap_or(weight);
            }
            let said = slot.read(&text).map_err(Failure::missing)?;
            entries.push(Entry { slot, said });
        }
        Ok(entries)
    }

    /// How the values are read now: the label, the instrument, what the page has shown.
    fn how(&self, bench: &BenchSample, test: &BenchTest) -> Result<How, Failure> {
        let now = self.db.read(|reader| store::bench::of_test(reader, test.id))?;
        let seen = now.readings.iter().map(|(_, reading)| reading.id).max().unwrap_or_default();
        let label = bench.containers.first().map_or_else(|| bench.number.clone(), |one| one.label.clone());
        let kind = test.content.instruments.first();
        let instrument = kind.and_then(|kind| self.made.get(&format!("instrument {kind}")).copied());
        Ok(How { sample_test: test.id, label, instrument, read_at: None, seen })
    }

    /// Fills and shakes the cylinder; later readings go on the agenda at their minutes.
    fn start_cylinder(
        &mut self,
        bench: &BenchSample,
        test: &BenchTest,
        entries: Vec<Entry>,
        analyst: &str,
    ) -> Result<(), Failure> {
        let how = self.how(bench, test)?;
        let (now, later): (Vec<Entry>, Vec<Entry>) =
            entries.into_iter().partition(|entry| entry.slot.due_minute.unwrap_or_default() == 0);
        let actor = self.person(analyst)?;
        let zero = actor.at;
        acts::reading::record(self.db, &actor, &how, &now, &Reason::none())?;
        let mut minutes: Vec<u32> = later.iter().filter_map(|entry| entry.slot.due_minute).collect();
        minutes.dedup();
        for minute in minutes {
            let due: Vec<Entry> =
                later.iter().filter(|entry| entry.slot.due_minute == Some(minute)).cloned().collect();
            let is_last = later.last().and_then(|entry| entry.slot.due_minute) == Some(minute);
            let analyst = analyst.to_string();
            self.cylinders.push(Cylinder { test: test.id, sample: bench.id, entries: due, is_last, analyst });
            let at = self.cylinders.len() - 1;
            self.plan_at(zero.plus_minutes(i64::from(minute)), Scene::ReadCylinder(at));
        }
        Ok(())
    }

    /// One planned reading of a cylinder; the last one completes the test.
    pub fn read_cylinder(&mut self, at: usize) -> Result<(), Failure> {
        let Some(cylinder) = self.cylinders.get(at).cloned() else { return Ok(()) };
        let analyst = cylinder.analyst.as_str();
        self.daily_checks(analyst)?;
        let bench = self.db.read(|reader| store::bench::sample(reader, cylinder.sample))?;
        let Some(test) = bench.test(cylinder.test) else { return Ok(()) };
        let how = self.how(&bench, test)?;
        let actor = self.person(analyst)?;
        acts::reading::record(self.db, &actor, &how, &cylinder.entries, &Reason::none())?;
        if cylinder.is_last { self.complete(cylinder.test, analyst) } else { Ok(()) }
    }

    /// The laboratory check of every completed test of a sample by a second person.
    pub fn check_sample(&mut self, sample: i64, checker: &str) -> Result<(), Failure> {
        let bench = self.db.read(|reader| store::bench::sample(reader, sample))?;
        for test in bench.tests.iter().filter(|test| test.is_complete() && test.check.is_none()) {
            let actor = self.person(checker)?;
            acts::check::check(self.db, &actor, test.id, test.latest_version.unwrap_or(1))?;
        }
        Ok(())
    }
}

/// A planned reading of a cylinder.
#[derive(Clone, Debug)]
pub struct Cylinder {
    test: i64,
    sample: i64,
    entries: Vec<Entry>,
    is_last: bool,
    analyst: String,
}
