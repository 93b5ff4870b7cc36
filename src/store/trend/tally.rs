//! Judgements counted against their promise, and what stands out lately: ranges of an index.

use chrono::NaiveDate;
use rusqlite::named_params;

use crate::domain::trend::promise::JudgedFacts;
use crate::store::{Answer, Day, Reader};

/// Results judged by H or A since a day, the newest version of each.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Counts {
    pub facts: JudgedFacts,
    pub not_evaluable: u32,
}

/// Counts since a day.
pub fn since(reader: &Reader<'_>, day: NaiveDate) -> Answer<Counts> {
    reader.one(
        "count",
        "select coalesce(sum(v.verdict <> 'not evaluable'), 0), coalesce(sum(v.verdict = 'not evaluable'), 0),
             coalesce(sum(case when v.verdict <> 'not evaluable' then cast(v.alert_level as real) end), 0.0),
             coalesce(sum(case when v.verdict <> 'not evaluable' then cast(v.action_level as real) end), 0.0),
             coalesce(sum(v.verdict in ('alert', 'action')), 0), coalesce(sum(v.verdict = 'action'), 0),
             coalesce(min(v.verdict = 'not evaluable' or v.action_level = '0.01'), 1)
         from trend_verdict v
         cross join result r on r.id = v.result
         where v.rule in ('H', 'A')
             and v.judged_on >= :day
             and r.version = (select max(version) from result where sample_test = r.sample_test)",
        named_params! { ":day": Day(day) },
        |row| {
            let facts = JudgedFacts {
                judged: row.get(0)?,
                expected_alerts: row.get(2)?,
                expected_actions: row.get(3)?,
                alerts: row.get(4)?,
                actions: row.get(5)?,
                is_usual: row.get(6)?,
            };
            Ok(Counts { facts, not_evaluable: row.get(1)? })
        },
    )
}

/// A verdict that stands out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Standout {
    pub sample_test: i64,
    pub sample: i64,
    pub lot: i64,
    pub lot_number: String,
    pub place: String,
    pub title: String,
    pub component: String,
    pub shown: String,
    pub unit: String,
    pub rule: String,
    pub verdict: String,
    pub sentence: String,
    pub judged_on: NaiveDate,
}

/// Alerts, actions and early warnings since a day, the newest first; at most so many. Every judged result has one row
/// of H or A, by which the days are found.
pub fn standing_out(reader: &Reader<'_>, day: NaiveDate, most: usize) -> Answer<Vec<Standout>> {
    reader.all(
        "select t.id, s.id, l.id, l.number,
             c.name || case a.orientation when 'not stated' then '' else ' ' || a.orientation end || ', ' || p.age_text,
             t.title, r.component, r.shown, r.unit, v.rule, v.verdict, v.sentence, v.judged_on
         from trend_verdict d
         cross join trend_verdict v on v.result = d.result
         cross join result r on r.id = v.result
         join sample_test t on t.id = r.sample_test
         join sample s on s.id = t.sample
         join lot l on l.id = s.lot
         join pull p on p.id = s.pull
         join study_arm a on a.id = p.study_arm
         join condition c on c.id = a.condition
         where d.rule in ('H', 'A')
             and d.judged_on >= :day
             and v.verdict in ('alert', 'action', 'likely', 'very likely')
             and r.version = (select max(version) from result where sample_test = r.sample_test)
         order by v.judged_on desc, v.id desc
         limit :most",
        named_params! { ":day": Day(day), ":most": most as i64 },
        |row| {
            Ok(Standout {
                sample_test: row.get(0)?,
                sample: row.get(1)?,
                lot: row.get(2)?,
                lot_number: row.get(3)?,
                place: row.get(4)?,
                title: row.get(5)?,
                component: row.get(6)?,
                shown: row.get(7)?,
                unit: row.get(8)?,
                rule: row.get(9)?,
                verdict: row.get(10)?,
                sentence: row.get(11)?,
                judged_on: row.get::<_, Day>(12)?.0,
            })
        },
    )
}

/// The early warnings that stand for a lot: the newest of each test, component and arm, where it warns.
pub fn warnings_of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Standout>> {
    let all = reader.all(
        "select t.id, s.id, l.id, l.number,
             c.name || case a.orientation when 'not stated' then '' else ' ' || a.orientation end,
             t.title, r.component, r.shown, r.unit, v.rule, v.verdict, v.sentence, v.judged_on, p.age_text
         from lot l
         cross join sample s on s.lot = l.id
         cross join sample_test t on t.sample = s.id
         cross join result r on r.sample_test = t.id
         cross join trend_verdict v on v.result = r.id and v.rule = 'HS'
         join pull p on p.id = s.pull
         join study_arm a on a.id = p.study_arm
         join condition c on c.id = a.condition
         where l.id = :lot and r.version = (select max(version) from result where sample_test = t.id)
         order by v.age_days desc, v.id desc",
        named_params! { ":lot": lot },
        |row| {
            let place: String = row.get(4)?;
            let age: String = row.get(13)?;
            Ok((
                place.clone(),
                Standout {
                    sample_test: row.get(0)?,
                    sample: row.get(1)?,
                    lot: row.get(2)?,
                    lot_number: row.get(3)?,
                    place: format!("{place}, {age}"),
                    title: row.get(5)?,
                    component: row.get(6)?,
                    shown: row.get(7)?,
                    unit: row.get(8)?,
                    rule: row.get(9)?,
                    verdict: row.get(10)?,
                    sentence: row.get(11)?,
                    judged_on: row.get::<_, Day>(12)?.0,
                },
            ))
        },
    )?;
    let mut newest: Vec<(String, Standout)> = Vec::new();
    for (place, one) in all {
        let is_known = newest
            .iter()
            .any(|(at, known)| *at == place && known.title == one.title && known.component == one.component);
        if !is_known {
            newest.push((place, one));
        }
    }
    let warns = |one: &Standout| one.verdict == "likely" || one.verdict == "very likely";
    Ok(newest.into_iter().map(|(_, one)| one).filter(warns).collect())
}
