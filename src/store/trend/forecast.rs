//! Forecasts sealed before the reading. Whoever reads them here sees them only once the test has a reading.

use chrono::NaiveDate;
use rusqlite::named_params;

use crate::domain::moment::plus_days;
use crate::domain::trend::sealed::SealedForecast;
use crate::store::door::Change;
use crate::store::{Answer, Day, Reader};

/// A pull whose forecasts are to be sealed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Due {
    pub pull: i64,
    pub window_opened_on: NaiveDate,
}

/// No window opens further before its due date (windows are 0 to 31 days).
const WIDEST_WINDOW_DAYS: i64 = 31;

/// Pulls whose window has opened and whose forecasts are not sealed: to be taken or in testing, arms that are
/// contingent only once they are triggered. The one that opened first comes first.
pub fn due(reader: &Reader<'_>, today: NaiveDate) -> Answer<Vec<Due>> {
    reader.all(
        "select p.id, coalesce(p.earliest_on, p.due_on)
         from open_pull o
         cross join pull p on p.id = o.pull
         join study_arm a on a.id = p.study_arm
         where o.stage in ('to take', 'in test')
             and o.due_on <= :last
             and coalesce(p.earliest_on, p.due_on) <= :today
             and not exists (select 1 from trend_seal where pull = p.id)
             and (a.is_contingent = 0 or exists (select 1 from arm_trigger where study_arm = a.id))
         order by 2, p.id",
        named_params! { ":last": Day(plus_days(today, WIDEST_WINDOW_DAYS)), ":today": Day(today) },
        |row| Ok(Due { pull: row.get(0)?, window_opened_on: row.get::<_, Day>(1)?.0 }),
    )
}

/// A test whose forecast can still be sealed: it has no reading.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unread {
    pub sample_test: i64,
    pub test: String,
    pub method_version: i64,
    pub kind: String,
}

/// The tests of a pull without a reading, in bench order; asked again inside the act.
pub fn unread_tests(reader: &Reader<'_>, pull: i64) -> Answer<Vec<Unread>> {
    reader.all(
        "select t.id, t.test, t.method_version, m.kind
         from sample s
         join sample_test t on t.sample = s.id
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         where s.pull = :pull and not exists (select 1 from reading where sample_test = t.id)
         order by t.position",
        named_params! { ":pull": pull },
        |row| {
            Ok(Unread {
                sample_test: row.get(0)?,
                test: row.get(1)?,
                method_version: row.get(2)?,
                kind: row.get(3)?,
            })
        },
    )
}

pub fn is_sealed(reader: &Reader<'_>, pull: i64) -> Answer<bool> {
    reader.exists("select 1 from trend_seal where pull = :pull", named_params! { ":pull": pull })
}

pub fn insert_seal(change: &Change<'_>, due: &Due, days_late: i64) -> Answer<i64> {
    change.insert(
        "insert into trend_seal (pull, window_opened_on, days_late) values (:pull, :opened, :late)",
        named_params! { ":pull": due.pull, ":opened": Day(due.window_opened_on), ":late": days_late },
    )
}

pub fn insert(
    change: &Change<'_>,
    seal: i64,
    sample_test: i64,
    forecast: &SealedForecast,
    history: Option<i64>,
) -> Answer<i64> {
    change.insert(
        "insert into trend_forecast (seal, sample_test, component, content, digest, history)
         values (:seal, :test, :component, :content, :digest, :history)",
        named_params! {
            ":seal": seal,
            ":test": sample_test,
            ":component": forecast.component,
            ":content": forecast.canonical(),
            ":digest": forecast.digest(),
            ":history": history,
        },
    )
}

/// A sealed forecast as it is shown, once the test has a reading.
#[derive(Clone, Debug, PartialEq)]
pub struct Sealed {
    pub id: i64,
    pub sample_test: i64,
    pub component: String,
    pub forecast: SealedForecast,
    /// The text as it was sealed; the digest is over it.
    pub content: String,
    pub digest: String,
    pub days_late: i64,
    pub history: Option<i64>,
    /// As stored: UTC.
    pub sealed_at: String,
    pub act: i64,
}

/// The sealed forecasts of a test; none before its first reading, whoever asks.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<Vec<Sealed>> {
    let rows = reader.all(
        "select f.id, f.sample_test, f.component, f.content, f.digest, s.days_late, f.history, a.at, f.act
         from trend_forecast f
         join trend_seal s on s.id = f.seal
         join trail_act a on a.id = f.act
         where f.sample_test = :test and exists (select 1 from reading where sample_test = f.sample_test)
         order by f.id",
        named_params! { ":test": sample_test },
        |row| {
            let content: String = row.get(3)?;
            Ok(SealedForecast::read(&content).map(|forecast| Sealed {
                id: row.get_unwrap(0),
                sample_test: row.get_unwrap(1),
                component: row.get_unwrap(2),
                forecast,
                content: content.clone(),
                digest: row.get_unwrap(4),
                days_late: row.get_unwrap(5),
                history: row.get_unwrap(6),
                sealed_at: row.get_unwrap(7),
                act: row.get_unwrap(8),
            }))
        },
    )?;
    Ok(rows.into_iter().flatten().collect())
}
