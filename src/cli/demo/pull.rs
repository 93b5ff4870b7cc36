//! Pulls of the demo: taken, tested, checked, reviewed and signed, with what did not go as planned.

use super::bench::Twist;
use super::player::{Player, Scene, working_day};
use super::seed::EventRow;
use crate::acts;
use crate::acts::pull::Taking;
use crate::acts::signature::Review;
use crate::domain::failure::Failure;
use crate::domain::moment::{plus_days, plus_months};
use crate::domain::reason::Reason;
use crate::domain::review::exception::{AnswerBy, NewAnswer};
use crate::store;
use crate::store::pull::Pull;

/// Pulls that fall due in the last days stand open, so that the week has work.
const LEFT_OPEN_DAYS: i64 = 4;

impl Player<'_> {
    pub fn take_pull(&mut self, lot: usize, id: i64) -> Result<(), Failure> {
        let pull = self.db.read(|reader| store::pull::get(reader, id))?;
        let event = self.event(lot, &pull).cloned();
        let kind = event.as_ref().map(|event| event.event.as_str());
        if kind == Some("missed") {
            return self.miss(&pull, event.map(|event| event.detail).unwrap_or_default());
        }
        if kind == Some("left") {
            return Ok(());
        }
        let is_recent = plus_days(self.now.date(), LEFT_OPEN_DAYS) >= self.today();
        if is_recent && kind.is_none() {
            return Ok(());
        }
        let labels = self.db.read(|reader| store::container::of_arm(reader, pull.study_arm))?;
        let free = labels.into_iter().filter(|one| one.event.is_none() && one.purpose == "pull");
        let labels = free.take(pull.facts.containers_needed).map(|one| one.label).collect();
        let analyst = self.analyst_of(id);
        let actor = self.person(analyst)?;
        let taking = Taking { labels, taken_on: actor.at.date(), why: String::new() };
        acts::pull::take(self.db, &actor, id, &taking)?;
        let made_on = self.time_zero(pull.study)?;
        self.test_sample(pull.sample, made_on, analyst, &twist(event.as_ref()))?;
        if kind == Some("in work") {
            return Ok(());
        }
        let today = self.now.date();
        let checker = if analyst == "rafe.tolland" { "ilse.brandt" } else { "rafe.tolland" };
        if kind != Some("to check") {
            let scene = Scene::CheckSample { sample: pull.sample, checker };
            self.plan(working_day(plus_days(today, 3)), 15, 0, scene);
            self.plan(working_day(plus_days(today, 8)), 10, 30, Scene::ReviewSample(pull.sample));
        }
        Ok(())
    }

    fn miss(&mut self, pull: &Pull, why: String) -> Result<(), Failure> {
        let latest = pull.facts.latest_on.unwrap_or_else(|| self.now.date());
        let day = working_day(plus_days(latest, 1));
        if self.now.date() < day {
            self.plan(day, 8, 30, Scene::MissPull { pull: pull.id, why });
            return Ok(());
        }
        let actor = self.person("maren.oddy")?;
        acts::pull::miss(self.db, &actor, pull.id, &Reason::given(&why)?)
    }

    pub fn miss_pull(&mut self, pull: i64, why: &str) -> Result<(), Failure> {
        let actor = self.person("maren.oddy")?;
        acts::pull::miss(self.db, &actor, pull, &Reason::given(why)?)
    }

    /// Analysts take turns by pull.
    fn analyst_of(&self, pull: i64) -> &'static str {
        if pull % 2 == 0 { "rafe.tolland" } else { "ilse.brandt" }
    }

    fn time_zero(&self, study: i64) -> Result<chrono::NaiveDate, Failure> {
        let study = self.db.read(|reader| store::study::get(reader, study))?;
        study.started_on.ok_or_else(|| Failure::missing("time zero of the study"))
    }

    fn event(&self, lot: usize, pull: &Pull) -> Option<&EventRow> {
        let number = &self.seed.lots[lot].number;
        let condition = super::reading::condition_code(&pull.condition_name);
        let zero = self.time_zero(pull.study).ok()?;
        self.seed.events.iter().find(|event| {
            event.lot == *number
                && event.condition == condition
                && event.orientation == pull.orientation
                && pull.facts.due_on == Some(plus_months(zero, event.age_months))
        })
    }

    /// The reviewer opens a sample, answers what it asks, agrees and signs.
    pub fn review_sample(&mut self, sample: i64) -> Result<(), Failure> {
        let reviewer = if sample % 3 == 0 { "per.lindqvist" } else { "ada.whitlock" };
        let found = self.db.read(|reader| store::review::sample(reader, sample))?;
        for exception in found.facts.exceptions.iter().filter(|exception| exception.answer.is_none()) {
            let answer = match exception.by {
                AnswerBy::Investigation => NewAnswer::ReadingVerified,
                _ => NewAnswer::Acceptable(
                    "the raw readings agree with the calculation and the value lies within its limits"
                        .to_string(),
                ),
            };
            let actor = self.person(reviewer)?;
            acts::review::answer(self.db, &actor, sample, &exception.about, &answer)?;
        }
        let actor = self.person(reviewer)?;
        let digest = self.db.read(|reader| store::review::digest(reader, sample))?;
        let opened = acts::review::opened(self.secrets, &actor, sample, &digest)?;
        acts::review::agree(self.db, self.secrets, &actor, sample, &opened)?;
        let actor = self.person(reviewer)?;
        let signed = self.sign::<Review>(&actor)?;
        let signed = if found.facts.exceptions.is_empty() {
            signed
        } else {
            signed.stating("Each exception was looked at against the raw readings and is answered above.")
        };
        acts::review::sign(self.db, &actor, &[(sample, digest)], &signed).map(|_| ())
    }
}

fn twist(event: Option<&EventRow>) -> Twist {
    let Some(event) = event else { return Twist::default() };
    match event.event.as_str() {
        "mistyped" => {
            Twist { mistyped: Some((event.test.clone(), event.detail.clone())), ..Twist::default() }
        }
        "oos" => Twist {
            level: event.detail.parse().ok().map(|level| (event.test.clone(), level)),
            ..Twist::default()
        },
        "in work" => Twist { stop_after: Some(3), ..Twist::default() },
        _ => Twist::default(),
    }
}
