//! The trend verdict of a completed test, and what people decide about its history.

use super::signature::{Approval, Signed};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::judgement::Judged;
use crate::domain::reason::Reason;
use crate::domain::specification::{Limit, LimitSet};
use crate::domain::subject::{Kind, Subject};
use crate::domain::trend::declare::{NewEquivalence, may_declare, may_leave_out};
use crate::domain::trend::history::{Alike, Candidate, History, Scale, Wanted, choose};
use crate::domain::trend::judge::{Case, Life, Seen, judge};
use crate::domain::trend::sealed::Sealing;
use crate::domain::trend::{NewVerdict, TrendLevels, reported_decimals};
use crate::store;
use crate::store::bench::{BenchSample, BenchTest};
use crate::store::door::{Change, Db};
use crate::store::trend::Place;
use crate::store::trend::forecast::Sealed;
use crate::store::trend::verdict::Ground;

/// What the verdicts on one test share: loaded once, however many components it has.
pub(in crate::acts) struct Judge {
    place: Place,
    candidates: Vec<Candidate>,
    alike: Alike,
    /// Each with the history it rested on.
    sealed: Vec<(Sealed, Option<History>)>,
    is_interval: bool,
}

/// The verdicts on one component, with the history they rest on.
pub(in crate::acts) struct Judgement {
    history: History,
    days: i64,
    pub verdicts: Vec<NewVerdict>,
    forecast: Option<i64>,
}

impl Judge {
    /// `None` for a sample without a taken pull: it has no age.
    pub fn of(change: &Change<'_>, sample: &BenchSample, test: &BenchTest) -> Result<Option<Judge>, Failure> {
        let Some(pull) = &sample.pull else { return Ok(None) };
        let Some(place) = store::trend::place(change, pull.id)? else { return Ok(None) };
        let Some(taken_on) = place.taken_on else { return Ok(None) };
        Ok(Some(Judge {
            candidates: store::trend::candidates(change, &place, &test.test, taken_on)?,
            alike: store::trend::alike::pairs(change)?,
            sealed: sealed(change, test.id)?,
            is_interval: sample.readings_of(test.id).iter().any(|reading| reading.inspected_every.is_some()),
            place,
        }))
    }

    /// Judges one component by its history.
    pub fn judged(&self, sample: &BenchSample, test: &BenchTest, result: &Judged) -> Judgement {
        let place = &self.place;
        let wanted = Wanted {
            lot: place.lot,
            component: &result.component,
            formulation_version: place.formulation_version,
            method_version: test.method_version,
        };
        let history = choose(&self.candidates, &wanted, &self.alike);
        let taken_on = place.taken_on.unwrap_or(place.started_on);
        let case = Case {
            history: &history,
            scale: Scale::of(test.kind),
            days: (taken_on - place.started_on).num_days(),
            seen: Seen::of(result.value, result.qualifier, self.is_interval),
            levels: TrendLevels::of_promise(place.promise_percent, place.planned),
            decimals: reported_decimals(&test.content),
            unit: &result.unit,
            life: place.is_labelled.then(|| life(place, sample, test, &result.component)),
        };
        let mut verdicts = judge(&case);
        let sealed = self.sealed.iter().find(|(one, _)| one.component == result.component);
        if let Some(first) = verdicts.first_mut() {
            say_how_sealed(first, sealed, &history);
        }
        let (forecast, days) = (sealed.map(|(one, _)| one.id), case.days);
        Judgement { history, days, verdicts, forecast }
    }
}

impl Judgement {
    /// Stores the verdicts with the history they rest on.
    pub fn put(&self, change: &Change<'_>, result: i64) -> Result<(), Failure> {
        let history = store::trend::keep_history(change, &self.history)?;
        let judged_on = change.actor().at.date();
        for (place, verdict) in self.verdicts.iter().enumerate() {
            let forecast = self.forecast.filter(|_| place == 0);
            let ground = Ground { result, age_days: self.days, history, forecast, judged_on };
            store::trend::verdict::insert(change, &ground, verdict)?;
        }
        Ok(())
    }
}

/// The sealed forecasts of a test with the histories they rested on.
fn sealed(change: &Change<'_>, test: i64) -> Result<Vec<(Sealed, Option<History>)>, Failure> {
    let mut found = Vec::new();
    for one in store::trend::forecast::of_test(change, test)? {
        let history = one.history.map(|row| store::trend::history(change, row)).transpose()?.flatten();
        found.push((one, history));
    }
    Ok(found)
}

/// Whether the forecast was sealed before the reading, and what has come to the history or left it since.
fn say_how_sealed(verdict: &mut NewVerdict, sealed: Option<&(Sealed, Option<History>)>, history: &History) {
    let sealing = sealed
        .map_or(Sealing::NotBeforeReading, |(one, _)| Sealing::BeforeReading { days_late: one.days_late });
    verdict.detail["sealed"] = sealing.words().into();
    let Some((one, before)) = sealed else { return };
    verdict.detail["sealed_digest"] = one.digest.clone().into();
    if let Some(before) = before {
        verdict.detail["came_after_sealing"] = history.beyond(before).into();
        verdict.detail["gone_since_sealing"] = before.beyond(history).into();
    }
}

/// The shelf-life limits of the study's specification, and the lot's expiry.
fn life(place: &Place, sample: &BenchSample, test: &BenchTest, component: &str) -> Life {
    let (lower, upper) = match sample.limits(&test.test).map(|limits| limits.limit(LimitSet::ShelfLife)) {
        Some(Limit::Between { lower, upper }) => (*lower, *upper),
        Some(Limit::Components(ranges)) => {
            let key = component.split('@').next().unwrap_or(component);
            let range = ranges.iter().find(|(code, _)| code == component || code == key);
            range.map(|(_, range)| (range.lower, range.upper)).unwrap_or_default()
        }
        _ => (None, None),
    };
    Life { lower, upper, expires_on: place.expires_on, started_on: place.started_on }
}

/// Declares two versions alike, or withdraws it, under a signature. Verdicts given before stay as they are.
///
/// Refuses in the order of [`may_declare`].
pub fn declare(
    db: &Db,
    actor: &Actor,
    new: &NewEquivalence,
    signed: &Signed<Approval>,
) -> Result<i64, Failure> {
    db.change(actor, Act::DeclareAlike, &Reason::stated(&new.why), |change| {
        may_declare(new, &store::trend::alike::facts(change, new)?)?;
        let id = store::trend::alike::insert(change, new)?;
        signed.put_under(change, Subject::new(Kind::TrendEquivalence, id), &new.canonical())?;
        let kind = match new.kind {
            crate::domain::trend::declare::AlikeKind::FormulationVersion => Kind::FormulationVersion,
            crate::domain::trend::declare::AlikeKind::MethodVersion => Kind::MethodVersion,
        };
        change.concerns(kind, new.one)?;
        change.concerns(kind, new.other)?;
        let known = store::trend::alike::all(change)?;
        if let Some(found) = known.iter().find(|one| one.id == id) {
            let state = if new.is_declared { "one history" } else { "no longer one history" };
            change.tell(format!("{} and {}: {state}", found.one_words, found.other_words));
        }
        Ok(id)
    })
}

/// Leaves a result out of the history of later verdicts, or takes it back; the result itself stays as it is.
///
/// Refuses in the order of [`may_leave_out`].
pub fn leave_out(
    db: &Db,
    actor: &Actor,
    sample_test: i64,
    component: &str,
    leaves_out: bool,
    why: &str,
) -> Result<i64, Failure> {
    db.change(actor, Act::LeaveOutOfTrend, &Reason::stated(why), |change| {
        let sample = store::bench::of_test(change, sample_test)?;
        let facts = store::trend::alike::exclusion_facts(change, sample_test, component)?;
        may_leave_out(&facts, leaves_out, why)?;
        let id = store::trend::alike::insert_exclusion(change, sample_test, component, leaves_out, why)?;
        super::reading::concerns(change, &sample)?;
        let title = sample.test(sample_test).map(|test| test.title.clone()).unwrap_or_default();
        let part = if component.is_empty() { String::new() } else { format!(", {component}") };
        let state = if leaves_out { "left out of the history" } else { "taken back into the history" };
        change.tell(format!("{}, {title}{part}: {state}", sample.number));
        Ok(id)
    })
}
