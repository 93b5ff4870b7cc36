//! What the rules of "what was checked" are asked of.

use rusqlite::named_params;

use crate::domain::review::checked::CheckedFacts;
use crate::store::{Answer, Reader};

use super::facts::ReviewSample;

/// The facts of a sample for [`crate::domain::review::checked::rules`].
pub fn facts(reader: &Reader<'_>, sample: &ReviewSample) -> Answer<CheckedFacts> {
    let id = sample.head.sample;
    let mut facts = counted(reader, id)?;
    facts.has_pull = sample.head.pull.is_some();
    facts.identity_by = identity(reader, id)?;
    let kind = |wanted: &str| sample.facts.exceptions.iter().find(|one| one.kind == wanted);
    let words = |wanted: &str| {
        let sentence = kind(wanted).map(|one| one.sentence.trim_end_matches('.').to_string());
        sentence.map(|sentence| sentence.trim_start_matches("The pull was ").to_string())
    };
    facts.outside_window = words("pull outside window");
    facts.tested_late = words("tested late");
    facts.lost_stages = sample.facts.exceptions.iter().filter(|one| one.kind == "stage lost").count();
    facts.to_check = sample.facts.tests.iter().filter(|test| test.needs_check).count();
    let is_checked =
        |test: &&crate::domain::check::TestFacts| test.needs_check && test.is_checked == Some(true);
    facts.checked = sample.facts.tests.iter().filter(is_checked).count();
    (facts.instruments, facts.overdue_instruments) = instruments(reader, id)?;
    (facts.people, facts.unqualified) = people(reader, id)?;
    Ok(facts)
}

fn identity(reader: &Reader<'_>, sample: i64) -> Answer<Option<String>> {
    let found = reader.maybe(
        "select e.identity_by
         from sample s join pull_event e on e.pull = s.pull
         where s.id = :sample and e.kind = 'pulled' order by e.id limit 1",
        named_params! { ":sample": sample },
        |row| row.get::<_, Option<String>>(0),
    )?;
    Ok(found.flatten())
}

fn counted(reader: &Reader<'_>, sample: i64) -> Answer<CheckedFacts> {
    reader.one(
        "sample with this number",
        "with test as (select id from sample_test where sample = :sample),
         latest as (
             select r.* from result r join test on test.id = r.sample_test
             where r.version = (select max(version) from result where sample_test = r.sample_test)),
         raised as (select f.kind from flag f join latest on latest.id = f.result),
         said as (
             select r.*, old.typed as was, old.qualifier as was_qualifier,
                 exists (select 1 from reading later where later.supersedes = r.id) as is_gone
             from reading r join test on test.id = r.sample_test
             left join reading old on old.id = r.supersedes)
         select (select count(*) from said),
             (select count(*) from latest),
             (select count(*) from latest where verdict <> 'no limit' and verdict <> 'not judged'),
             (select count(*) from latest where verdict = 'conforms'),
             (select count(*) from raised where kind in ('spread', 'no reportable value')),
             (select count(*) from raised where kind in ('single value outside', 'first value outside')),
             (select count(*) from raised where kind = 'out of trend'),
             (select count(*) from raised where kind = 'not evaluable'),
             (select count(*) from said where was is not null
                 and (was <> typed or was_qualifier <> qualifier)),
             (select count(*) from said where coalesce(hints, '[]') not in ('[]', '') and not is_gone),
             (select count(*) from said where hint_answer = 'kept' and not is_gone),
             (select count(*) from attachment where kind = 'sample' and subject = :sample)",
        named_params! { ":sample": sample },
        |row| {
            let count = |at: usize| Ok::<usize, rusqlite::Error>(row.get::<_, u32>(at)? as usize);
            Ok(CheckedFacts {
                readings: count(0)?,
                results: count(1)?,
                limited: count(2)?,
                conforming: count(3)?,
                spread_flags: count(4)?,
                single_flags: count(5)?,
                trend_flags: count(6)?,
                not_evaluable: count(7)?,
                corrections: count(8)?,
                hints: count(9)?,
                hints_kept: count(10)?,
                photos: count(11)?,
                ..CheckedFacts::default()
            })
        },
    )
}

/// Instruments used, and those whose calibration was over on the day of a reading and not lifted for it.
fn instruments(reader: &Reader<'_>, sample: i64) -> Answer<(usize, Vec<String>)> {
    let rows = reader.all(
        "with used as (
             select distinct r.instrument as instrument, max(r.act) as act,
                 date(a.at, printf('%+d minutes', a.offset_minutes)) as day
             from sample_test t
             join reading r on r.sample_test = t.id
             join trail_act a on a.id = r.act
             where t.sample = :sample and r.instrument is not null
             group by r.instrument, day)
         select i.code, max(coalesce((
                 select e.due_on < used.day from instrument_event e
                 where e.instrument = used.instrument and e.kind = 'calibrated' and e.act <= used.act
                 order by e.id desc limit 1), 1)
             and not exists (
                 select 1 from stop_override o
                 where o.instrument = used.instrument and o.stop = 'calibration' and o.valid_on = used.day))
         from used join instrument i on i.id = used.instrument
         group by i.code order by i.code",
        named_params! { ":sample": sample },
        |row| Ok((row.get::<_, String>(0)?, row.get::<_, bool>(1)?)),
    )?;
    let overdue = rows.iter().filter(|(_, is_overdue)| *is_overdue).map(|(code, _)| code.clone()).collect();
    Ok((rows.len(), overdue))
}

/// People who read, and those not qualified for the method on the day, where no override lifted it.
fn people(reader: &Reader<'_>, sample: i64) -> Answer<(usize, Vec<String>)> {
    let rows = reader.all(
        "with used as (
             select distinct a.account as account, t.method_version as method_version,
                 date(a.at, printf('%+d minutes', a.offset_minutes)) as day
             from sample_test t
             join reading r on r.sample_test = t.id
             join trail_act a on a.id = r.act
             where t.sample = :sample)
         select p.full_name, max(not exists (
                 select 1 from qualification q
                 where q.account = used.account and q.method_version = used.method_version
                 and used.day between q.starts_on and q.ends_on)
             and not exists (
                 select 1 from stop_override o
                 where o.account = used.account and o.method_version = used.method_version
                 and o.stop = 'qualification' and o.valid_on = used.day))
         from used join account p on p.id = used.account
         group by p.full_name order by p.full_name",
        named_params! { ":sample": sample },
        |row| Ok((row.get::<_, String>(0)?, row.get::<_, bool>(1)?)),
    )?;
    let missing = rows.iter().filter(|(_, is_missing)| *is_missing).map(|(name, _)| name.clone()).collect();
    Ok((rows.len(), missing))
}
