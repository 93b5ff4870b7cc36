//! A sample as the bench sees it: label words, containers, tests with their methods, readings, losses.

use std::collections::HashMap;

use rusqlite::{Row, named_params};

use super::{Answer, Reader, reading, stage};
use crate::domain::failure::Failure;
use crate::domain::method::{MethodContent, TestKind};
use crate::domain::protocol::LimitsDo;
use crate::domain::reading::{BenchState, PullState, Reading};
use crate::domain::slot::{Container, Slot, slots};
use crate::domain::specification::SpecificationContent;
use crate::domain::stage::StageLoss;

/// A sample with all that its bench pages and rules ask.
#[derive(Clone, Debug)]
pub struct BenchSample {
    pub id: i64,
    pub number: String,
    pub purpose: String,
    pub lot: i64,
    pub lot_number: String,
    pub container_word: String,
    pub market: String,
    pub is_distributed: bool,
    pub limit_set: String,
    pub specification_version: Option<i64>,
    pub specification: Option<SpecificationContent>,
    pub pull: Option<BenchPull>,
    pub is_signed: bool,
    pub containers: Vec<Container>,
    pub tests: Vec<BenchTest>,
    pub losses: Vec<StageLoss>,
    pub readings: Vec<(i64, Reading)>,
}

/// The pull of a sample.
#[derive(Clone, Debug)]
pub struct BenchPull {
    pub id: i64,
    pub study: i64,
    pub study_number: String,
    pub condition: String,
    pub orientation: String,
    pub limits_do: Option<LimitsDo>,
    pub is_labelled: bool,
    pub age: String,
    pub latest_on: Option<String>,
    pub state: PullState,
    pub pulled_on: Option<String>,
    pub study_arm: i64,
}

/// A test of a sample.
#[derive(Clone, Debug)]
pub struct BenchTest {
    pub id: i64,
    pub test: String,
    pub title: String,
    pub method_version: i64,
    pub method: i64,
    pub method_code: String,
    pub kind: TestKind,
    pub content: MethodContent,
    pub latest_version: Option<i64>,
    pub is_out: bool,
    /// `checked` or `sent back`, of the latest version.
    pub check: Option<String>,
    pub check_why: Option<String>,
}

impl BenchTest {
    /// Its result stands: completed and not sent back since.
    pub fn is_complete(&self) -> bool {
        self.latest_version.is_some() && self.check.as_deref() != Some("sent back")
    }
}

impl BenchSample {
    pub fn test(&self, id: i64) -> Option<&BenchTest> {
        self.tests.iter().find(|test| test.id == id)
    }

    /// All rows of one test, oldest first.
    pub fn readings_of(&self, test: i64) -> Vec<Reading> {
        self.readings.iter().filter(|(of, _)| *of == test).map(|(_, reading)| reading.clone()).collect()
    }

    pub fn slots(&self, test: &BenchTest) -> Vec<Slot> {
        slots(&test.title, &test.content, &self.containers, &self.container_word)
    }

    pub fn state(&self, test: &BenchTest) -> BenchState {
        BenchState {
            pull: self.pull.as_ref().map_or(PullState::NoPull, |pull| pull.state),
            is_signed: self.is_signed,
            is_complete: test.is_complete(),
        }
    }

    pub fn pull_state(&self) -> PullState {
        self.pull.as_ref().map_or(PullState::NoPull, |pull| pull.state)
    }

    /// The limits of a test in the specification the sample is judged by.
    pub fn limits(&self, test: &str) -> Option<&crate::domain::specification::TestLimits> {
        self.specification.as_ref()?.of(test)
    }
}

const SELECT: &str = "select s.id, s.number, s.purpose, s.lot, l.number, n.container_word, n.market,
        exists (select 1 from lot_distribution d where d.lot = s.lot),
        s.limit_set, s.specification_version, v.content,
        exists (select 1 from signature g
            where g.kind = 'sample' and g.subject = s.id and g.meaning = 'review'),
        p.id, y.id, y.number, c.name, a.orientation, a.limits_do, a.is_labelled_condition, p.age_text,
        p.latest_on,
        (select e.kind from pull_event e where e.pull = p.id order by e.id desc limit 1),
        (select e.happened_on from pull_event e where e.pull = p.id order by e.id desc limit 1),
        a.id
    from sample s
    join lot l on l.id = s.lot
    join presentation n on n.id = l.presentation
    left join specification_version v on v.id = s.specification_version
    left join pull p on p.id = s.pull
    left join study_arm a on a.id = p.study_arm
    left join study y on y.id = a.study
    left join condition c on c.id = a.condition";

fn from_row(row: &Row<'_>) -> rusqlite::Result<(BenchSample, Option<String>)> {
    let content: Option<String> = row.get(10)?;
    let sample = BenchSample {
        id: row.get(0)?,
        number: row.get(1)?,
        purpose: row.get(2)?,
        lot: row.get(3)?,
        lot_number: row.get(4)?,
        container_word: row.get(5)?,
        market: row.get(6)?,
        is_distributed: row.get(7)?,
        limit_set: row.get(8)?,
        specification_version: row.get(9)?,
        specification: None,
        pull: pull_from_row(row)?,
        is_signed: row.get(11)?,
        containers: Vec::new(),
        tests: Vec::new(),
        losses: Vec::new(),
        readings: Vec::new(),
    };
    Ok((sample, content))
}

fn pull_from_row(row: &Row<'_>) -> rusqlite::Result<Option<BenchPull>> {
    let Some(id) = row.get::<_, Option<i64>>(12)? else { return Ok(None) };
    let event: Option<String> = row.get(21)?;
    Ok(Some(BenchPull {
        id,
        study: row.get(13)?,
        study_number: row.get(14)?,
        condition: row.get(15)?,
        orientation: row.get(16)?,
        limits_do: LimitsDo::from_words(&row.get::<_, String>(17)?),
        is_labelled: row.get(18)?,
        age: row.get(19)?,
        latest_on: row.get(20)?,
        state: PullState::from_event(event.as_deref()),
        pulled_on: row.get(22)?,
        study_arm: row.get(23)?,
    }))
}

/// A sample with its tests, containers, readings and losses.
pub fn sample(reader: &Reader<'_>, id: i64) -> Answer<BenchSample> {
    samples(reader, &[id])?.pop().ok_or_else(|| Failure::missing("sample with this number"))
}

/// Samples with their tests, containers, readings and losses, in the order asked for; five queries, however many
/// they are. A number that is of no sample is left out.
pub fn samples(reader: &Reader<'_>, ids: &[i64]) -> Answer<Vec<BenchSample>> {
    let asked = serde_json::to_string(ids).map_err(Failure::fault)?;
    let rows = reader.all(
        &format!("{SELECT} where s.id in (select value from json_each(:samples))"),
        named_params! { ":samples": asked },
        from_row,
    )?;
    let mut samples = Vec::with_capacity(rows.len());
    for (mut sample, content) in rows {
        let content = content.map(|content| serde_json::from_str(&content)).transpose();
        sample.specification = content.map_err(Failure::fault)?;
        samples.push(sample);
    }
    samples.sort_by_key(|sample| ids.iter().position(|id| *id == sample.id));
    let place: HashMap<i64, usize> = samples.iter().enumerate().map(|(at, sample)| (sample.id, at)).collect();
    let at = |id: i64| place.get(&id).copied();
    for (id, container) in containers(reader, &asked)? {
        if let Some(at) = at(id) {
            samples[at].containers.push(container);
        }
    }
    for (id, test) in tests(reader, &asked)? {
        if let Some(at) = at(id) {
            samples[at].tests.push(test);
        }
    }
    for (id, loss) in stage::losses_of(reader, &asked)? {
        if let Some(at) = at(id) {
            samples[at].losses.push(loss);
        }
    }
    for (id, test, reading) in reading::of_samples(reader, &asked)? {
        if let Some(at) = at(id) {
            samples[at].readings.push((test, reading));
        }
    }
    Ok(samples)
}

/// The sample of a test.
pub fn of_test(reader: &Reader<'_>, sample_test: i64) -> Answer<BenchSample> {
    let id = reader.one(
        "test with this number",
        "select sample from sample_test where id = :id",
        named_params! { ":id": sample_test },
        |row| row.get(0),
    )?;
    sample(reader, id)
}

/// The containers taken for the pulls of samples, by number.
fn containers(reader: &Reader<'_>, samples: &str) -> Answer<Vec<(i64, Container)>> {
    reader.all(
        "select distinct s.id, c.id, c.label, c.number
         from json_each(:samples) j
         join sample s on s.id = j.value
         join container_event e on e.pull = s.pull and e.kind in ('pulled', 'partial pull', 're-pull')
         join container c on c.id = e.container
         order by c.number",
        named_params! { ":samples": samples },
        |row| Ok((row.get(0)?, Container { id: row.get(1)?, label: row.get(2)? })),
    )
}

fn tests(reader: &Reader<'_>, samples: &str) -> Answer<Vec<(i64, BenchTest)>> {
    let rows = reader.all(
        "select t.id, t.test, t.title, t.method_version, m.id, m.code, m.kind, v.content,
             (select max(r.version) from result r where r.sample_test = t.id),
             exists (select 1 from result r where r.sample_test = t.id
                 and r.verdict = 'out of specification'
                 and r.version = (select max(version) from result where sample_test = t.id)),
             (select k.verdict from result_check k where k.sample_test = t.id
                 and k.version = (select max(version) from result where sample_test = t.id)
                 order by k.id desc limit 1),
             (select k.why from result_check k where k.sample_test = t.id
                 and k.version = (select max(version) from result where sample_test = t.id)
                 order by k.id desc limit 1),
             t.sample
         from sample_test t
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         where t.sample in (select value from json_each(:samples))
         order by t.position",
        named_params! { ":samples": samples },
        |row| {
            let content = (row.get::<_, String>(6)?, row.get::<_, String>(7)?);
            Ok((row.get::<_, i64>(12)?, test_from_row(row)?, content))
        },
    )?;
    let test = |(sample, test, (kind, content)): (i64, Row0, (String, String))| {
        Ok((sample, read_test(test, &kind, &content)?))
    };
    rows.into_iter().map(test).collect()
}

/// A test before its method is read.
type Row0 = (i64, String, String, i64, i64, String, Standing);

struct Standing {
    latest_version: Option<i64>,
    is_out: bool,
    check: Option<String>,
    check_why: Option<String>,
}

fn test_from_row(row: &Row<'_>) -> rusqlite::Result<Row0> {
    let standing = Standing {
        latest_version: row.get(8)?,
        is_out: row.get(9)?,
        check: row.get(10)?,
        check_why: row.get(11)?,
    };
    Ok((row.get(0)?, row.get(1)?, row.get(2)?, row.get(3)?, row.get(4)?, row.get(5)?, standing))
}

fn read_test(row: Row0, kind: &str, content: &str) -> Answer<BenchTest> {
    let (id, test, title, method_version, method, method_code, standing) = row;
    let kind = TestKind::from_code(kind).unwrap_or(TestKind::Numeric);
    let content: MethodContent = serde_json::from_str(content).map_err(Failure::fault)?;
    let Standing { latest_version, is_out, check, check_why } = standing;
    Ok(BenchTest {
        id,
        test,
        title,
        method_version,
        method,
        method_code,
        kind,
        content,
        latest_version,
        is_out,
        check,
        check_why,
    })
}
