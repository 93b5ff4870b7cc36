//! What leaves a line per changed record: SQL functions and generated triggers.

use std::sync::Arc;
use std::sync::atomic::Ordering;

use rusqlite::Connection;
use rusqlite::functions::{Context, FunctionFlags};
use rusqlite::types::ValueRef;

use super::door::Current;
use super::trail::{UPDATABLE_TABLES, encode, trailed_tables};
use super::{Answer, Reader};
use crate::domain::digest::Encoder;

/// Registers what triggers and verification call.
pub(in crate::store) fn register_functions(connection: &Connection, current: &Arc<Current>) -> Answer<()> {
    let plain = FunctionFlags::SQLITE_UTF8 | FunctionFlags::SQLITE_INNOCUOUS;
    let pure = plain | FunctionFlags::SQLITE_DETERMINISTIC;
    let act = Arc::clone(current);
    connection.create_scalar_function("current_act", 0, plain, move |_| {
        match act.act.load(Ordering::SeqCst) {
            0 => Err(rusqlite::Error::UserFunctionError("records change only inside an act".into())),
            act => Ok(act),
        }
    })?;
    let line = Arc::clone(current);
    connection.create_scalar_function("next_line", 0, plain, move |_| {
        Ok(line.line.fetch_add(1, Ordering::SeqCst) + 1)
    })?;
    connection.create_scalar_function("row_digest", -1, pure, |context| Ok(row_digest(context).to_vec()))?;
    connection.create_scalar_function("changed_fields", -1, pure, |context| Ok(changed_fields(context)))?;
    super::find::register_function(connection)?;
    super::stock::register_function(connection)?;
    Ok(())
}

/// SHA-256 over (column, type, value) of the non-null columns sorted by name; arguments come in pairs.
fn row_digest(context: &Context<'_>) -> [u8; 32] {
    let mut columns: Vec<(&str, ValueRef<'_>)> = (0..context.len() / 2)
        .filter_map(|pair| {
            let name = context.get_raw(pair * 2).as_str().ok()?;
            Some((name, context.get_raw(pair * 2 + 1)))
        })
        .filter(|(_, value)| !matches!(value, ValueRef::Null))
        .collect();
    columns.sort_by_key(|(name, _)| *name);
    let mut encoder = Encoder::new();
    for (name, value) in columns {
        encoder.text(name);
        encode(&mut encoder, value);
    }
    encoder.digest()
}

/// JSON of the fields that differ; arguments come in threes: column, old, new. A hash is never written out.
fn changed_fields(context: &Context<'_>) -> String {
    let mut fields = serde_json::Map::new();
    for at in (0..context.len()).step_by(3) {
        let (old, new) = (context.get_raw(at + 1), context.get_raw(at + 2));
        if old == new {
            continue;
        }
        let name = context.get_raw(at).as_str().unwrap_or_default();
        let pair = if name.ends_with("_hash") || name.ends_with("_digest") {
            serde_json::json!(["kept from the trail", "kept from the trail"])
        } else {
            serde_json::json!([as_json(old), as_json(new)])
        };
        fields.insert(name.to_string(), pair);
    }
    serde_json::Value::Object(fields).to_string()
}

fn as_json(value: ValueRef<'_>) -> serde_json::Value {
    match value {
        ValueRef::Null => serde_json::Value::Null,
        ValueRef::Integer(number) => number.into(),
        ValueRef::Real(number) => number.into(),
        ValueRef::Text(bytes) => String::from_utf8_lossy(bytes).into(),
        ValueRef::Blob(bytes) => crate::domain::digest::hex(bytes).into(),
    }
}

pub(in crate::store) fn drop_triggers(connection: &Connection) -> Answer<()> {
    let names = Reader::over(connection).all(
        "select name from sqlite_schema where type = 'trigger' and name like 'trail\\_%' escape '\\'",
        [],
        |row| row.get::<_, String>(0),
    )?;
    for name in names {
        connection.execute_batch(&format!("drop trigger {name}"))?;
    }
    Ok(())
}

/// Makes the triggers of every trailed table. Names come from the schema itself, never from a person.
pub(in crate::store) fn make_triggers(connection: &Connection) -> Answer<()> {
    for (table, columns) in trailed_tables(connection)? {
        let pairs = columns.iter().map(|name| format!("'{name}', new.{name}")).collect::<Vec<_>>().join(", ");
        let threes = columns
            .iter()
            .map(|name| format!("'{name}', old.{name}, new.{name}"))
            .collect::<Vec<_>>()
            .join(", ");
        connection.execute_batch(&format!(
            "create trigger trail_insert_{table} after insert on {table} begin
                 insert into trail_change (act, line, record, row, kind, digest)
                 values (current_act(), next_line(), '{table}', new.id, 'insert', row_digest({pairs}));
             end;
             create trigger trail_delete_{table} before delete on {table} begin
                 select raise(abort, 'records are never deleted');
             end;"
        ))?;
        let update = if UPDATABLE_TABLES.contains(&table.as_str()) {
            format!(
                "create trigger trail_update_{table} after update on {table} begin
                     select case when new.id <> old.id then raise(abort, 'numbers never change') end;
                     insert into trail_change (act, line, record, row, kind, digest, changes)
                     values (current_act(), next_line(), '{table}', new.id, 'update', row_digest({pairs}),
                         changed_fields({threes}));
                 end;"
            )
        } else {
            format!(
                "create trigger trail_update_{table} before update on {table} begin
                     select raise(abort, 'observations are never changed; a correction is a new row');
                 end;"
            )
        };
        connection.execute_batch(&update)?;
    }
    Ok(())
}
