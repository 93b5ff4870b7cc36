//! The sums of the week page: days, people, weeks to come, and cylinders that are still to be read.

use chrono::NaiveDate;
use chrono_tz::Tz;
use rusqlite::named_params;

use super::{Answer, Day, Reader};
use crate::domain::failure::Failure;
use crate::domain::moment::Moment;
use crate::domain::week::Cylinder;

/// Pulls to take and their minutes at the bench, by the day they stand under.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DaySum {
    pub on: NaiveDate,
    pub pulls: usize,
    pub minutes: u32,
}

fn count(value: i64) -> usize {
    usize::try_from(value).unwrap_or_default()
}

/// The days from today to `last` on which something is to be taken. What is due earlier and still has an open
/// window stands under today.
pub fn days(reader: &Reader<'_>, today: NaiveDate, last: NaiveDate) -> Answer<Vec<DaySum>> {
    // All that was due before today and is not late has an open window.
    let mut sums = reader.all(
        "select due_on, pulls, minutes from open_due
         where stage = 'to take' and due_on between :today and :last
         union all
         select null, sum(pulls), sum(minutes) from (
             select pulls, minutes from open_due where stage = 'to take' and due_on < :today
             union all
             select -pulls, -minutes from open_day where stage = 'to take' and latest_on < :today)",
        named_params! { ":today": Day(today), ":last": Day(last) },
        |row| {
            let on = row.get::<_, Option<Day>>(0)?.map_or(today, |day| day.0);
            let minutes = row.get::<_, Option<u32>>(2)?.unwrap_or_default();
            Ok(DaySum { on, pulls: count(row.get::<_, Option<i64>>(1)?.unwrap_or_default()), minutes })
        },
    )?;
    let earlier = sums.pop().filter(|sum| sum.pulls > 0);
    match (earlier, sums.iter_mut().find(|sum| sum.on == today)) {
        (Some(earlier), Some(now)) => {
            now.pulls += earlier.pulls;
            now.minutes += earlier.minutes;
        }
        (Some(earlier), None) => sums.insert(0, earlier),
        (None, _) => {}
    }
    Ok(sums)
}

/// Pulls due in each of four weeks and their minutes, each week by its first and last day.
pub fn weeks(reader: &Reader<'_>, weeks: [(NaiveDate, NaiveDate); 4]) -> Answer<Vec<(usize, u32)>> {
    let [first, second, third, fourth] = weeks.map(|(first, last)| (Day(first), Day(last)));
    reader.all(
        "select coalesce(sum(pulls), 0), coalesce(sum(minutes), 0) from open_due
         where stage = 'to take' and due_on between :first and :first_end
         union all
         select coalesce(sum(pulls), 0), coalesce(sum(minutes), 0) from open_due
         where stage = 'to take' and due_on between :second and :second_end
         union all
         select coalesce(sum(pulls), 0), coalesce(sum(minutes), 0) from open_due
         where stage = 'to take' and due_on between :third and :third_end
         union all
         select coalesce(sum(pulls), 0), coalesce(sum(minutes), 0) from open_due
         where stage = 'to take' and due_on between :fourth and :fourth_end",
        named_params! {
            ":first": first.0, ":first_end": first.1, ":second": second.0, ":second_end": second.1,
            ":third": third.0, ":third_end": third.1, ":fourth": fourth.0, ":fourth_end": fourth.1,
        },
        |row| Ok((count(row.get(0)?), row.get(1)?)),
    )
}

/// What one person has on one day.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PersonDay {
    pub account: i64,
    pub full_name: String,
    pub on: NaiveDate,
    pub pulls: usize,
    pub minutes: u32,
}

/// Who has what to take until `last`; what is due earlier stands under today.
pub fn people(reader: &Reader<'_>, today: NaiveDate, last: NaiveDate) -> Answer<Vec<PersonDay>> {
    reader.all(
        "select o.account, p.full_name, max(o.due_on, :today), count(*), sum(o.minutes)
         from open_pull o
         join account p on p.id = o.account
         where o.stage = 'to take' and o.due_on <= :last and o.account is not null
         group by o.account, 3
         order by p.full_name, 3",
        named_params! { ":today": Day(today), ":last": Day(last) },
        |row| {
            Ok(PersonDay {
                account: row.get(0)?,
                full_name: row.get(1)?,
                on: row.get::<_, Day>(2)?.0,
                pulls: count(row.get(3)?),
                minutes: row.get(4)?,
            })
        },
    )
}

/// The next due day after a date with the number of the first pull due then.
pub fn next(reader: &Reader<'_>, after: NaiveDate) -> Answer<Option<(NaiveDate, i64, String)>> {
    reader.maybe(
        "select o.due_on, o.pull, s.number
         from open_pull o
         join sample s on s.pull = o.pull
         where o.stage = 'to take' and o.due_on > :after
         order by o.due_on, o.pull
         limit 1",
        named_params! { ":after": Day(after) },
        |row| Ok((row.get::<_, Day>(0)?.0, row.get(1)?, row.get(2)?)),
    )
}

/// A cylinder of a pull in testing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OpenCylinder {
    pub sample_test: i64,
    pub sample_number: String,
    pub label: String,
    pub cylinder: Cylinder,
}

/// The cylinders that were filled and shaken and whose test has no result yet. Time zero is the first record of
/// the total volume.
pub fn cylinders(reader: &Reader<'_>, zone: Tz) -> Answer<Vec<OpenCylinder>> {
    let rows = reader.all(
        "select t.id, s.number, coalesce(k.label, ''), min(coalesce(r.read_at, a.at)),
             json_extract(v.content, '$.settings.sedimentation.planned_minutes'),
             coalesce((select group_concat(distinct x.field) from reading x
                 where x.sample_test = t.id and x.container is r.container and x.replicate = r.replicate
                     and x.field like 'sediment\\_ml@%' escape '\\'), '')
         from open_pull o
         join sample s on s.pull = o.pull
         join sample_test t on t.sample = s.id
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method and m.kind = 'sedimentation'
         join reading r on r.sample_test = t.id and r.field = 'total_ml'
         join trail_act a on a.id = r.act
         left join container k on k.id = r.container
         where o.stage = 'in test' and not exists (select 1 from result where sample_test = t.id)
         group by t.id, r.container, r.replicate",
        [],
        |row| {
            Ok((
                row.get::<_, i64>(0)?,
                row.get::<_, String>(1)?,
                row.get::<_, String>(2)?,
                row.get::<_, String>(3)?,
                row.get::<_, Option<String>>(4)?,
                row.get::<_, String>(5)?,
            ))
        },
    )?;
    let cylinder = |(sample_test, sample_number, label, shaken_at, planned, read): Found| {
        let planned_minutes = match planned {
            Some(planned) => serde_json::from_str(&planned).map_err(Failure::fault)?,
            None => Vec::new(),
        };
        let read_minutes =
            read.split(',').filter_map(|field| field.split_once('@')?.1.parse().ok()).collect();
        let shaken_at = Moment::from_stored(&shaken_at, zone)
            .ok_or_else(|| Failure::missing("instant of this cylinder"))?;
        let cylinder = Cylinder { shaken_at, planned_minutes, read_minutes };
        Ok(OpenCylinder { sample_test, sample_number, label, cylinder })
    };
    rows.into_iter().map(cylinder).collect()
}

type Found = (i64, String, String, String, Option<String>, String);
