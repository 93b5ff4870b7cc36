//! Bringing the schema up to date: online backup, migrations, foreign key check, fresh triggers, one act.

use std::path::{Path, PathBuf};

use rusqlite::Connection;
use rusqlite::backup::Backup;

use super::door::Db;
use super::{Answer, Reader, trigger};
use crate::domain::act::Act;
use crate::domain::actor::Actor;
use crate::domain::failure::Failure;
use crate::domain::reason::Reason;

mod embedded {
    refinery::embed_migrations!("migrations");
}

/// Which migrations ran, for the trail. `None` where the schema was already current.
pub(in crate::store) fn bring_up_to_date(connection: &mut Connection, path: &Path) -> Answer<Option<String>> {
    let runner = embedded::migrations::runner();
    let newest = runner.get_migrations().iter().map(|migration| i64::from(migration.version())).max();
    let have = applied(connection)?;
    if have > newest {
        return Err(Failure::Held(
            "The data folder was written by a newer version of the program. Start that version.".to_string(),
        ));
    }
    if have == newest {
        return Ok(None);
    }
    if have.is_some() {
        copy_online(connection, &backup_name(path, have))?;
    }
    connection.execute_batch("pragma foreign_keys = off")?;
    trigger::drop_triggers(connection)?;
    let report = runner.set_abort_divergent(true).run(connection).map_err(Failure::fault)?;
    let broken =
        Reader::over(connection).all("pragma foreign_key_check", [], |row| row.get::<_, String>(0))?;
    if let Some(table) = broken.first() {
        return Err(Failure::Held(format!("After the migration, {table} has a row that points nowhere.")));
    }
    trigger::make_triggers(connection)?;
    connection.execute_batch("pragma foreign_keys = on")?;
    let names: Vec<String> = report
        .applied_migrations()
        .iter()
        .map(|done| format!("V{:02} {}", done.version(), done.name()))
        .collect();
    Ok(Some(names.join(", ")))
}

/// The act that says the schema changed. The system accounts come with the very first one.
pub(in crate::store) fn record(db: &Db, console: &Actor, report: &str) -> Answer<()> {
    db.change(console, Act::ChangeSchema, &Reason::none(), |change| {
        super::account::ensure_system_accounts(change)?;
        change.tell(report);
        Ok(())
    })
}

fn applied(connection: &Connection) -> Answer<Option<i64>> {
    let reader = Reader::over(connection);
    if !reader.exists("select 1 from sqlite_schema where name = 'refinery_schema_history'", [])? {
        return Ok(None);
    }
    reader.one("schema version", "select max(version) from refinery_schema_history", [], |row| row.get(0))
}

fn backup_name(path: &Path, version: Option<i64>) -> PathBuf {
    path.with_extension(format!("before-V{:02}.sqlite", version.unwrap_or_default() + 1))
}

/// Copies a database by the online backup interface, checks the copy and syncs it to disk.
pub(in crate::store) fn copy_online(source: &Connection, to: &Path) -> Answer<()> {
    let unfinished = to.with_extension("unfinished");
    let mut target = Connection::open(&unfinished)?;
    Backup::new(source, &mut target)?.run_to_completion(1000, std::time::Duration::from_millis(1), None)?;
    let verdict: String = target.query_row("pragma integrity_check", [], |row| row.get(0))?;
    if verdict != "ok" {
        return Err(Failure::Held(format!("The copy {} is damaged: {verdict}", to.display())));
    }
    target.pragma_update(None, "journal_mode", "delete")?;
    target.close().map_err(|(_, error)| error)?;
    std::fs::File::open(&unfinished)?.sync_all()?;
    std::fs::rename(&unfinished, to)?;
    if let Some(folder) = to.parent().filter(|folder| !folder.as_os_str().is_empty()) {
        std::fs::File::open(folder)?.sync_all()?;
    }
    Ok(())
}
