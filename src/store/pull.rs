//! Pulls with everything that a list or a page shows of them.

use chrono::NaiveDate;
use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Day, Reader};
use crate::domain::pull::{Event, Progress, PullFacts};

/// A pull as lists and pages show it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pull {
    pub id: i64,
    pub sample: i64,
    /// Of the pull and of its sample: `ST-031-P07`.
    pub number: String,
    pub study: i64,
    pub study_number: String,
    pub study_arm: i64,
    pub arm_position: i64,
    pub lot: i64,
    pub lot_number: String,
    pub product_words: String,
    pub container_word: String,
    pub condition_name: String,
    pub orientation: String,
    pub chamber_code: Option<String>,
    pub chamber_location: Option<String>,
    pub age_text: String,
    pub containers_taken: i64,
    /// Containers of the arm that still stand in the chamber.
    pub containers_left: i64,
    pub assigned: Option<i64>,
    pub assigned_name: Option<String>,
    /// Hands-on minutes of its tests, from their methods.
    pub minutes: u32,
    pub test_within_days: Option<i64>,
    pub uuid: Vec<u8>,
    pub facts: PullFacts,
}

/// All columns of [`Pull`] over a choice of pulls. What the methods say is read once for all rows; a test counts
/// as checked when its newest result is, or when its method asks for no check; a pull counts as signed when
/// nothing was recorded after the reviewer's signature. `cross join` keeps the order of the tables, so that the
/// few chosen pulls are walked and never all samples. Of a pull to which nothing has happened yet nothing can have
/// been read: its tests are only counted.
fn select(choice: &str, order: &str) -> String {
    format!("with chosen (pull) as materialized ({choice}), {PROGRESS} {COLUMNS} {order}")
}

const PROGRESS: &str = "asked as materialized (
        select id, json_extract(content, '$.hands_on_minutes') as minutes,
            json_extract(content, '$.needs_check') as needs_check
        from method_version),
    asked_test as materialized (
        select s.pull, t.id, m.minutes, m.needs_check,
            (select max(version) from result where sample_test = t.id) as version
        from chosen
        cross join sample s on s.pull = chosen.pull
        cross join sample_test t on t.sample = s.id
        cross join asked m on m.id = t.method_version
        where exists (select 1 from pull_event where pull = chosen.pull)),
    known_test as (
        select pull, id, minutes, version, needs_check,
            exists (select 1 from reading where sample_test = asked_test.id) as started,
            (select verdict from result_check where sample_test = asked_test.id and version = asked_test.version
             order by id desc limit 1) as checking,
            exists (select 1 from result where sample_test = asked_test.id and version = asked_test.version
                and verdict = 'out of specification') as is_out,
            max(coalesce((select max(act) from result where sample_test = asked_test.id), 0),
                coalesce((select max(act) from reading where sample_test = asked_test.id), 0)) as newest
        from asked_test),
    progress as materialized (
        select pull, count(*) as tests, sum(minutes) as minutes, sum(started) as started,
            sum(version is not null and coalesce(checking, '') <> 'sent back') as complete,
            sum(version is not null and (coalesce(checking, '') = 'checked'
                or (checking is null and needs_check = 0))) as checked,
            sum(coalesce(checking, '') = 'sent back') as sent_back, sum(is_out) as is_out,
            max(newest) as newest
        from known_test
        group by pull)";

const COLUMNS: &str = "select p.id, s.id, s.number, y.id, y.number, a.id, a.position, l.id, l.number,
        d.name || ', ' || n.pack, n.container_word, c.name, a.orientation, h.code, h.location, p.age_text,
        (select count(*) from container_event where pull = p.id),
        (select count(*) from container k where k.study_arm = a.id
             and not exists (select 1 from container_event where container = k.id)),
        g.account, (select full_name from account where id = g.account),
        coalesce(w.minutes, (select minutes from open_pull where pull = p.id), 0), p.test_within_days,
        p.imported is not null, e.kind, e.happened_on,
        y.started_on, p.due_on, p.earliest_on, p.latest_on, p.is_last, p.containers_needed,
        coalesce(w.tests, (select count(*) from sample_test where sample = s.id)),
        coalesce(w.started, 0), coalesce(w.complete, 0), coalesce(w.checked, 0),
        max(coalesce(w.sent_back, 0),
            coalesce(v.decision = 'send back' and v.act > coalesce(w.newest, 0), 0)),
        coalesce(w.is_out, 0),
        coalesce((select max(act) from signature
            where kind = 'sample' and subject = s.id and meaning = 'review'), -1) > coalesce(w.newest, 0),
        p.uuid
    from chosen
    cross join pull p on p.id = chosen.pull
    join study_arm a on a.id = p.study_arm
    join condition c on c.id = a.condition
    left join chamber h on h.id = a.chamber
    join study y on y.id = a.study
    join lot l on l.id = y.lot
    join presentation n on n.id = l.presentation
    join product d on d.id = n.product
    join sample s on s.pull = p.id
    left join pull_event e on e.id = (select max(id) from pull_event where pull = p.id)
    left join pull_assignment g on g.id = (select max(id) from pull_assignment where pull = p.id)
    left join review_decision v on v.id = (select max(id) from review_decision where sample = s.id)
    left join progress w on w.pull = p.id";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Pull> {
    Ok(Pull {
        id: row.get(0)?,
        sample: row.get(1)?,
        number: row.get(2)?,
        study: row.get(3)?,
        study_number: row.get(4)?,
        study_arm: row.get(5)?,
        arm_position: row.get(6)?,
        lot: row.get(7)?,
        lot_number: row.get(8)?,
        product_words: row.get(9)?,
        container_word: row.get(10)?,
        condition_name: row.get(11)?,
        orientation: row.get(12)?,
        chamber_code: row.get(13)?,
        chamber_location: row.get(14)?,
        age_text: row.get(15)?,
        containers_taken: row.get(16)?,
        containers_left: row.get(17)?,
        assigned: row.get(18)?,
        assigned_name: row.get(19)?,
        minutes: row.get(20)?,
        test_within_days: row.get(21)?,
        facts: facts_from_row(row)?,
        uuid: row.get(38)?,
    })
}

fn facts_from_row(row: &Row<'_>) -> rusqlite::Result<PullFacts> {
    let day = |at: usize| Ok::<_, rusqlite::Error>(row.get::<_, Option<Day>>(at)?.map(|day| day.0));
    let count = |at: usize| Ok::<_, rusqlite::Error>(usize::try_from(row.get::<_, i64>(at)?).unwrap_or(0));
    let event: Option<String> = row.get(23)?;
    Ok(PullFacts {
        is_imported: row.get(22)?,
        event: event.as_deref().and_then(Event::from_words),
        happened_on: day(24)?,
        started_on: day(25)?,
        due_on: day(26)?,
        earliest_on: day(27)?,
        latest_on: day(28)?,
        is_last: row.get(29)?,
        containers_needed: count(30)?,
        progress: Progress {
            tests: count(31)?,
            started: count(32)?,
            complete: count(33)?,
            checked: count(34)?,
            sent_back: count(35)?,
            out_of_specification: count(36)?,
        },
        is_signed: row.get(37)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Pull> {
    let params = named_params! { ":id": id };
    reader.one("pull with this number", &select("select :id", ""), params, from_row)
}

/// What the rules of a pull ask.
pub fn facts(reader: &Reader<'_>, id: i64) -> Answer<PullFacts> {
    Ok(get(reader, id)?.facts)
}

/// All pulls of a study, arm by arm, by age.
pub fn of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<Pull>> {
    let choice = "select p.id from study_arm a join pull p on p.study_arm = a.id where a.study = :study";
    let order = "order by a.position, coalesce(p.due_on, ''), p.age_months, p.age_days, p.id";
    reader.all(&select(choice, order), named_params! { ":study": study }, from_row)
}

pub fn insert_event(
    change: &Change<'_>,
    pull: i64,
    event: Event,
    happened_on: NaiveDate,
    identity_by: Option<&str>,
    note: Option<&str>,
) -> Answer<i64> {
    change.insert(
        "insert into pull_event (pull, kind, happened_on, identity_by, note)
         values (:pull, :kind, :happened_on, :identity_by, :note)",
        named_params! {
            ":pull": pull,
            ":kind": event.words(),
            ":happened_on": Day(happened_on),
            ":identity_by": identity_by,
            ":note": note,
        },
    )
}

pub fn insert_assignment(change: &Change<'_>, pull: i64, account: i64) -> Answer<i64> {
    change.insert(
        "insert into pull_assignment (pull, account) values (:pull, :account)",
        named_params! { ":pull": pull, ":account": account },
    )
}

/// A test asked of a pull, with its method.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TestLine {
    pub id: i64,
    pub title: String,
    pub method_words: String,
    pub method_version: i64,
    pub minutes: u32,
    pub readings: i64,
    pub shown: Option<String>,
    pub unit: Option<String>,
    pub verdict: Option<String>,
}

/// The tests of a sample in bench order, with the newest result of each where there is one.
pub fn tests(reader: &Reader<'_>, sample: i64) -> Answer<Vec<TestLine>> {
    reader.all(
        "select t.id, t.title, m.code || ' version ' || v.number, v.id,
             coalesce(json_extract(v.content, '$.hands_on_minutes'), 0),
             (select count(*) from reading where sample_test = t.id), r.shown, r.unit, r.verdict
         from sample_test t
         join method_version v on v.id = t.method_version
         join method m on m.id = v.method
         left join result r on r.id = (
             select id from result where sample_test = t.id order by version desc, component limit 1)
         where t.sample = :sample
         order by t.position",
        named_params! { ":sample": sample },
        |row| {
            Ok(TestLine {
                id: row.get(0)?,
                title: row.get(1)?,
                method_words: row.get(2)?,
                method_version: row.get(3)?,
                minutes: row.get(4)?,
                readings: row.get(5)?,
                shown: row.get(6)?,
                unit: row.get(7)?,
                verdict: row.get(8)?,
            })
        },
    )
}
