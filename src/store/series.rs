//! The points of the trend charts: results over the ages of one lot, condition and orientation.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::{Answer, Exact, Reader};
use crate::domain::series::{ArmWords, SeriesKey, SeriesPoint};

/// The series a sample's pull belongs to; `None` for a sample without a pull.
pub fn key_of_sample(reader: &Reader<'_>, sample: i64) -> Answer<Option<SeriesKey>> {
    reader.maybe(
        "select st.lot, a.condition, a.orientation
         from sample s
         join pull p on p.id = s.pull
         join study_arm a on a.id = p.study_arm
         join study st on st.id = a.study
         where s.id = :sample",
        named_params! { ":sample": sample },
        |row| Ok(SeriesKey { lot: row.get(0)?, condition: row.get(1)?, orientation: row.get(2)? }),
    )
}

pub(in crate::store) const SELECT: &str = "
    select s.id, t.id, t.test, t.title, coalesce(r.component, ''),
        p.age_months, p.age_days,
        (select e.happened_on from pull_event e where e.pull = p.id and e.kind = 'pulled' order by e.id limit 1),
        st.started_on, p.age_text,
        r.value, coalesce(r.qualifier, 'none'), coalesce(r.shown, ''), coalesce(r.unit, ''),
        coalesce(r.verdict, 'not judged'), r.sd, r.n, r.imported is not null or st.imported is not null,
        exists (select 1 from flag f where f.result = r.id and f.kind = 'out of trend'),
        exists (select 1 from signature g
            where g.kind = 'sample' and g.subject = s.id and g.meaning = 'review' and g.act > r.act),
        coalesce((select e.kind from pull_event e where e.pull = p.id order by e.id desc limit 1), '') = 'missed',
        (select group_concat(v.value, ' ') from reading v
            where v.sample_test = t.id and v.field in ('value', 'inversions') and v.value is not null
            and r.imported is null and (r.component = '')
            and not exists (select 1 from reading later where later.supersedes = v.id))
    from study st
    join study_arm a on a.study = st.id
    join pull p on p.study_arm = a.id
    join sample s on s.pull = p.id
    join sample_test t on t.sample = s.id
    left join result r on r.sample_test = t.id
        and r.version = (select max(version) from result newest where newest.sample_test = t.id)";

/// A pull that is still to come is no gap: it has neither a result nor an event.
pub(in crate::store) const HAPPENED: &str = "(r.id is not null
    or exists (select 1 from pull_event e where e.pull = p.id and e.kind <> 'cancelled'))";

/// Every test's points for a lot × condition × orientation, ordered by test, component and age. One query.
pub fn of_key(reader: &Reader<'_>, key: &SeriesKey) -> Answer<Vec<SeriesPoint>> {
    let mut points = reader.all(
        &format!(
            "{SELECT} where st.lot = :lot and a.condition = :condition and a.orientation = :orientation
             and {HAPPENED}"
        ),
        named_params! { ":lot": key.lot, ":condition": key.condition, ":orientation": key.orientation },
        from_row,
    )?;
    sort(&mut points);
    Ok(points)
}

/// The points of one study, with the arm each belongs to: for the study's own page.
pub fn of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<(i64, SeriesPoint)>> {
    let select = SELECT.replacen("select s.id,", "select a.id, s.id,", 1);
    let mut points: Vec<(i64, SeriesPoint)> = reader.all(
        &format!("{select} where st.id = :study and {HAPPENED}"),
        named_params! { ":study": study },
        |row| Ok((row.get(0)?, from_row_at(row, 1)?)),
    )?;
    points.sort_by(|(arm, point), (other, later)| arm.cmp(other).then_with(|| order(point, later)));
    Ok(points)
}

/// The arms of a study in words, each with its points and the specification whose limits are drawn. Two queries.
pub fn arms_of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<(ArmWords, Vec<SeriesPoint>)>> {
    let mut arms = reader.all(
        "select a.id,
             c.name || case a.orientation when 'not stated' then '' else ' ' || a.orientation end
                 || coalesce(', ' || a.container_text, ''),
             v.content
         from study s
         join study_arm a on a.study = s.id
         join condition c on c.id = a.condition
         left join specification_version v on v.id = coalesce(
             (select m.specification_version from study_amendment m where m.study = s.id order by m.id desc limit 1),
             s.specification_version)
         where s.id = :study
         order by a.position",
        named_params! { ":study": study },
        |row| {
            let words = ArmWords { arm: row.get(0)?, condition: row.get(1)?, specification: row.get(2)? };
            Ok((words, Vec::new()))
        },
    )?;
    for (arm, point) in of_study(reader, study)? {
        if let Some((_, points)) = arms.iter_mut().find(|(words, _)| words.arm == arm) {
            points.push(point);
        }
    }
    Ok(arms)
}

fn sort(points: &mut [SeriesPoint]) {
    points.sort_by(order);
}

fn order(one: &SeriesPoint, other: &SeriesPoint) -> std::cmp::Ordering {
    (&one.test, &one.component, one.age_months, one.sample).cmp(&(
        &other.test,
        &other.component,
        other.age_months,
        other.sample,
    ))
}

fn from_row(row: &Row<'_>) -> rusqlite::Result<SeriesPoint> {
    from_row_at(row, 0)
}

pub(in crate::store) fn from_row_at(row: &Row<'_>, at: usize) -> rusqlite::Result<SeriesPoint> {
    let exact = |column: usize| -> rusqlite::Result<Option<Decimal>> {
        Ok(row.get::<_, Option<Exact>>(at + column)?.map(|Exact(value)| value))
    };
    let readings: Option<String> = row.get(at + 21)?;
    Ok(SeriesPoint {
        sample: row.get(at)?,
        sample_test: row.get(at + 1)?,
        test: row.get(at + 2)?,
        title: row.get(at + 3)?,
        component: row.get(at + 4)?,
        age_months: age(row, at)?,
        age: row.get(at + 9)?,
        value: exact(10)?,
        qualifier: row.get(at + 11)?,
        shown: row.get(at + 12)?,
        unit: row.get(at + 13)?,
        verdict: row.get(at + 14)?,
        sd: exact(15)?,
        n: row.get(at + 16)?,
        is_imported: row.get(at + 17)?,
        has_trend_flag: row.get(at + 18)?,
        is_signed: row.get(at + 19)?,
        is_missed: row.get(at + 20)?,
        readings: readings
            .unwrap_or_default()
            .split_whitespace()
            .filter_map(|text| Decimal::from_str_exact(text).ok())
            .collect(),
    })
}

/// The actual age from the date of the pull, else the nominal one (decision A11).
fn age(row: &Row<'_>, at: usize) -> rusqlite::Result<Decimal> {
    use crate::domain::age::actual_months;
    use crate::domain::moment::date_from_stored;
    let (taken, started): (Option<String>, Option<String>) = (row.get(at + 7)?, row.get(at + 8)?);
    let taken = taken.as_deref().and_then(date_from_stored);
    let started = started.as_deref().and_then(date_from_stored);
    if let (Some(taken), Some(started)) = (taken, started) {
        return Ok(actual_months(started, taken));
    }
    let (months, days): (Option<i64>, Option<i64>) = (row.get(at + 5)?, row.get(at + 6)?);
    Ok(match (months, days) {
        (Some(months), _) => Decimal::from(months),
        (None, Some(days)) => Decimal::from(days) / Decimal::new(304_375, 4),
        (None, None) => Decimal::ZERO,
    })
}

/// The clarity of the liquid at the last reading of each sample's sedimentation test: sample and grade 0 to 3.
pub fn clarities(reader: &Reader<'_>, key: &SeriesKey) -> Answer<Vec<(i64, u8)>> {
    let rows = reader.all(
        &format!("{CLARITY} and a.condition = :condition and a.orientation = :orientation group by s.id"),
        named_params! { ":lot": key.lot, ":condition": key.condition, ":orientation": key.orientation },
        |row| Ok((row.get(0)?, row.get::<_, String>(1)?)),
    )?;
    Ok(graded(rows))
}

/// The same for every sample on the lot's studies.
pub fn clarities_of_lot(reader: &Reader<'_>, lot: i64) -> Answer<Vec<(i64, u8)>> {
    let sql = format!("{CLARITY} group by s.id");
    let row = |row: &Row<'_>| Ok((row.get(0)?, row.get::<_, String>(1)?));
    Ok(graded(reader.all(&sql, named_params! { ":lot": lot }, row)?))
}

const CLARITY: &str = "
    select s.id, r.typed, max(cast(substr(r.field, 9) as integer))
    from study st
    join study_arm a on a.study = st.id
    join pull p on p.study_arm = a.id
    join sample s on s.pull = p.id
    join sample_test t on t.sample = s.id
    join reading r on r.sample_test = t.id
    where st.lot = :lot and r.field like 'clarity@%' and r.qualifier <> 'not read'
    and not exists (select 1 from reading later where later.supersedes = r.id)";

fn graded(rows: Vec<(i64, String)>) -> Vec<(i64, u8)> {
    let grade = |text: String| text.trim().parse::<u8>().ok().filter(|grade| *grade <= 3);
    rows.into_iter().filter_map(|(sample, text)| Some((sample, grade(text)?))).collect()
}
