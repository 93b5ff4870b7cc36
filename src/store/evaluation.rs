//! What an evaluation is made of: the groups that have results, their records, and the limits that hold.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::series::{HAPPENED, SELECT, from_row_at};
use super::{Answer, Exact, Reader};
use crate::domain::evaluation::record::{Group, GroupKey, Record};

const GROUP: &str = "
    select p.id, a.condition, a.orientation, coalesce(a.container_text, ''), min(a.id), p.code,
        d.code, d.name, c.name, c.use, c.temperature_c, a.limits_do, max(a.is_labelled_condition),
        d.imported is not null or max(st.imported is not null)
    from lot l
    join presentation p on p.id = l.presentation
    join product d on d.id = p.product
    join study st on st.lot = l.id
    join study_arm a on a.study = st.id
    join condition c on c.id = a.condition";

const GROUPED: &str = "group by p.id, a.condition, a.orientation, coalesce(a.container_text, '')
    order by p.code, max(a.is_labelled_condition) desc, c.id, a.orientation <> 'upright', a.orientation, 4";

fn group(row: &Row<'_>) -> rusqlite::Result<Group> {
    Ok(Group {
        key: GroupKey {
            presentation: row.get(0)?,
            condition: row.get(1)?,
            orientation: row.get(2)?,
            pack: row.get(3)?,
        },
        arm: row.get(4)?,
        presentation_code: row.get(5)?,
        product_code: row.get(6)?,
        product: row.get(7)?,
        condition: row.get(8)?,
        condition_use: row.get(9)?,
        temperature_c: row.get::<_, Option<Exact>>(10)?.map(|Exact(value)| value),
        limits_do: row.get(11)?,
        is_labelled: row.get(12)?,
        is_imported: row.get(13)?,
    })
}

/// The groups of a presentation: the labelled conditions first, then as the catalogue lists them.
pub fn groups(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<Group>> {
    let sql = format!("{GROUP} where l.presentation = :presentation {GROUPED}");
    reader.all(&sql, named_params! { ":presentation": presentation }, group)
}

/// The group that an arm belongs to, addressed by its smallest arm.
pub fn group_of_arm(reader: &Reader<'_>, arm: i64) -> Answer<Group> {
    let sql = format!(
        "{GROUP} where l.presentation = (
             select lo.presentation from study_arm o join study so on so.id = o.study join lot lo on lo.id = so.lot
             where o.id = :arm)
         and a.condition = (select condition from study_arm where id = :arm)
         and a.orientation = (select orientation from study_arm where id = :arm)
         and coalesce(a.container_text, '') =
             (select coalesce(container_text, '') from study_arm where id = :arm)
         {GROUPED}"
    );
    reader.one("arm with this number", &sql, named_params! { ":arm": arm }, group)
}

/// Presentations with a study: id, code, words, number of lots on study.
pub fn presentations(reader: &Reader<'_>) -> Answer<Vec<(i64, String, String, i64)>> {
    reader.all(
        "select p.id, p.code, d.name || ', ' || p.strength || ', ' || p.pack, count(distinct l.id)
         from presentation p
         join product d on d.id = p.product
         join lot l on l.presentation = p.id
         join study st on st.lot = l.id
         group by p.id
         order by d.imported is not null, p.code",
        [],
        |row| Ok((row.get(0)?, row.get(1)?, row.get(2)?, row.get(3)?)),
    )
}

/// How many columns stand before those of a series point.
const OWN: usize = 12;

/// The select of a series point with the lot, formulation, method and containers before it.
fn select() -> String {
    let own = "select l.id, l.number, l.formulation_version, f.code || ' version ' || fv.number,
        st.programme = 'development' or exists (select 1 from rack_lot k where k.lot = l.id), 
        t.method_version, m.kind, r.id, r.version, a.id,
        (select group_concat(coalesce(v.container, 0) || ':' || v.value, ' ') from reading v
            where v.sample_test = t.id and v.field in ('value', 'inversions') and v.value is not null
            and v.qualifier = '=' and r.imported is null and r.component = ''
            and not exists (select 1 from reading later where later.supersedes = v.id)),
        p.age_months, s.id,";
    let tables = "from lot l
        join formulation_version fv on fv.id = l.formulation_version
        join formulation f on f.id = fv.formulation
        join study st on st.lot = l.id";
    let methods = "join sample_test t on t.sample = s.id
        join method_version mv on mv.id = t.method_version
        join method m on m.id = mv.method";
    SELECT.replacen("select s.id,", own, 1).replacen("from study st\n", &format!("{tables}\n"), 1).replacen(
        "join sample_test t on t.sample = s.id\n",
        &format!("{methods}\n"),
        1,
    )
}

fn record(row: &Row<'_>) -> rusqlite::Result<Record> {
    let (result, version): (Option<i64>, Option<i64>) = (row.get(7)?, row.get(8)?);
    let readings: Option<String> = row.get(10)?;
    Ok(Record {
        lot: row.get(0)?,
        lot_number: row.get(1)?,
        formulation_version: row.get(2)?,
        formulation: row.get(3)?,
        is_development: row.get(4)?,
        method_version: row.get(5)?,
        kind: row.get(6)?,
        result: result.zip(version),
        arm: row.get(9)?,
        planned_months: row.get(11)?,
        containers: containers(&readings.unwrap_or_default()),
        point: from_row_at(row, OWN)?,
    })
}

/// The mean of each container from "container:value" words.
fn containers(readings: &str) -> Vec<Decimal> {
    let mut found: Vec<(&str, Decimal, i64)> = Vec::new();
    for word in readings.split_whitespace() {
        let Some((container, value)) = word.split_once(':') else { continue };
        let Ok(value) = Decimal::from_str_exact(value) else { continue };
        match found.iter_mut().find(|(known, ..)| *known == container) {
            Some((_, sum, count)) => {
                *sum = sum.checked_add(value).unwrap_or(*sum);
                *count += 1;
            }
            None => found.push((container, value, 1)),
        }
    }
    found.into_iter().map(|(_, sum, count)| sum / Decimal::from(count)).collect()
}

/// So many lots of a presentation are looked at, the newest; pages say when there are more.
pub const NEWEST_LOTS: i64 = 60;

/// How many lots of a presentation are on study.
pub fn lots_on_study(reader: &Reader<'_>, presentation: i64) -> Answer<i64> {
    reader.one(
        "presentation with this number",
        "select count(*) from lot l
         where l.presentation = :presentation and exists (select 1 from study where lot = l.id)",
        named_params! { ":presentation": presentation },
        |row| row.get(0),
    )
}

const NEWEST: &str = "l.id in (
    select o.id from lot o where o.presentation = :presentation and exists (select 1 from study where lot = o.id)
    order by o.id desc limit 60)";

/// All records of one group, of every test, of the newest lots.
pub fn records(reader: &Reader<'_>, key: &GroupKey) -> Answer<Vec<Record>> {
    let sql = format!(
        "{} where {NEWEST} and a.condition = :condition and a.orientation = :orientation
         and coalesce(a.container_text, '') = :pack and {HAPPENED} order by l.number, t.id, r.component",
        select()
    );
    reader.all(
        &sql,
        named_params! {
            ":presentation": key.presentation,
            ":condition": key.condition,
            ":orientation": key.orientation,
            ":pack": key.pack,
        },
        record,
    )
}

/// All records of a presentation, of every group, of the newest lots.
pub fn records_of_presentation(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<Record>> {
    let sql = format!("{} where {NEWEST} and {HAPPENED} order by l.number, t.id, r.component", select());
    reader.all(&sql, named_params! { ":presentation": presentation }, record)
}

/// Which arm belongs to which group of a presentation: arm and the smallest arm of its group.
pub fn arms(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<(i64, i64)>> {
    reader.all(
        "select a.id, min(a.id) over (
             partition by a.condition, a.orientation, coalesce(a.container_text, ''))
         from lot l
         join study st on st.lot = l.id
         join study_arm a on a.study = st.id
         where l.presentation = :presentation",
        named_params! { ":presentation": presentation },
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}

/// A specification version that binds studies of a presentation: id, words, content.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Binding {
    pub id: i64,
    /// "SP-104 version 2".
    pub words: String,
    pub content: String,
}

/// The specification versions that studies of a presentation are bound to now, the newest first.
pub fn specifications(reader: &Reader<'_>, presentation: i64) -> Answer<Vec<Binding>> {
    reader.all(
        "select v.id, s.code || ' version ' || v.number, v.content
         from specification_version v
         join specification s on s.id = v.specification
         where v.id in (
             select coalesce((select m.specification_version from study_amendment m where m.study = st.id
                 order by m.id desc limit 1), st.specification_version)
             from lot l join study st on st.lot = l.id where l.presentation = :presentation)
         order by v.id desc",
        named_params! { ":presentation": presentation },
        |row| Ok(Binding { id: row.get(0)?, words: row.get(1)?, content: row.get(2)? }),
    )
}
