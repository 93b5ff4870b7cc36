//! The trend: where a judged pull stands, the results it may be judged by, and the verdicts.

pub mod alike;
pub mod forecast;
pub mod tally;
pub mod verdict;

use chrono::NaiveDate;
use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::door::Change;
use super::{Answer, Day, Exact, Reader, shelf_life};
use crate::domain::shelf_life::expiry;
use crate::domain::trend::history::{Candidate, History};

/// Where a pull stands: what its history has in common with it, and what its levels and expiry come from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    pub pull: i64,
    pub study: i64,
    pub lot: i64,
    pub presentation: i64,
    pub formulation_version: i64,
    pub condition: i64,
    pub orientation: String,
    pub is_labelled: bool,
    pub started_on: NaiveDate,
    pub due_on: Option<NaiveDate>,
    pub taken_on: Option<NaiveDate>,
    /// Pulls planned on the arm.
    pub planned: u32,
    /// Percent of good lots that may ever see a false action, where the protocol fixes it.
    pub promise_percent: Option<Decimal>,
    /// The lot's expiry: as released, else as the shelf life assigned for a lot made that day gives it.
    pub expires_on: Option<NaiveDate>,
}

/// The place of a pull; `None` for an imported one, which has no time zero.
pub fn place(reader: &Reader<'_>, pull: i64) -> Answer<Option<Place>> {
    let found = reader.maybe(
        "select p.id, y.id, l.id, l.presentation, l.formulation_version, a.condition, a.orientation,
             a.is_labelled_condition, y.started_on, p.due_on,
             (select e.happened_on from pull_event e where e.pull = p.id and e.kind = 'pulled'
                 order by e.id desc limit 1),
             (select count(*) from pull x where x.study_arm = a.id
                 and not exists (select 1 from pull later where later.supersedes = x.id)),
             (select json_extract(v.content, '$.trend_promise_percent') from protocol_version v where v.id =
                 coalesce((select m.protocol_version from study_amendment m where m.study = y.id
                     order by m.id desc limit 1), y.protocol_version)),
             (select d.expires_on from lot_decision d where d.lot = l.id order by d.id desc limit 1),
             n.market, l.made_on
         from pull p
         join study_arm a on a.id = p.study_arm
         join study y on y.id = a.study
         join lot l on l.id = y.lot
         join presentation n on n.id = l.presentation
         where p.id = :pull and p.imported is null and y.started_on is not null",
        named_params! { ":pull": pull },
        |row| Ok((place_from_row(row)?, row.get::<_, String>(14)?, row.get::<_, Option<Day>>(15)?)),
    )?;
    let Some((mut place, market, made_on)) = found else { return Ok(None) };
    if let (None, Some(Day(made_on))) = (place.expires_on, made_on) {
        let life = shelf_life::for_lot_made_on(reader, place.presentation, &market, made_on)?;
        place.expires_on =
            life.map(|life| expiry(made_on, life.assigned.months, life.assigned.expiry_format));
    }
    Ok(Some(place))
}

fn place_from_row(row: &Row<'_>) -> rusqlite::Result<Place> {
    let day = |at: usize| Ok::<_, rusqlite::Error>(row.get::<_, Option<Day>>(at)?.map(|day| day.0));
    let promise: Option<String> = row.get(12)?;
    Ok(Place {
        pull: row.get(0)?,
        study: row.get(1)?,
        lot: row.get(2)?,
        presentation: row.get(3)?,
        formulation_version: row.get(4)?,
        condition: row.get(5)?,
        orientation: row.get(6)?,
        is_labelled: row.get(7)?,
        started_on: row.get::<_, Day>(8)?.0,
        due_on: day(9)?,
        taken_on: day(10)?,
        planned: row.get(11)?,
        promise_percent: promise.and_then(|text| Decimal::from_str_exact(&text).ok()),
        expires_on: day(13)?,
    })
}

/// Every result that might stand in the history of a test: same presentation, condition, orientation and test,
/// of pulls taken before a day; the newest version of each, by lot and age. One query, by indexes alone.
pub fn candidates(
    reader: &Reader<'_>,
    place: &Place,
    test: &str,
    before: NaiveDate,
) -> Answer<Vec<Candidate>> {
    reader.all(
        "select l.id, l.number, l.formulation_version, t.method_version, t.id, r.id, r.component, r.value,
             r.qualifier, y.started_on, e.happened_on, r.imported is not null or y.imported is not null,
             coalesce((select k.verdict from result_check k where k.sample_test = t.id and k.version = r.version
                 order by k.id desc limit 1), '') = 'sent back',
             exists (select 1 from reading v where v.sample_test = t.id and v.inspected_every is not null),
             (select case x.state when 'left out' then x.why end from trend_exclusion x
                 where x.sample_test = t.id and x.component = r.component order by x.id desc limit 1)
         from lot l
         cross join study y on y.lot = l.id
         cross join study_arm a on a.study = y.id
         cross join pull p on p.study_arm = a.id
         cross join pull_event e on e.pull = p.id and e.kind = 'pulled'
         cross join sample s on s.pull = p.id
         cross join sample_test t on t.sample = s.id and t.test = :test
         cross join result r on r.sample_test = t.id
         where l.presentation = :presentation
             and a.condition = :condition
             and a.orientation = :orientation
             and y.started_on is not null
             and e.happened_on < :before
             and r.version = (select max(version) from result where sample_test = t.id)
         order by l.id, e.happened_on, r.id",
        named_params! {
            ":presentation": place.presentation,
            ":condition": place.condition,
            ":orientation": place.orientation,
            ":test": test,
            ":before": Day(before),
        },
        candidate_from_row,
    )
}

fn candidate_from_row(row: &Row<'_>) -> rusqlite::Result<Candidate> {
    let (started, taken): (Day, Day) = (row.get(9)?, row.get(10)?);
    Ok(Candidate {
        lot: row.get(0)?,
        lot_number: row.get(1)?,
        formulation_version: row.get(2)?,
        method_version: row.get(3)?,
        sample_test: row.get(4)?,
        result: row.get(5)?,
        component: row.get(6)?,
        value: row.get::<_, Option<Exact>>(7)?.map(|exact| exact.0),
        qualifier: row.get(8)?,
        days: (taken.0 - started.0).num_days(),
        is_imported: row.get(11)?,
        is_sent_back: row.get(12)?,
        is_interval: row.get(13)?,
        left_out_because: row.get(14)?,
    })
}

/// The row of a history; the same history again is the same row.
pub fn keep_history(change: &Change<'_>, history: &History) -> Answer<i64> {
    let (content, digest) = (history.canonical(), history.digest());
    let known = change.maybe(
        "select id from trend_history where digest = :digest",
        named_params! { ":digest": digest },
        |row| row.get(0),
    )?;
    match known {
        Some(id) => Ok(id),
        None => change.insert(
            "insert into trend_history (digest, content) values (:digest, :content)",
            named_params! { ":digest": digest, ":content": content },
        ),
    }
}

/// A history by its row.
pub fn history(reader: &Reader<'_>, id: i64) -> Answer<Option<History>> {
    let content: Option<String> = reader.maybe(
        "select content from trend_history where id = :id",
        named_params! { ":id": id },
        |row| row.get(0),
    )?;
    Ok(content.and_then(|content| History::read(&content)))
}
