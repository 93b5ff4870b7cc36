//! The player: people, the handed-in clock, and an agenda of what happens when.

use std::cmp::Reverse;
use std::collections::{BTreeMap, BinaryHeap};

use chrono::{DateTime, NaiveDate, Utc};

use super::PASSWORD;
use super::bench::Cylinder;
use super::seed::{Scatter, Seed};
use crate::acts;
use crate::acts::secret::Secrets;
use crate::acts::signature::{Means, Signed};
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::moment::{Moment, plus_days};
use crate::store;
use crate::store::account::Account;
use crate::store::door::Db;

/// Something that happens at one moment of the demo's past.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Scene {
    YearlyCare,
    MakeLot(usize),
    TestRelease(usize),
    DecideLot(usize),
    CloseDeviations(usize),
    StartStudy(usize),
    SealForecasts,
    TakePull { lot: usize, pull: i64 },
    MissPull { pull: i64, why: String },
    ReadCylinder(usize),
    CheckSample { sample: i64, checker: &'static str },
    ReviewSample(i64),
}

/// Plays the scenario through the acts.
pub struct Player<'a> {
    pub db: &'a Db,
    pub secrets: &'a Secrets,
    pub seed: &'a Seed,
    pub now: Moment,
    pub scatter: Scatter,
    accounts: BTreeMap<String, Account>,
    agenda: BinaryHeap<Reverse<(DateTime<Utc>, u64, Scene)>>,
    count: u64,
    /// Numbers of what was made, by its code.
    pub made: BTreeMap<String, i64>,
    /// The last day of each instrument's daily check.
    pub checked_on: BTreeMap<i64, NaiveDate>,
    /// Cylinders that stand, each with its planned readings.
    pub cylinders: Vec<Cylinder>,
    /// When the demo is made: nothing is played after it.
    end: DateTime<Utc>,
}

impl<'a> Player<'a> {
    pub fn new(db: &'a Db, secrets: &'a Secrets, seed: &'a Seed, end: Moment) -> Result<Player<'a>, Failure> {
        let people = db.read(store::account::people)?;
        let accounts = people.into_iter().map(|account| (account.user_name.clone(), account)).collect();
        Ok(Player {
            db,
            secrets,
            seed,
            now: end,
            scatter: Scatter::new(104_211_330),
            accounts,
            agenda: BinaryHeap::new(),
            count: 0,
            made: BTreeMap::new(),
            checked_on: BTreeMap::new(),
            cylinders: Vec::new(),
            end: end.utc,
        })
    }

    /// Today, as the demo's maker sees it.
    pub fn today(&self) -> NaiveDate {
        Moment::new(self.end, self.now.zone).date()
    }

    pub fn days_ago(&self, days: i64) -> NaiveDate {
        plus_days(self.today(), -days)
    }

    /// A person at the player's moment; a few seconds pass with each act.
    pub fn person(&mut self, user_name: &str) -> Result<Actor, Failure> {
        self.now = self.now.plus_seconds(17);
        let account =
            self.accounts.get(user_name).ok_or_else(|| Failure::missing(format!("person {user_name}")))?;
        Ok(acts::sign_in::actor_of(account, self.now, "the demo", None))
    }

    pub fn account(&self, user_name: &str) -> Result<i64, Failure> {
        let account =
            self.accounts.get(user_name).ok_or_else(|| Failure::missing(format!("person {user_name}")))?;
        Ok(account.id)
    }

    /// The person types name and password for a signature.
    pub fn sign<M: Means>(&self, actor: &Actor) -> Result<Signed<M>, Failure> {
        acts::signature::authenticate::<M>(self.db, self.secrets, actor, &actor.user_name, PASSWORD)
    }

    /// The number of something made earlier.
    pub fn number(&self, code: &str) -> Result<i64, Failure> {
        self.made.get(code).copied().ok_or_else(|| Failure::missing(format!("{code} of the demo")))
    }

    /// Puts a scene on the agenda at a site time of a day; what lies after the demo's end is left out.
    pub fn plan(&mut self, date: NaiveDate, hour: u32, minute: u32, scene: Scene) {
        if let Some(at) = Moment::of_site(date, hour, minute, self.now.zone) {
            self.plan_at(at, scene);
        }
    }

    /// [`Player::plan`] at an instant.
    pub fn plan_at(&mut self, at: Moment, scene: Scene) {
        if at.utc < self.end {
            self.count += 1;
            self.agenda.push(Reverse((at.utc, self.count, scene)));
        }
    }

    /// The next scene; the clock goes to its moment, or stays where work has already taken it.
    fn next_scene(&mut self) -> Option<Scene> {
        let Reverse((at, _, scene)) = self.agenda.pop()?;
        let at = at.max(self.now.utc);
        self.now = Moment::new(at, self.now.zone);
        Some(scene)
    }

    /// Plays the whole agenda.
    pub fn play(&mut self) -> Result<(), Failure> {
        while let Some(scene) = self.next_scene() {
            self.play_scene(&scene).map_err(|failure| Failure::fault(format!("{scene:?}: {failure}")))?;
        }
        Ok(())
    }

    fn play_scene(&mut self, scene: &Scene) -> Result<(), Failure> {
        match scene {
            Scene::YearlyCare => self.yearly_care(),
            Scene::MakeLot(at) => self.make_lot(*at),
            Scene::TestRelease(at) => self.test_release(*at),
            Scene::DecideLot(at) => self.decide_lot(*at),
            Scene::CloseDeviations(at) => self.close_deviations(*at),
            Scene::StartStudy(at) => self.start_study(*at),
            Scene::SealForecasts => acts::forecast::seal_due(self.db, &Actor::clock(self.now)).map(|_| ()),
            Scene::TakePull { lot, pull } => self.take_pull(*lot, *pull),
            Scene::MissPull { pull, why } => self.miss_pull(*pull, why),
            Scene::ReadCylinder(at) => self.read_cylinder(*at),
            Scene::CheckSample { sample, checker } => self.check_sample(*sample, checker),
            Scene::ReviewSample(sample) => self.review_sample(*sample),
        }
    }

    /// Sets the clock for the beginning.
    pub fn begin(&mut self, date: NaiveDate) {
        if let Some(at) = Moment::of_site(date, 8, 0, self.now.zone) {
            self.now = at;
        }
    }
}

/// A working day: Saturday and Sunday move to Monday.
pub fn working_day(date: NaiveDate) -> NaiveDate {
    use chrono::Datelike;
    match date.weekday() {
        chrono::Weekday::Sat => plus_days(date, 2),
        chrono::Weekday::Sun => plus_days(date, 1),
        _ => date,
    }
}
