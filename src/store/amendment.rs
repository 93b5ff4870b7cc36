//! Amendments of studies: which newer protocol version a study follows, since when and why.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::amendment::StandingPull;
use crate::domain::window::Window;

/// One amendment of a study, as its page lists it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Amendment {
    pub protocol_version: i64,
    pub protocol_words: String,
    pub why: String,
    pub by: String,
    /// As stored: UTC.
    pub at: String,
    pub act: i64,
}

pub fn insert(
    change: &Change<'_>,
    study: i64,
    protocol_version: i64,
    specification_version: i64,
    why: &str,
) -> Answer<i64> {
    change.insert(
        "insert into study_amendment (study, protocol_version, specification_version, why)
         values (:study, :protocol_version, :specification_version, :why)",
        named_params! {
            ":study": study,
            ":protocol_version": protocol_version,
            ":specification_version": specification_version,
            ":why": why,
        },
    )
}

/// The amendments of a study, oldest first.
pub fn of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<Amendment>> {
    reader.all(
        "select m.protocol_version, r.code || ' version ' || v.number, m.why, a.full_name, a.at, m.act
         from study_amendment m
         join protocol_version v on v.id = m.protocol_version
         join protocol r on r.id = v.protocol
         join trail_act a on a.id = m.act
         where m.study = :study
         order by m.id",
        named_params! { ":study": study },
        |row| {
            Ok(Amendment {
                protocol_version: row.get(0)?,
                protocol_words: row.get(1)?,
                why: row.get(2)?,
                by: row.get(3)?,
                at: row.get(4)?,
                act: row.get(5)?,
            })
        },
    )
}

/// Pulls of a study in whose place another one was planned.
pub fn superseded(reader: &Reader<'_>, study: i64) -> Answer<Vec<i64>> {
    reader.all(
        "select p.supersedes
         from study_arm a join pull p on p.study_arm = a.id
         where a.study = :study and p.supersedes is not null",
        named_params! { ":study": study },
        |row| row.get(0),
    )
}

/// The pull that was planned in place of another one: its id and number.
pub fn successor(reader: &Reader<'_>, pull: i64) -> Answer<Option<(i64, String)>> {
    reader.maybe(
        "select p.id, s.number from pull p join sample s on s.pull = p.id where p.supersedes = :pull",
        named_params! { ":pull": pull },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// The pull in whose place this one was planned.
pub fn predecessor(reader: &Reader<'_>, pull: i64) -> Answer<Option<(i64, String)>> {
    reader.maybe(
        "select p.supersedes, s.number from pull p join sample s on s.pull = p.supersedes where p.id = :pull",
        named_params! { ":pull": pull },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// The pulls of a study as they stand, with their tests; superseded ones are left out.
pub fn standing(reader: &Reader<'_>, study: i64) -> Answer<Vec<StandingPull>> {
    let mut tests: Vec<(i64, String, i64)> = reader.all(
        "select s.pull, t.test, t.method_version
         from study_arm a
         join pull p on p.study_arm = a.id
         join sample s on s.pull = p.id
         join sample_test t on t.sample = s.id
         where a.study = :study
         order by s.pull, t.position",
        named_params! { ":study": study },
        |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?)),
    )?;
    let mut pulls = reader.all(
        "select p.id, s.number, a.position, p.age_text, p.earliest_on, p.latest_on, p.containers_needed,
             coalesce(p.test_within_days, 0), s.specification_version,
             not exists (select 1 from pull_event where pull = p.id)
         from study_arm a
         join pull p on p.study_arm = a.id
         join sample s on s.pull = p.id
         where a.study = :study and not exists (select 1 from pull later where later.supersedes = p.id)
         order by a.position, p.due_on, p.id",
        named_params! { ":study": study },
        |row| {
            let (earliest_on, latest_on): (Option<Day>, Option<Day>) = (row.get(4)?, row.get(5)?);
            let window = earliest_on.zip(latest_on);
            Ok(StandingPull {
                id: row.get(0)?,
                number: row.get(1)?,
                arm_position: row.get(2)?,
                age_text: row.get(3)?,
                window: window.map(|(first, last)| Window { earliest_on: first.0, latest_on: last.0 }),
                containers_needed: row.get(6)?,
                test_within_days: row.get(7)?,
                specification_version: row.get(8)?,
                is_open: row.get(9)?,
                tests: Vec::new(),
            })
        },
    )?;
    for pull in &mut pulls {
        let own = tests.extract_if(.., |(of, _, _)| *of == pull.id);
        pull.tests = own.map(|(_, test, method)| (test, method)).collect();
    }
    Ok(pulls)
}
