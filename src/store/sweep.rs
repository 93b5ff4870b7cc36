//! Every result of every study in one pass, in the order of the rows: for computing a whole data set anew.

use super::{Answer, Reader};

/// Where a result belongs.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Place {
    pub arm: u32,
    /// Index into [`Ground::tests`].
    pub test: u16,
    /// Actual age in months where the pull has a day, else the planned one.
    pub age_months: f32,
}

/// An arm's lot and group: presentation, condition and orientation are one number.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct ArmPlace {
    pub lot: u32,
    pub group: u32,
}

/// What results are placed by: tables as large as the data set's rows, eight bytes or less a row.
pub struct Ground {
    pub tests: Vec<String>,
    pub arms: Vec<ArmPlace>,
    pub groups: usize,
    /// Sample and test of each `sample_test` row.
    asked: Vec<(u32, u16)>,
    /// Pull of each sample.
    pulls: Vec<u32>,
    /// Arm and age of each pull.
    ages: Vec<(u32, f32)>,
}

const ARMS: &str = "select a.id, st.lot, l.presentation, a.condition, a.orientation
    from study_arm a join study st on st.id = a.study join lot l on l.id = st.lot";
const PULLS: &str = "select p.id, p.study_arm, p.age_months, julianday(st.started_on)
    from pull p join study_arm a on a.id = p.study_arm join study st on st.id = a.study";
const EVENTS: &str = "select pull, julianday(happened_on) from pull_event where kind = 'pulled'";
const SAMPLES: &str = "select id, pull from sample";
const ASKED: &str = "select id, sample, test from sample_test";
const RESULTS: &str = "select sample_test, version, value from result";

/// Days of a month as ages count them.
const DAYS_A_MONTH: f64 = 30.4375;

fn at<T: Clone + Default>(list: &mut Vec<T>, id: i64) -> &mut T {
    let place = usize::try_from(id).unwrap_or_default();
    if list.len() <= place {
        list.resize(place + 1, T::default());
    }
    &mut list[place]
}

/// Loads what places a result. One pass over each table.
pub fn ground(reader: &Reader<'_>) -> Answer<Ground> {
    let mut ground = Ground {
        tests: Vec::new(),
        arms: Vec::new(),
        groups: 0,
        asked: Vec::new(),
        pulls: Vec::new(),
        ages: Vec::new(),
    };
    let mut groups: std::collections::HashMap<(i64, i64, String), u32> = std::collections::HashMap::new();
    reader.each(ARMS, [], |row| {
        let key = (row.get(2)?, row.get(3)?, row.get(4)?);
        let next = groups.len() as u32;
        let group = *groups.entry(key).or_insert(next);
        *at(&mut ground.arms, row.get(0)?) = ArmPlace { lot: row.get(1)?, group };
        Ok(())
    })?;
    ground.groups = groups.len();
    let mut zeros: Vec<f64> = Vec::new();
    reader.each(PULLS, [], |row| {
        let months: Option<i64> = row.get(2)?;
        *at(&mut ground.ages, row.get(0)?) = (row.get(1)?, months.unwrap_or_default() as f32);
        *at(&mut zeros, row.get(1)?) = row.get::<_, Option<f64>>(3)?.unwrap_or(f64::NAN);
        Ok(())
    })?;
    reader.each(EVENTS, [], |row| {
        let (arm, _) = *at(&mut ground.ages, row.get(0)?);
        let months = (row.get::<_, f64>(1)? - *at(&mut zeros, i64::from(arm))) / DAYS_A_MONTH;
        if months.is_finite() {
            at(&mut ground.ages, row.get(0)?).1 = months as f32;
        }
        Ok(())
    })?;
    reader.each(SAMPLES, [], |row| {
        *at(&mut ground.pulls, row.get(0)?) = row.get::<_, Option<u32>>(1)?.unwrap_or_default();
        Ok(())
    })?;
    asked(reader, &mut ground)?;
    Ok(ground)
}

fn asked(reader: &Reader<'_>, ground: &mut Ground) -> Answer<()> {
    reader.each(ASKED, [], |row| {
        let test = row.get_ref(2)?.as_str().unwrap_or_default();
        let known = ground.tests.iter().position(|one| one == test);
        let index = known.unwrap_or_else(|| {
            ground.tests.push(test.to_string());
            ground.tests.len() - 1
        });
        *at(&mut ground.asked, row.get(0)?) = (row.get(1)?, index as u16);
        Ok(())
    })
}

impl Ground {
    /// Where a `sample_test` row belongs; none for a sample without a pull.
    fn place(&self, sample_test: usize) -> Option<Place> {
        let (sample, test) = *self.asked.get(sample_test)?;
        let pull = *self.pulls.get(sample as usize)?;
        let (arm, age_months) = *self.ages.get(pull as usize).filter(|_| pull > 0)?;
        Some(Place { arm, test, age_months })
    }
}

/// Walks every exact result in the order of its row: place, version, and the value as its exact text. A later version
/// of the same test comes with its number, so that the one before can be taken out.
pub fn results(
    reader: &Reader<'_>,
    ground: &Ground,
    mut visit: impl FnMut(Place, i64, i64, &str),
) -> Answer<()> {
    reader.each(RESULTS, [], |row| {
        let sample_test: i64 = row.get(0)?;
        let place = usize::try_from(sample_test).ok().and_then(|at| ground.place(at));
        if let (Some(place), Ok(value)) = (place, row.get_ref(2)?.as_str()) {
            visit(place, sample_test, row.get(1)?, value);
        }
        Ok(())
    })
}

/// Steps through the same rows and columns and does nothing with them: what computing is held against. With `all` every
/// table that places a result, else the results alone. Answers with the number of rows.
pub fn scan(reader: &Reader<'_>, all: bool) -> Answer<u64> {
    let tables: &[&str] = if all { &[ARMS, PULLS, EVENTS, SAMPLES, ASKED, RESULTS] } else { &[RESULTS] };
    let mut rows = 0;
    for sql in tables {
        let columns = sql.split(" from ").next().map_or(1, |list| list.matches(',').count() + 1);
        reader.each(sql, [], |row| {
            for column in 0..columns {
                std::hint::black_box(row.get_ref(column)?);
            }
            rows += 1;
            Ok(())
        })?;
    }
    Ok(rows)
}
