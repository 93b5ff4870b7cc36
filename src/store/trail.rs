//! The trail: one row per act, the chain over acts, and how a history is read.

use rusqlite::types::ValueRef;
use rusqlite::{Connection, Row, named_params};

use super::door::Change;
use super::{Answer, Reader};
use crate::domain::act::Act;
use crate::domain::digest::{Encoder, sha256};
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};

/// Tables without a trail of their own (decision B3); `tests/house` holds the list.
pub const TECHNICAL_TABLES: [&str; 19] = [
    "trail_act",
    "trail_change",
    "trail_seal",
    "trail_subject",
    "session",
    "sign_in_counter",
    "draft",
    "submission_key",
    "reading_log",
    "counter",
    "refinery_schema_history",
    "open_pull",
    "open_day",
    "open_line",
    "open_due",
    "arm_stock",
    "open_sample",
    "open_check",
    "open_batch",
];

/// Trailed tables whose rows may be updated: accounts and codes, and versions until they are signed.
/// Every other trailed table is insert-only.
pub const UPDATABLE_TABLES: [&str; 6] = [
    "account",
    "account_code",
    "formulation_version",
    "method_version",
    "specification_version",
    "protocol_version",
];

pub(in crate::store) fn encode(encoder: &mut Encoder, value: ValueRef<'_>) {
    match value {
        ValueRef::Null => encoder.null(),
        ValueRef::Integer(number) => encoder.integer(number),
        ValueRef::Real(number) => encoder.real(number),
        ValueRef::Text(bytes) => encoder.text(&String::from_utf8_lossy(bytes)),
        ValueRef::Blob(bytes) => encoder.blob(bytes),
    };
}

/// The trailed tables with their columns, in the order of their names.
pub(in crate::store) fn trailed_tables(connection: &Connection) -> Answer<Vec<(String, Vec<String>)>> {
    let reader = Reader::over(connection);
    let names = reader.all(
        "select name from sqlite_schema
         where type = 'table' and name not like 'sqlite\\_%' escape '\\'
         order by name",
        [],
        |row| row.get::<_, String>(0),
    )?;
    let mut tables = Vec::new();
    for name in names.into_iter().filter(|name| !TECHNICAL_TABLES.contains(&name.as_str())) {
        let columns = reader.all(
            "select name from pragma_table_info(:table) order by name",
            named_params! { ":table": name },
            |row| row.get::<_, String>(0),
        )?;
        tables.push((name, columns));
    }
    Ok(tables)
}

pub(in crate::store) fn next_act(reader: &Reader<'_>) -> Answer<i64> {
    reader.one("act", "select coalesce(max(id), 0) + 1 from trail_act", [], |row| row.get(0))
}

/// The row of the act being written, without its detail.
pub(in crate::store) fn insert_act(
    change: &Change<'_>,
    act: Act,
    role: Option<&str>,
    reason: &Reason,
    outcome: &str,
) -> Answer<()> {
    let actor = change.actor();
    change.insert(
        "insert into trail_act (id, at, offset_minutes, zone, account, user_name, full_name, role, act,
             reason, session, address, outcome)
         values (:id, :at, :offset, :zone, :account, :user_name, :full_name, :role, :act,
             :reason, :session, :address, :outcome)",
        named_params! {
            ":id": change.act(),
            ":at": actor.at.stored(),
            ":offset": actor.at.offset_minutes(),
            ":zone": actor.at.zone.name(),
            ":account": actor.account,
            ":user_name": actor.user_name,
            ":full_name": actor.full_name,
            ":role": role,
            ":act": act.code(),
            ":reason": reason.text(),
            ":session": actor.session,
            ":address": actor.address,
            ":outcome": outcome,
        },
    )?;
    Ok(())
}

/// What was done, known only when it is done; the row is closed by its seal.
pub(in crate::store) fn insert_detail(change: &Change<'_>, detail: Option<&str>) -> Answer<()> {
    let Some(detail) = detail else { return Ok(()) };
    change.execute(
        "update trail_act set detail = :detail where id = :act",
        named_params! { ":detail": detail, ":act": change.act() },
    )?;
    Ok(())
}

pub(in crate::store) fn concerns(change: &Change<'_>, subject: Subject) -> Answer<()> {
    change.execute(
        "insert into trail_subject (kind, subject, act)
         values (:kind, :subject, :act)
         on conflict do nothing",
        named_params! { ":kind": subject.kind.code(), ":subject": subject.id, ":act": change.act() },
    )?;
    Ok(())
}

/// The chain before its first entry: the digest of the word itself, the same for every site. The site's uuid
/// enters with the first act.
pub fn chain_start() -> [u8; 32] {
    sha256(b"supernate trail 1")
}

/// Closes the act: entry bytes chained to the seal before.
pub(in crate::store) fn seal(change: &Change<'_>) -> Answer<()> {
    let act = change.act();
    let before = seal_of(change, act - 1)?.unwrap_or_else(chain_start);
    let digest = link(&before, &entry_bytes(change, act)?);
    change.insert(
        "insert into trail_seal (act, digest) values (:act, :digest)",
        named_params! { ":act": act, ":digest": digest },
    )?;
    Ok(())
}

/// hᵢ = SHA-256(0x02 ‖ hᵢ₋₁ ‖ entryᵢ), decision B1.
pub(in crate::store) fn link(before: &[u8], entry: &[u8]) -> [u8; 32] {
    let mut bytes = Vec::with_capacity(33 + entry.len());
    bytes.push(2);
    bytes.extend_from_slice(before);
    bytes.extend_from_slice(entry);
    sha256(&bytes)
}

pub(in crate::store) fn seal_of(reader: &Reader<'_>, act: i64) -> Answer<Option<[u8; 32]>> {
    reader.maybe("select digest from trail_seal where act = :act", named_params! { ":act": act }, |row| {
        row.get(0)
    })
}

/// What of an act's row goes into its entry, in this order.
pub(in crate::store) const ACT_ENTRY: &str =
    "id, at, offset_minutes, zone, account, user_name, full_name, role, act, detail, reason, session,
    address, outcome";

/// What of a line goes into its entry, in this order.
pub(in crate::store) const LINE_ENTRY: &str = "line, record, row, kind, digest, changes";

/// The bytes of one chain entry: the act's row, then its lines in order.
pub(in crate::store) fn entry_bytes(reader: &Reader<'_>, act: i64) -> Answer<Vec<u8>> {
    let mut encoder = Encoder::new();
    reader.one(
        "act",
        &format!("select {ACT_ENTRY} from trail_act where id = :act"),
        named_params! { ":act": act },
        |row| encode_row(&mut encoder, row, 0, 14),
    )?;
    let lines = reader.all(
        &format!("select {LINE_ENTRY} from trail_change where act = :act order by line"),
        named_params! { ":act": act },
        |row| encode_row(&mut encoder, row, 0, 6),
    )?;
    encoder.integer(lines.len() as i64);
    Ok(encoder.bytes().to_vec())
}

/// Encodes the columns from one position up to, not including, another.
pub(in crate::store) fn encode_row(
    encoder: &mut Encoder,
    row: &Row<'_>,
    from: usize,
    to: usize,
) -> rusqlite::Result<()> {
    for column in from..to {
        encode(encoder, row.get_ref(column)?);
    }
    Ok(())
}

/// One act as a history shows it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ActLine {
    pub act: i64,
    /// As stored: UTC.
    pub at: String,
    pub user_name: String,
    pub full_name: String,
    pub role: Option<String>,
    pub code: String,
    pub detail: Option<String>,
    pub reason: Option<String>,
    pub outcome: String,
    pub digest: String,
}

const ACT_COLUMNS: &str =
    "a.id, a.at, a.user_name, a.full_name, a.role, a.act, a.detail, a.reason, a.outcome,
    lower(hex(s.digest))";

fn act_line(row: &Row<'_>) -> rusqlite::Result<ActLine> {
    Ok(ActLine {
        act: row.get(0)?,
        at: row.get(1)?,
        user_name: row.get(2)?,
        full_name: row.get(3)?,
        role: row.get(4)?,
        code: row.get(5)?,
        detail: row.get(6)?,
        reason: row.get(7)?,
        outcome: row.get(8)?,
        digest: row.get(9)?,
    })
}

/// What a record's page shows of its history: the newest acts, oldest of them first.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Recent {
    pub subject: Subject,
    pub lines: Vec<ActLine>,
    /// Older acts than these stand on the page of the record's whole history.
    pub has_older: bool,
}

/// The newest acts that a record's page shows; the rest stands on its history page.
pub const RECENT: i64 = 50;

/// The newest acts of one record, oldest of them first.
pub fn of_subject(reader: &Reader<'_>, subject: Subject) -> Answer<Recent> {
    let mut lines = of_subject_before(reader, subject, None, RECENT + 1)?;
    let has_older = lines.len() as i64 > RECENT;
    lines.truncate(RECENT as usize);
    lines.reverse();
    Ok(Recent { subject, lines, has_older })
}

/// The acts of one record before an act, newest first, at most `limit`: paging by key.
pub fn of_subject_before(
    reader: &Reader<'_>,
    subject: Subject,
    before: Option<i64>,
    limit: i64,
) -> Answer<Vec<ActLine>> {
    reader.all(
        &format!(
            "select {ACT_COLUMNS}
             from trail_subject t join trail_act a on a.id = t.act join trail_seal s on s.act = a.id
             where t.kind = :kind and t.subject = :subject and t.act < :before
             order by t.act desc
             limit :limit"
        ),
        named_params! {
            ":kind": subject.kind.code(),
            ":subject": subject.id,
            ":before": before.unwrap_or(i64::MAX),
            ":limit": limit,
        },
        act_line,
    )
}

/// How people call a record: its number or code, or where it has neither the number of its row.
pub fn name_of(reader: &Reader<'_>, subject: Subject) -> Answer<String> {
    let table = subject.kind.code();
    let column = match subject.kind {
        Kind::Lot | Kind::BatchRecord | Kind::Study | Kind::Sample | Kind::MaterialLot | Kind::Deviation => {
            "number"
        }
        Kind::Customer
        | Kind::Product
        | Kind::Presentation
        | Kind::Material
        | Kind::Formulation
        | Kind::Method
        | Kind::Specification
        | Kind::Instrument
        | Kind::Equipment
        | Kind::Condition
        | Kind::Chamber
        | Kind::Rack
        | Kind::Protocol => "code",
        Kind::Account => "full_name",
        _ => return Ok(subject.id.to_string()),
    };
    // Table and column come from the code, never from a person.
    let sql = format!("select cast({column} as text) from {table} where id = :id");
    reader.one("record with this number", &sql, named_params! { ":id": subject.id }, |row| row.get(0))
}

/// One act.
pub fn act(reader: &Reader<'_>, act: i64) -> Answer<ActLine> {
    reader.one(
        "act with this number",
        &format!("select {ACT_COLUMNS} from trail_act a join trail_seal s on s.act = a.id where a.id = :act"),
        named_params! { ":act": act },
        act_line,
    )
}

/// The newest acts before one, newest first: a page of the whole trail.
pub fn before(reader: &Reader<'_>, before: Option<i64>, limit: i64) -> Answer<Vec<ActLine>> {
    reader.all(
        &format!(
            "select {ACT_COLUMNS}
             from trail_act a join trail_seal s on s.act = a.id
             where a.id < coalesce(:before, 9223372036854775807)
             order by a.id desc
             limit :limit"
        ),
        named_params! { ":before": before, ":limit": limit },
        act_line,
    )
}

/// One changed record inside an act.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ChangeLine {
    pub record: String,
    pub row: i64,
    pub kind: String,
    pub digest: String,
    pub changes: Option<String>,
}

pub fn changes_of(reader: &Reader<'_>, act: i64) -> Answer<Vec<ChangeLine>> {
    reader.all(
        "select record, row, kind, lower(hex(digest)), changes
         from trail_change
         where act = :act
         order by line",
        named_params! { ":act": act },
        |row| {
            Ok(ChangeLine {
                record: row.get(0)?,
                row: row.get(1)?,
                kind: row.get(2)?,
                digest: row.get(3)?,
                changes: row.get(4)?,
            })
        },
    )
}

/// The instant of the newest act, to notice a clock that was set back.
pub fn newest_at(reader: &Reader<'_>) -> Answer<Option<String>> {
    reader.maybe("select at from trail_act where id = (select max(id) from trail_act)", [], |row| row.get(0))
}

/// The newest act and its seal: the head of the chain.
pub fn head(reader: &Reader<'_>) -> Answer<Option<(i64, String)>> {
    reader.maybe(
        "select act, lower(hex(digest)) from trail_seal where act = (select max(act) from trail_seal)",
        [],
        |row| Ok((row.get(0)?, row.get(1)?)),
    )
}
