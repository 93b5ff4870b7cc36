//! A lot over its ages, for the rules that read several tests together: four queries, however long its life.

use std::collections::BTreeMap;

use rusqlite::{Row, named_params};

use super::{Answer, Day, Exact, Reader, trend};
use crate::domain::failure::Failure;
use crate::domain::method::TestKind;
use crate::domain::suggestion::facts::{LotFacts, ReadingFact, ResultFact};

/// Everything the rules ask of a lot. Imported results are left out: where they were read is not known here.
pub fn of_lot(reader: &Reader<'_>, lot: i64) -> Answer<LotFacts> {
    let mut facts = LotFacts {
        results: reader.all(RESULTS, named_params! { ":lot": lot }, result_from_row)?,
        readings: reader.all(READINGS, named_params! { ":lot": lot }, |row| {
            Ok(ReadingFact {
                sample: row.get(0)?,
                field: row.get(1)?,
                typed: row.get(2)?,
                value: row.get::<_, Option<Exact>>(3)?.map(|exact| exact.0),
            })
        })?,
        ..LotFacts::default()
    };
    facts.methods = methods(reader, &facts)?;
    let study: Option<(Option<String>, i64)> = reader.maybe(
        "select v.content, (select min(p.id) from study_arm a join pull p on p.study_arm = a.id where a.study = y.id)
         from study y
         left join specification_version v on v.id = coalesce(
             (select m.specification_version from study_amendment m where m.study = y.id order by m.id desc limit 1),
             y.specification_version)
         where y.lot = :lot and y.imported is null
         order by y.id desc limit 1",
        named_params! { ":lot": lot },
        |row| Ok((row.get(0)?, row.get::<_, Option<i64>>(1)?.unwrap_or_default())),
    )?;
    if let Some((content, pull)) = study {
        facts.specification =
            content.as_deref().map(serde_json::from_str).transpose().map_err(Failure::fault)?;
        let place = trend::place(reader, pull)?;
        facts.expiry_days = place
            .and_then(|place| place.expires_on.map(|expires_on| (expires_on - place.started_on).num_days()));
    }
    Ok(facts)
}

const RESULTS: &str =
    "select a.id, a.condition, a.orientation, a.is_labelled_condition, c.use = 'accelerated', s.id,
        y.started_on, e.happened_on, t.test, m.kind, t.method_version, r.value, r.qualifier, r.detail,
        c.name || case a.orientation when 'not stated' then '' else ' ' || a.orientation end
    from study y
    join study_arm a on a.study = y.id
    join condition c on c.id = a.condition
    join pull p on p.study_arm = a.id
    join pull_event e on e.pull = p.id and e.kind = 'pulled'
    join sample s on s.pull = p.id
    join sample_test t on t.sample = s.id
    join method_version v on v.id = t.method_version
    join method m on m.id = v.method
    join result r on r.sample_test = t.id
    where y.lot = :lot
        and y.started_on is not null
        and r.imported is null
        and r.component = ''
        and r.version = (select max(version) from result where sample_test = t.id)
    order by a.id, e.happened_on, t.position";

const READINGS: &str = "select s.id, r.field, r.typed, r.value
    from sample s
    join sample_test t on t.sample = s.id
    join reading r on r.sample_test = t.id
    where s.lot = :lot
        and s.pull is not null
        and r.field in ('seconds', 'residue', 'torque_percent', 'clarity@1440', 'odour', 'colour')
        and r.qualifier <> 'not read'
        and exists (select 1 from result where sample_test = t.id)
        and not exists (select 1 from reading later where later.supersedes = r.id)
    order by s.id, r.id";

fn result_from_row(row: &Row<'_>) -> rusqlite::Result<ResultFact> {
    let (started, taken): (Day, Day) = (row.get(6)?, row.get(7)?);
    let kind: String = row.get(9)?;
    Ok(ResultFact {
        arm: row.get(0)?,
        condition: row.get(1)?,
        place: row.get(14)?,
        orientation: row.get(2)?,
        is_labelled: row.get(3)?,
        is_accelerated: row.get(4)?,
        sample: row.get(5)?,
        days: (taken.0 - started.0).num_days(),
        test: row.get(8)?,
        kind: TestKind::from_code(&kind).unwrap_or(TestKind::Numeric),
        method_version: row.get(10)?,
        value: row.get::<_, Option<Exact>>(11)?.map(|exact| exact.0),
        qualifier: row.get(12)?,
        detail: row.get(13)?,
    })
}

fn methods(
    reader: &Reader<'_>,
    facts: &LotFacts,
) -> Answer<BTreeMap<i64, crate::domain::method::MethodContent>> {
    let mut ids: Vec<i64> = facts.results.iter().map(|one| one.method_version).collect();
    ids.sort_unstable();
    ids.dedup();
    let asked = serde_json::to_string(&ids).map_err(Failure::fault)?;
    let rows = reader.all(
        "select v.id, v.content from json_each(:ids) j join method_version v on v.id = j.value",
        named_params! { ":ids": asked },
        |row| Ok((row.get::<_, i64>(0)?, row.get::<_, String>(1)?)),
    )?;
    let read =
        |(id, content): (i64, String)| Ok((id, serde_json::from_str(&content).map_err(Failure::fault)?));
    rows.into_iter().map(read).collect()
}
