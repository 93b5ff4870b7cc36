//! Containers on study and what became of each: the sample ledger.

use rusqlite::{Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::container::Event;

/// A container with its newest event.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Container {
    pub id: i64,
    pub study: i64,
    pub study_number: String,
    pub study_arm: i64,
    pub lot: i64,
    pub lot_number: String,
    pub condition_name: String,
    pub orientation: String,
    pub chamber_code: Option<String>,
    pub number: i64,
    pub label: String,
    pub purpose: String,
    /// The kind of its newest event; none: it stands in its chamber.
    pub event: Option<String>,
    pub event_pull: Option<String>,
    pub container_word: String,
}

const SELECT: &str = "select k.id, y.id, y.number, a.id, l.id, l.number, c.name, a.orientation,
        (select code from chamber where id = a.chamber), k.number, k.label, k.purpose,
        (select kind from container_event where container = k.id order by id desc limit 1),
        (select s.number from container_event e join sample s on s.pull = e.pull
         where e.container = k.id order by e.id desc limit 1),
        p.container_word
    from container k
    join study_arm a on a.id = k.study_arm
    join condition c on c.id = a.condition
    join study y on y.id = a.study
    join lot l on l.id = y.lot
    join presentation p on p.id = l.presentation";

fn from_row(row: &Row<'_>) -> rusqlite::Result<Container> {
    Ok(Container {
        id: row.get(0)?,
        study: row.get(1)?,
        study_number: row.get(2)?,
        study_arm: row.get(3)?,
        lot: row.get(4)?,
        lot_number: row.get(5)?,
        condition_name: row.get(6)?,
        orientation: row.get(7)?,
        chamber_code: row.get(8)?,
        number: row.get(9)?,
        label: row.get(10)?,
        purpose: row.get(11)?,
        event: row.get(12)?,
        event_pull: row.get(13)?,
        container_word: row.get(14)?,
    })
}

pub fn get(reader: &Reader<'_>, id: i64) -> Answer<Container> {
    let sql = format!("{SELECT} where k.id = :id");
    reader.one("container with this number", &sql, named_params! { ":id": id }, from_row)
}

/// The container with exactly this label.
pub fn by_label(reader: &Reader<'_>, label: &str) -> Answer<Option<Container>> {
    let sql = format!("{SELECT} where k.label = :label");
    reader.maybe(&sql, named_params! { ":label": label }, from_row)
}

/// All containers of a study, arm by arm.
pub fn of_study(reader: &Reader<'_>, study: i64) -> Answer<Vec<Container>> {
    let sql = format!("{SELECT} where a.study = :study order by a.position, k.number");
    reader.all(&sql, named_params! { ":study": study }, from_row)
}

/// All containers of one arm, by number.
pub fn of_arm(reader: &Reader<'_>, arm: i64) -> Answer<Vec<Container>> {
    let sql = format!("{SELECT} where k.study_arm = :arm order by k.number");
    reader.all(&sql, named_params! { ":arm": arm }, from_row)
}

/// A line of the ledger.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LedgerLine {
    pub act: i64,
    pub at: String,
    pub who: String,
    pub label: String,
    pub container: i64,
    pub kind: String,
    pub pull: Option<i64>,
    pub sample_number: Option<String>,
    pub witness: Option<String>,
    pub note: Option<String>,
    pub position: i64,
}

const LEDGER: &str = "select e.act, t.at, t.full_name, k.label, k.id, e.kind, e.pull,
        (select number from sample where pull = e.pull), (select full_name from account where id = e.witness),
        e.note, a.position
    from study_arm a
    join container k on k.study_arm = a.id
    join container_event e on e.container = k.id
    join trail_act t on t.id = e.act";

fn line_from_row(row: &Row<'_>) -> rusqlite::Result<LedgerLine> {
    Ok(LedgerLine {
        act: row.get(0)?,
        at: row.get(1)?,
        who: row.get(2)?,
        label: row.get(3)?,
        container: row.get(4)?,
        kind: row.get(5)?,
        pull: row.get(6)?,
        sample_number: row.get(7)?,
        witness: row.get(8)?,
        note: row.get(9)?,
        position: row.get(10)?,
    })
}

/// The ledger of a study, oldest first.
pub fn ledger(reader: &Reader<'_>, study: i64) -> Answer<Vec<LedgerLine>> {
    let sql = format!("{LEDGER} where a.study = :study order by e.id");
    reader.all(&sql, named_params! { ":study": study }, line_from_row)
}

/// What became of one container, oldest first.
pub fn events(reader: &Reader<'_>, container: i64) -> Answer<Vec<LedgerLine>> {
    let sql = format!("{LEDGER} where k.id = :container order by e.id");
    reader.all(&sql, named_params! { ":container": container }, line_from_row)
}

/// The containers taken for a pull, by label.
pub fn of_pull(reader: &Reader<'_>, pull: i64) -> Answer<Vec<LedgerLine>> {
    let sql = format!("{LEDGER} where e.pull = :pull order by e.id");
    reader.all(&sql, named_params! { ":pull": pull }, line_from_row)
}

pub fn insert_event(
    change: &Change<'_>,
    container: i64,
    event: Event,
    pull: Option<i64>,
    witness: Option<i64>,
    note: Option<&str>,
) -> Answer<i64> {
    change.insert(
        "insert into container_event (container, kind, pull, witness, note)
         values (:container, :kind, :pull, :witness, :note)",
        named_params! {
            ":container": container,
            ":kind": event.words(),
            ":pull": pull,
            ":witness": witness,
            ":note": note,
        },
    )
}
