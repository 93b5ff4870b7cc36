//! Forecasts sealed by the clock when the window of a pull opens.

use chrono::NaiveDate;

use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::method::TestKind;
use crate::domain::moment::{date_shown, plus_days};
use crate::domain::reason::Reason;
use crate::domain::subject::Kind;
use crate::domain::trend::TrendLevels;
use crate::domain::trend::history::{Alike, Candidate, Scale, Wanted, choose};
use crate::domain::trend::sealed::{Planned, SealedForecast};
use crate::store;
use crate::store::door::{Change, Db};
use crate::store::trend::Place;
use crate::store::trend::forecast::{Due, Unread};

/// Seals the forecasts of every pull whose window has opened since; each pull is an act of its own, and one that
/// was sealed in between is passed over. After a stop it catches up: what comes after the day the window opened is
/// marked late. Answers with the number of pulls sealed.
pub fn seal_due(db: &Db, clock: &Actor) -> Result<usize, Failure> {
    let today = clock.at.date();
    let due = db.read(|reader| store::trend::forecast::due(reader, today))?;
    for one in &due {
        seal(db, clock, one)?;
    }
    Ok(due.len())
}

fn seal(db: &Db, clock: &Actor, due: &Due) -> Result<(), Failure> {
    db.change(clock, Act::SealForecast, &Reason::none(), |change| {
        if store::trend::forecast::is_sealed(change, due.pull)? {
            return Ok(());
        }
        let Some(place) = store::trend::place(change, due.pull)? else { return Ok(()) };
        let today = clock.at.date();
        let days_late = (today - due.window_opened_on).num_days().max(0);
        let seal = store::trend::forecast::insert_seal(change, due, days_late)?;
        let alike = store::trend::alike::pairs(change)?;
        let tests = store::trend::forecast::unread_tests(change, due.pull)?;
        let mut digests = Vec::new();
        for test in &tests {
            digests.extend(seal_test(change, &place, seal, test, &alike, today)?);
        }
        change.concerns(Kind::Pull, due.pull)?;
        change.concerns(Kind::Study, place.study)?;
        change.tell(told(due, days_late, &digests));
        Ok(())
    })
}

/// The digests alone are told: the forecasts stay hidden until the readings are there.
fn told(due: &Due, days_late: i64, digests: &[String]) -> String {
    let late = match days_late {
        0 => String::new(),
        1 => ", 1 day late".to_string(),
        days => format!(", {days} days late"),
    };
    let short: Vec<String> = digests.iter().map(|digest| digest.chars().take(8).collect()).collect();
    format!(
        "window opened {}{late}, {} sealed{}{}",
        date_shown(due.window_opened_on),
        if digests.len() == 1 { "1 forecast".to_string() } else { format!("{} forecasts", digests.len()) },
        if short.is_empty() { "" } else { ": " },
        short.join(" ")
    )
}

/// A test has one forecast, or one for each component its history knows.
fn seal_test(
    change: &Change<'_>,
    place: &Place,
    seal: i64,
    test: &Unread,
    alike: &Alike,
    today: NaiveDate,
) -> Result<Vec<String>, Failure> {
    let before = place.taken_on.unwrap_or_else(|| plus_days(today, 1));
    let candidates = store::trend::candidates(change, place, &test.test, before)?;
    let kind = TestKind::from_code(&test.kind).unwrap_or(TestKind::Numeric);
    if kind == TestKind::Appearance {
        return Ok(Vec::new());
    }
    let mut digests = Vec::new();
    for component in components(&candidates) {
        let wanted = Wanted {
            lot: place.lot,
            component: &component,
            formulation_version: place.formulation_version,
            method_version: test.method_version,
        };
        let history = choose(&candidates, &wanted, alike);
        let planned = Planned {
            test: &test.test,
            component: &component,
            days: place.due_on.map_or(0, |due| (due - place.started_on).num_days()),
            scale: Scale::of(kind),
            levels: TrendLevels::of_promise(place.promise_percent, place.planned),
        };
        let forecast = SealedForecast::of(&history, &planned);
        let kept = store::trend::keep_history(change, &history)?;
        store::trend::forecast::insert(change, seal, test.sample_test, &forecast, Some(kept))?;
        digests.push(forecast.digest());
    }
    Ok(digests)
}

/// The components of a test so far; a test without a history has its whole value.
fn components(candidates: &[Candidate]) -> Vec<String> {
    let mut found: Vec<String> = candidates.iter().map(|one| one.component.clone()).collect();
    found.sort();
    found.dedup();
    if found.is_empty() { vec![String::new()] } else { found }
}
