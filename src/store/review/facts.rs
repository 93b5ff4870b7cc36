//! Facts of samples on their way through review: many samples at once, a fixed number of queries.

use std::collections::HashMap;

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use crate::domain::check::TestFacts;
use crate::domain::moment::date_from_stored;
use crate::domain::review::SampleFacts;
use crate::domain::review::exception::{FoundFlag, RecordFacts, exceptions};
use crate::store::{Answer, Day, Reader};

/// What names a sample on a page, and its dates.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Head {
    pub sample: i64,
    pub number: String,
    pub purpose: String,
    pub lot: i64,
    pub lot_number: String,
    pub study: Option<i64>,
    pub study_number: String,
    /// "25 °C/60 % RH inverted"; empty for a sample without a pull.
    pub condition: String,
    /// "18 months"; the purpose for a sample without a pull.
    pub age: String,
    pub pull: Option<i64>,
    pub earliest_on: Option<NaiveDate>,
    pub latest_on: Option<NaiveDate>,
    pub taken_on: Option<NaiveDate>,
    pub received_on: Option<NaiveDate>,
    pub limit_set: String,
    pub limits_do: Option<String>,
    pub specification_version: Option<i64>,
    pub presentation: i64,
    /// The newest act that recorded anything about the sample.
    pub newest_act: i64,
}

impl Head {
    /// "TW-104-0640, 18 months, 25 °C/60 % RH inverted".
    pub fn title(&self) -> String {
        let mut parts = vec![self.lot_number.clone(), self.age.clone()];
        parts.extend(Some(self.condition.clone()).filter(|words| !words.is_empty()));
        parts.join(", ")
    }

    /// The end of its window, or when it came in: what the queue is sorted by.
    pub fn window_end(&self) -> Option<NaiveDate> {
        self.latest_on.or(self.received_on)
    }
}

/// A sample with everything that decides about its review.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReviewSample {
    pub head: Head,
    pub facts: SampleFacts,
}

/// Numbers of the samples whose review may be open: with a result, and not signed since. The facts tell which of
/// them are.
pub fn open_ids(reader: &Reader<'_>) -> Answer<Vec<i64>> {
    reader.all(
        "select o.sample
         from open_sample o
         where exists (
             select 1 from sample_test t join result r on r.sample_test = t.id
             where t.sample = o.sample and r.imported is null)
         order by o.sample",
        [],
        |row| row.get(0),
    )
}

/// Samples that have a test waiting for its check.
pub fn ids_to_check(reader: &Reader<'_>) -> Answer<Vec<i64>> {
    reader.all(
        "select distinct t.sample
         from open_check o
         cross join sample_test t on t.id = o.sample_test
         order by t.sample",
        [],
        |row| row.get(0),
    )
}

const HEAD: &str = "
    with chosen as (select value as sample from json_each(:ids))
    select s.id, s.number, s.purpose, s.lot, l.number, st.id, coalesce(st.number, ''), c.name, a.orientation,
        p.age_text, p.id, p.earliest_on, p.latest_on,
        (select e.happened_on from pull_event e where e.pull = p.id and e.kind = 'pulled' order by e.id limit 1),
        s.received_on, s.limit_set, a.limits_do, s.specification_version, l.presentation,
        coalesce(st.imported, l.imported) is not null,
        coalesce((select max(g.act) from signature g
            where g.kind = 'sample' and g.subject = s.id and g.meaning = 'review'), 0),
        max(coalesce((select max(r.act) from sample_test t join reading r on r.sample_test = t.id
                where t.sample = s.id), 0),
            coalesce((select max(r.act) from sample_test t join result r on r.sample_test = t.id
                where t.sample = s.id), 0),
            coalesce((select max(k.act) from sample_test t join result_check k on k.sample_test = t.id
                where t.sample = s.id), 0),
            coalesce((select max(x.act) from exception_answer x where x.sample = s.id), 0),
            coalesce((select max(x.act) from stage_loss x where x.sample = s.id), 0)),
        p.test_within_days
    from chosen
    join sample s on s.id = chosen.sample
    join lot l on l.id = s.lot
    left join pull p on p.id = s.pull
    left join study_arm a on a.id = p.study_arm
    left join study st on st.id = a.study
    left join condition c on c.id = a.condition";

struct HeadRow {
    head: Head,
    is_imported: bool,
    signed_act: i64,
    test_within_days: Option<i64>,
}

fn head_from_row(row: &Row<'_>) -> rusqlite::Result<HeadRow> {
    let day = |found: Option<Day>| found.map(|day| day.0);
    let (purpose, condition): (String, Option<String>) = (row.get(2)?, row.get(7)?);
    let (orientation, age): (Option<String>, Option<String>) = (row.get(8)?, row.get(9)?);
    let orientation = orientation.filter(|words| words != "not stated");
    let condition = [condition, orientation].into_iter().flatten().collect::<Vec<_>>().join(" ");
    let head = Head {
        sample: row.get(0)?,
        number: row.get(1)?,
        age: age.unwrap_or_else(|| purpose.clone()),
        purpose,
        lot: row.get(3)?,
        lot_number: row.get(4)?,
        study: row.get(5)?,
        study_number: row.get(6)?,
        condition,
        pull: row.get(10)?,
        earliest_on: day(row.get(11)?),
        latest_on: day(row.get(12)?),
        taken_on: day(row.get(13)?),
        received_on: day(row.get(14)?),
        limit_set: row.get(15)?,
        limits_do: row.get(16)?,
        specification_version: row.get(17)?,
        presentation: row.get(18)?,
        newest_act: row.get(21)?,
    };
    Ok(HeadRow { head, is_imported: row.get(19)?, signed_act: row.get(20)?, test_within_days: row.get(22)? })
}

/// The facts of these samples, in the order of their numbers.
pub fn many(reader: &Reader<'_>, ids: &[i64]) -> Answer<Vec<ReviewSample>> {
    let ids = serde_json::to_string(ids)?;
    let heads = reader.all(HEAD, named_params! { ":ids": ids }, head_from_row)?;
    let mut tests = by_sample(tests(reader, &ids)?);
    let mut flags = by_sample(flags(reader, &ids)?);
    let mut records = records(reader, &ids)?;
    let mut losses = by_sample(losses(reader, &ids)?);
    let mut answers = by_sample(answers(reader, &ids)?);
    let mut checkers = by_sample(checkers(reader, &ids)?);
    let mut samples: Vec<ReviewSample> = heads
        .into_iter()
        .map(|row| {
            let id = row.head.sample;
            let seen = records.remove(&id).unwrap_or_default();
            let is_changed = row.signed_act > 0 && row.head.newest_act > row.signed_act;
            let record = RecordFacts {
                corrections: seen.corrections,
                not_read: seen.not_read,
                outside_window: outside_window(&row.head),
                tested_late: tested_late(&row, seen.last_first_reading),
                lost_stages: losses.remove(&id).unwrap_or_default(),
                changed_after_signature: is_changed.then_some(row.signed_act),
            };
            let flags = flags.remove(&id).unwrap_or_default();
            let answers = answers.remove(&id).unwrap_or_default();
            let facts = SampleFacts {
                sample: id,
                number: row.head.number.clone(),
                is_imported: row.is_imported,
                is_signed: row.signed_act > 0,
                is_changed_after_signing: is_changed,
                tests: tests.remove(&id).unwrap_or_default(),
                checkers: checkers.remove(&id).unwrap_or_default(),
                exceptions: exceptions(&flags, &record, &answers),
            };
            ReviewSample { head: row.head, facts }
        })
        .collect();
    samples.sort_by_key(|sample| sample.head.sample);
    Ok(samples)
}

fn by_sample<T>(rows: Vec<(i64, T)>) -> HashMap<i64, Vec<T>> {
    let mut found: HashMap<i64, Vec<T>> = HashMap::new();
    for (sample, row) in rows {
        found.entry(sample).or_default().push(row);
    }
    found
}

fn outside_window(head: &Head) -> Option<String> {
    let taken = head.taken_on?;
    if let Some(latest) = head.latest_on.filter(|latest| taken > *latest) {
        return Some(format!("taken {} after its window closed", days((taken - latest).num_days())));
    }
    let earliest = head.earliest_on.filter(|earliest| taken < *earliest)?;
    Some(format!("taken {} before its window opened", days((earliest - taken).num_days())))
}

fn tested_late(row: &HeadRow, first_read: Option<NaiveDate>) -> Option<String> {
    let (taken, within, read) = (row.head.taken_on?, row.test_within_days?, first_read?);
    let late = (read - taken).num_days() - within;
    (late > 0).then(|| format!("tested {} after the last day to test", days(late)))
}

fn days(count: i64) -> String {
    if count == 1 { "1 day".to_string() } else { format!("{count} days") }
}

fn tests(reader: &Reader<'_>, ids: &str) -> Answer<Vec<(i64, TestFacts)>> {
    reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select t.sample, t.id, t.title,
             (select max(r.version) from result r where r.sample_test = t.id),
             (select k.verdict = 'checked' from result_check k where k.sample_test = t.id
                 and k.version = (select max(version) from result where sample_test = t.id)
                 order by k.id desc limit 1),
             coalesce(json_extract(v.content, '$.needs_check'), 1),
             (select json_group_array(account) from (
                 select a.account from reading r join trail_act a on a.id = r.act where r.sample_test = t.id
                 union
                 select a.account from result r join trail_act a on a.id = r.act where r.sample_test = t.id))
         from chosen
         join sample_test t on t.sample = chosen.sample
         join method_version v on v.id = t.method_version
         order by t.position",
        named_params! { ":ids": ids },
        |row| {
            let performers: String = row.get(6)?;
            let facts = TestFacts {
                sample_test: row.get(1)?,
                title: row.get(2)?,
                version: row.get(3)?,
                is_checked: row.get(4)?,
                needs_check: row.get(5)?,
                performers: serde_json::from_str(&performers).unwrap_or_default(),
            };
            Ok((row.get(0)?, facts))
        },
    )
}

fn flags(reader: &Reader<'_>, ids: &str) -> Answer<Vec<(i64, FoundFlag)>> {
    reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select t.sample, f.id, t.id, f.kind, f.level, t.title || ': ' || f.sentence,
             (select max(i.number) from investigation i join result x on x.id = i.result
                 where x.sample_test = t.id)
         from chosen
         join sample_test t on t.sample = chosen.sample
         join result r on r.sample_test = t.id
             and r.version = (select max(version) from result where sample_test = t.id)
         join flag f on f.result = r.id
         order by t.position, f.id",
        named_params! { ":ids": ids },
        |row| {
            let flag = FoundFlag {
                id: row.get(1)?,
                sample_test: row.get(2)?,
                kind: row.get(3)?,
                level: row.get(4)?,
                sentence: row.get(5)?,
                investigation: row.get(6)?,
            };
            Ok((row.get(0)?, flag))
        },
    )
}

/// What the readings of a sample show by themselves.
#[derive(Default)]
struct Seen {
    corrections: usize,
    not_read: usize,
    /// The latest of the tests' first readings: the site's date.
    last_first_reading: Option<NaiveDate>,
}

fn records(reader: &Reader<'_>, ids: &str) -> Answer<HashMap<i64, Seen>> {
    let rows = reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select sample, sum(corrections), sum(not_read), max(first_on) from (
             select t.sample as sample,
                 sum(old.id is not null and (old.typed <> r.typed or old.qualifier <> r.qualifier))
                     as corrections,
                 sum(r.qualifier = 'not read'
                     and not exists (select 1 from reading later where later.supersedes = r.id)) as not_read,
                 min(date(coalesce(r.read_at, a.at), printf('%+d minutes', a.offset_minutes))) as first_on
             from chosen
             join sample_test t on t.sample = chosen.sample
             join reading r on r.sample_test = t.id
             join trail_act a on a.id = r.act
             left join reading old on old.id = r.supersedes
             group by t.id)
         group by sample",
        named_params! { ":ids": ids },
        |row| {
            let first: Option<String> = row.get(3)?;
            let seen = Seen {
                corrections: row.get::<_, u32>(1)? as usize,
                not_read: row.get::<_, u32>(2)? as usize,
                last_first_reading: first.as_deref().and_then(date_from_stored),
            };
            Ok((row.get(0)?, seen))
        },
    )?;
    Ok(rows.into_iter().collect())
}

fn losses(reader: &Reader<'_>, ids: &str) -> Answer<Vec<(i64, String)>> {
    reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select x.sample, x.stage || ' lost' || coalesce(' for ' || c.label, '') || ', because ' || x.why
         from chosen
         join stage_loss x on x.sample = chosen.sample
         left join container c on c.id = x.container
         order by x.id",
        named_params! { ":ids": ids },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

fn answers(reader: &Reader<'_>, ids: &str) -> Answer<Vec<(i64, (String, String))>> {
    reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select x.sample, x.about, x.answer
         from chosen join exception_answer x on x.sample = chosen.sample
         order by x.id",
        named_params! { ":ids": ids },
        |row| Ok((row.get(0)?, (row.get(1)?, row.get(2)?))),
    )
}

fn checkers(reader: &Reader<'_>, ids: &str) -> Answer<Vec<(i64, i64)>> {
    reader.all(
        "with chosen as (select value as sample from json_each(:ids))
         select t.sample, k.account
         from chosen
         join sample_test t on t.sample = chosen.sample
         join result_check k on k.sample_test = t.id
         where k.verdict = 'checked'",
        named_params! { ":ids": ids },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}
