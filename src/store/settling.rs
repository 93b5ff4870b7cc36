//! The readings behind settling and flow curves of a lot.

use rusqlite::{Row, named_params};
use rust_decimal::Decimal;

use super::{Answer, Exact, Reader};
use crate::domain::flow::SpeedReading;
use crate::domain::settling::Volume;

const READINGS: &str = "
    from study st
    join study_arm a on a.study = st.id
    join pull p on p.study_arm = a.id
    join sample s on s.pull = p.id
    join sample_test t on t.sample = s.id
    join reading r on r.sample_test = t.id
    where st.lot = :lot and r.value is not null
    and not exists (select 1 from reading later where later.supersedes = r.id)";

/// Every volume read in the cylinders of a lot, on its studies.
pub fn volumes(reader: &Reader<'_>, lot: i64) -> Answer<Vec<Volume>> {
    let sql = format!(
        "select a.id, s.id, p.age_text, coalesce(p.age_months * 1.0, p.age_days / 30.4375, 0),
             coalesce(r.container, 0), r.replicate, r.field, r.value
         {READINGS} and (r.field = 'total_ml' or r.field like 'sediment_ml@%') order by r.id"
    );
    reader.all(&sql, named_params! { ":lot": lot }, volume)
}

fn volume(row: &Row<'_>) -> rusqlite::Result<Volume> {
    let field: String = row.get(6)?;
    let months: f64 = row.get(3)?;
    Ok(Volume {
        arm: row.get(0)?,
        sample: row.get(1)?,
        age: row.get(2)?,
        age_months: Decimal::try_from(months).unwrap_or_default(),
        cylinder: (row.get(4)?, row.get(5)?),
        minute: field.strip_prefix("sediment_ml@").and_then(|minute| minute.parse().ok()),
        ml: row.get::<_, Exact>(7)?.0,
    })
}

/// Every viscosity of a lot that states its speed and spindle, on its studies.
pub fn speeds(reader: &Reader<'_>, lot: i64) -> Answer<Vec<SpeedReading>> {
    let beside = |field: &str| {
        format!(
            "(select b.typed from reading b where b.sample_test = r.sample_test and b.replicate = r.replicate
                 and b.container is r.container and b.field = '{field}'
                 and not exists (select 1 from reading later where later.supersedes = b.id)
                 order by b.id desc limit 1)"
        )
    };
    let sql = format!(
        "select a.id, s.id, p.age_text, {}, {}, r.value, {}
         {READINGS} and r.field = 'value' and r.qualifier = '='
         and exists (select 1 from reading x where x.sample_test = r.sample_test and x.field = 'speed_rpm')
         order by r.id",
        beside("spindle"),
        beside("speed_rpm"),
        beside("torque_percent")
    );
    Ok(reader.all(&sql, named_params! { ":lot": lot }, speed)?.into_iter().flatten().collect())
}

/// None where the speed is not a number.
fn speed(row: &Row<'_>) -> rusqlite::Result<Option<SpeedReading>> {
    let number = |text: Option<String>| text.and_then(|text| Decimal::from_str_exact(text.trim()).ok());
    let Some(speed_rpm) = number(row.get(4)?) else { return Ok(None) };
    Ok(Some(SpeedReading {
        arm: row.get(0)?,
        sample: row.get(1)?,
        age: row.get(2)?,
        spindle: row.get::<_, Option<String>>(3)?.unwrap_or_default(),
        speed_rpm,
        viscosity_mpa_s: row.get::<_, Exact>(5)?.0,
        torque_percent: number(row.get(6)?),
    }))
}
