//! The one door for every write: authority, trail, body and seal in one transaction.

use std::cell::RefCell;
use std::ops::Deref;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicI64, AtomicU64, Ordering};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use rusqlite::config::DbConfig;
use rusqlite::{Connection, OpenFlags, Params};

use super::{Answer, Reader, migrate, submission, trail, trigger};
use crate::domain::act::{Act, Allowed};
use crate::domain::actor::Actor;
use crate::domain::failure::{Failure, OwnWork};
use crate::domain::reason::Reason;
use crate::domain::subject::{Kind, Subject};

/// SQLite older than this can corrupt a WAL database with two connections (fixed in 3.51.3).
const OLDEST_SQLITE: i32 = 3_051_003;
/// How many read-only connections wait for use; more are opened when needed and closed after.
const KEPT_READERS: usize = 4;

/// The act that is being written, as the functions in the triggers see it. Zero: no act, writes fail.
#[derive(Default)]
pub(in crate::store) struct Current {
    pub act: AtomicI64,
    pub line: AtomicI64,
}

/// The database of one data folder.
pub struct Db {
    path: PathBuf,
    writer: Mutex<Connection>,
    readers: Mutex<Vec<Connection>>,
    current: Arc<Current>,
    generation: AtomicU64,
}

/// How carefully commits are kept: `Full` syncs each; `Off` only while a demo folder is being made.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Durability {
    Full,
    Off,
}

/// A write transaction inside an act. Reads too.
pub struct Change<'a> {
    reader: Reader<'a>,
    actor: &'a Actor,
    act: i64,
    detail: Option<String>,
    /// The records it concerns so far: a refused attempt on own work is listed there as well.
    concerned: RefCell<Vec<Subject>>,
}

impl<'a> Deref for Change<'a> {
    type Target = Reader<'a>;
    fn deref(&self) -> &Reader<'a> {
        &self.reader
    }
}

impl Change<'_> {
    /// Who is acting.
    pub fn actor(&self) -> &Actor {
        self.actor
    }

    /// The number of the act being written.
    pub fn act(&self) -> i64 {
        self.act
    }

    /// Says in the history what was done, in a sentence without the actor.
    pub fn tell(&mut self, detail: impl Into<String>) {
        self.detail = Some(detail.into());
    }

    /// Lists this act in the history of a record.
    pub fn concerns(&self, kind: Kind, id: i64) -> Answer<()> {
        self.concerned.borrow_mut().push(Subject::new(kind, id));
        trail::concerns(self, Subject::new(kind, id))
    }

    pub(in crate::store) fn execute(&self, sql: &str, params: impl Params) -> Answer<usize> {
        Ok(self.connection().prepare_cached(sql)?.execute(params)?)
    }

    /// Inserts one row and answers with its number.
    pub(in crate::store) fn insert(&self, sql: &str, params: impl Params) -> Answer<i64> {
        Ok(self.connection().prepare_cached(sql)?.insert(params)?)
    }
}

impl Db {
    /// Opens the database file, makes or migrates its schema, and regenerates the trail's triggers.
    ///
    /// Refuses a SQLite library older than 3.51.3 and a schema newer than the program.
    pub fn open(path: &Path, console: &Actor, durability: Durability) -> Answer<Db> {
        if rusqlite::version_number() < OLDEST_SQLITE {
            return Err(Failure::Held(format!(
                "SQLite {} is older than 3.51.3, which can damage the file. The program does not start.",
                rusqlite::version()
            )));
        }
        let current = Arc::new(Current::default());
        let mut connection = Connection::open(path)?;
        prepare(&connection, durability)?;
        trigger::register_functions(&connection, &current)?;
        let changed = migrate::bring_up_to_date(&mut connection, path)?;
        let db = Db {
            path: path.to_path_buf(),
            writer: Mutex::new(connection),
            readers: Mutex::new(Vec::new()),
            current,
            generation: AtomicU64::new(1),
        };
        if let Some(report) = changed {
            migrate::record(&db, console, &report)?;
        }
        Ok(db)
    }

    /// Rises with each commit: a page kept under the same number is still true.
    pub fn generation(&self) -> u64 {
        self.generation.load(Ordering::Acquire)
    }

    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Reads inside one snapshot, on a connection that cannot write.
    pub fn read<T>(&self, body: impl FnOnce(&Reader<'_>) -> Answer<T>) -> Answer<T> {
        let kept = lock(&self.readers).pop();
        let connection = match kept {
            Some(connection) => connection,
            None => open_reader(&self.path, &self.current)?,
        };
        connection.prepare_cached("begin deferred")?.execute([])?;
        let answer = body(&Reader::over(&connection));
        connection.prepare_cached("rollback")?.execute([])?;
        let mut readers = lock(&self.readers);
        if readers.len() < KEPT_READERS {
            readers.push(connection);
        }
        answer
    }

    /// Does one act: authority, then the body, then the trail's row and the seal, in one transaction.
    ///
    /// A role that does not permit the act is `Denied`, and a rule that the act would be on own work is `OwnWork`;
    /// both, and refusals that are noted, are themselves acts in the trail. Whatever goes wrong in the body rolls
    /// everything back.
    pub fn change<T>(
        &self,
        actor: &Actor,
        act: Act,
        reason: &Reason,
        body: impl FnOnce(&mut Change<'_>) -> Answer<T>,
    ) -> Answer<T> {
        let Some(role) = permitted_role(actor, act) else {
            self.write(actor, act, reason, None, "denied", |_| Ok(()))?;
            return Err(Failure::Denied(act));
        };
        let mut concerned = Vec::new();
        let done = self.write(actor, act, reason, role, "done", |change| {
            let answer = body(change);
            concerned = change.concerned.take();
            answer
        });
        let Err(Failure::Refused(refusal)) = &done else { return done };
        if refusal.is_noted {
            self.write(actor, act, reason, role, "denied", |change| {
                change.tell(&refusal.sentence);
                concerned.iter().try_for_each(|subject| change.concerns(subject.kind, subject.id))
            })?;
        }
        if let Some(took_part) = refusal.took_part.clone() {
            return Err(Failure::OwnWork(OwnWork { act, sentence: refusal.sentence.clone(), took_part }));
        }
        done
    }

    /// Refuses a person whose roles permit none of these acts; the attempt is itself an act in the trail.
    pub fn permits(&self, actor: &Actor, acts: &[Act]) -> Answer<()> {
        let is_permitted =
            |act: &Act| !matches!(act.allowed(), Allowed::Roles(_)) || permitted_role(actor, *act).is_some();
        match acts.first() {
            Some(first) if !acts.iter().any(is_permitted) => {
                self.change(actor, *first, &Reason::none(), |_| Ok(()))
            }
            _ => Ok(()),
        }
    }

    fn write<T>(
        &self,
        actor: &Actor,
        act: Act,
        reason: &Reason,
        role: Option<&'static str>,
        outcome: &str,
        body: impl FnOnce(&mut Change<'_>) -> Answer<T>,
    ) -> Answer<T> {
        let connection = lock(&self.writer);
        let transaction = Transaction::begin(&connection, &self.current)?;
        let mut change = Change {
            reader: Reader::over(&connection),
            actor,
            act: trail::next_act(&Reader::over(&connection))?,
            detail: None,
            concerned: RefCell::default(),
        };
        self.current.line.store(0, Ordering::SeqCst);
        self.current.act.store(change.act, Ordering::SeqCst);
        if outcome == "done" {
            submission::claim(&change)?;
        }
        // The act's row comes first: were it last, SQLite would search every table for the rows that wait for it.
        trail::insert_act(&change, act, role, reason, outcome)?;
        let answer = body(&mut change)?;
        let detail = change.detail.take();
        trail::insert_detail(&change, detail.as_deref())?;
        trail::seal(&change)?;
        transaction.commit()?;
        if let Some(submission) = &actor.submission {
            submission.is_claimed.store(true, Ordering::SeqCst);
        }
        self.generation.fetch_add(1, Ordering::AcqRel);
        Ok(answer)
    }

    /// Writes to technical tables only (sessions, counters, the reading log), without an act.
    ///
    /// A trailed table refuses such a write: its trigger asks for the current act.
    pub fn housekeeping<T>(&self, body: impl FnOnce(&Housekeeping<'_>) -> Answer<T>) -> Answer<T> {
        let connection = lock(&self.writer);
        let transaction = Transaction::begin(&connection, &self.current)?;
        let answer = body(&Housekeeping { reader: Reader::over(&connection) })?;
        transaction.commit()?;
        Ok(answer)
    }

    /// Copies the whole database to a new file while others read and write, and syncs it.
    pub fn back_up(&self, to: &Path) -> Answer<()> {
        let source = open_reader(&self.path, &self.current)?;
        migrate::copy_online(&source, to)
    }

    /// Brings all of the write-ahead log into the database file and makes later commits durable.
    pub fn settle(&self) -> Answer<()> {
        let connection = lock(&self.writer);
        connection.pragma_update(None, "synchronous", "FULL")?;
        connection.query_row("pragma wal_checkpoint(truncate)", [], |_| Ok(()))?;
        Ok(())
    }
}

/// A short write to technical tables.
pub struct Housekeeping<'a> {
    reader: Reader<'a>,
}

impl<'a> Deref for Housekeeping<'a> {
    type Target = Reader<'a>;
    fn deref(&self) -> &Reader<'a> {
        &self.reader
    }
}

impl Housekeeping<'_> {
    pub(in crate::store) fn execute(&self, sql: &str, params: impl Params) -> Answer<usize> {
        Ok(self.connection().prepare_cached(sql)?.execute(params)?)
    }
}

/// The role to store with the act: `None` refuses, `Some(None)` is the program itself.
fn permitted_role(actor: &Actor, act: Act) -> Option<Option<&'static str>> {
    if actor.is_system() {
        return Some(None);
    }
    act.role_for(&actor.roles).map(|role| Some(role.code()))
}

fn prepare(connection: &Connection, durability: Durability) -> Answer<()> {
    connection.execute_batch(
        "pragma journal_mode = wal;
         pragma foreign_keys = on;
         pragma recursive_triggers = on;
         pragma trusted_schema = off;
         pragma cell_size_check = on;
         pragma mmap_size = 0;
         pragma busy_timeout = 5000;
         pragma journal_size_limit = 67108864;",
    )?;
    let synchronous = if durability == Durability::Full { "FULL" } else { "OFF" };
    connection.pragma_update(None, "synchronous", synchronous)?;
    connection.set_limit(rusqlite::limits::Limit::SQLITE_LIMIT_ATTACHED, 0)?;
    connection.set_db_config(DbConfig::SQLITE_DBCONFIG_DEFENSIVE, true)?;
    keep_statements(connection)
}

/// Statements are kept with their plans. Without the guarantee of stable plans SQLite would prepare a kept statement
/// anew for other values, which costs more than most of them do.
fn keep_statements(connection: &Connection) -> Answer<()> {
    connection.set_db_config(DbConfig::SQLITE_DBCONFIG_ENABLE_QPSG, true)?;
    connection.set_prepared_statement_cache_capacity(256);
    Ok(())
}

fn open_reader(path: &Path, current: &Arc<Current>) -> Answer<Connection> {
    let flags = OpenFlags::SQLITE_OPEN_READ_ONLY | OpenFlags::SQLITE_OPEN_NO_MUTEX;
    let connection = Connection::open_with_flags(path, flags)?;
    connection
        .execute_batch("pragma query_only = on; pragma busy_timeout = 5000; pragma trusted_schema = off;")?;
    keep_statements(&connection)?;
    trigger::register_functions(&connection, current)?;
    Ok(connection)
}

fn lock<T>(mutex: &Mutex<T>) -> MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}

/// Rolls back and forgets the current act when dropped without a commit, also on panic.
struct Transaction<'a> {
    connection: &'a Connection,
    current: &'a Current,
    is_open: bool,
}

impl<'a> Transaction<'a> {
    fn begin(connection: &'a Connection, current: &'a Current) -> Answer<Transaction<'a>> {
        connection.execute_batch("begin immediate")?;
        Ok(Transaction { connection, current, is_open: true })
    }

    fn commit(mut self) -> Answer<()> {
        self.current.act.store(0, Ordering::SeqCst);
        self.connection.execute_batch("commit")?;
        self.is_open = false;
        Ok(())
    }
}

impl Drop for Transaction<'_> {
    fn drop(&mut self) {
        self.current.act.store(0, Ordering::SeqCst);
        if self.is_open && !self.connection.is_autocommit() {
            // The first error is the one that counts; a rollback that finds nothing to do says no more.
            let _ = self.connection.execute_batch("rollback");
        }
    }
}

/// The version of the bundled SQLite.
pub fn library_version() -> String {
    rusqlite::version().to_string()
}
