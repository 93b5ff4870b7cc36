//! No page that is opened all day walks a table that grows with the years: the plan of every query it runs is looked
//! at, as SQLite says it.

use std::collections::{BTreeMap, BTreeSet};
use std::ffi::{c_char, c_int};
use std::path::PathBuf;
use std::sync::Mutex;

use rusqlite::auto_extension::{init_auto_extension, register_auto_extension};
use rusqlite::functions::FunctionFlags;
use rusqlite::trace::{TraceEvent, TraceEventCodes};
use rusqlite::{Connection, StatementStatus, ffi};
use supernate::acts;
use supernate::domain::act::Act;
use supernate::domain::actor::Actor;
use supernate::domain::moment::plus_days;
use supernate::domain::reason::Reason;
use supernate::store::bulk;

use super::support::{Lab, fresh_folder};

/// The data folder whose statements are written down, and the statements of the page being opened.
static WATCHED: Mutex<Option<PathBuf>> = Mutex::new(None);
static SEEN: Mutex<BTreeSet<String>> = Mutex::new(BTreeSet::new());
/// Every write so far with the rows it walked over.
static WRITTEN: Mutex<BTreeMap<String, i32>> = Mutex::new(BTreeMap::new());

/// Tables with a row per lot, pull, test, reading, act or visit.
const GROWING: [&str; 41] = [
    "attachment",
    "container",
    "container_event",
    "draft",
    "exception_answer",
    "flag",
    "investigation",
    "investigation_entry",
    "lot",
    "lot_decision",
    "lot_distribution",
    "open_line",
    "open_pull",
    "photo_mark",
    "pull",
    "pull_assignment",
    "pull_event",
    "reading",
    "reading_log",
    "result",
    "result_check",
    "review_decision",
    "sample",
    "sample_test",
    "session",
    "sign_in_counter",
    "signature",
    "stage_loss",
    "stop_override",
    "study",
    "study_arm",
    "submission_key",
    "trail_act",
    "trail_change",
    "trail_seal",
    "trail_subject",
    "trend_exclusion",
    "trend_forecast",
    "trend_history",
    "trend_seal",
    "trend_verdict",
];

/// The pages people live on. `{lot}`, `{study}`, `{pull}`, `{sample}` and `{test}` are of the newest lot.
const PAGES: [(&str, &str); 20] = [
    ("maren.oddy", "/week"),
    ("maren.oddy", "/week/pulls?show=late"),
    ("maren.oddy", "/lots"),
    ("maren.oddy", "/lots/{lot}"),
    ("maren.oddy", "/lots/{lot}/file"),
    ("maren.oddy", "/studies"),
    ("maren.oddy", "/studies/{study}"),
    ("maren.oddy", "/pulls/{pull}"),
    ("maren.oddy", "/find?q=BS-000003-P01"),
    ("maren.oddy", "/history"),
    ("rafe.tolland", "/bench"),
    ("rafe.tolland", "/bench/session"),
    ("rafe.tolland", "/samples/{sample}"),
    ("rafe.tolland", "/tests/{test}"),
    ("rafe.tolland", "/checks"),
    ("ada.whitlock", "/review"),
    ("ada.whitlock", "/review/{sample}"),
    ("ada.whitlock", "/review/sign"),
    ("ada.whitlock", "/trend"),
    ("ada.whitlock", "/trend/tests/{test}"),
];

#[test]
fn no_hot_page_walks_a_growing_table() {
    let (lab, ids) = filled();
    let plans = Connection::open(lab.folder.0.join("supernate.sqlite")).unwrap();
    stand_in_functions(&plans);
    let mut walks = Vec::new();
    for (person, page) in PAGES {
        let token = lab.person(person).token();
        let path = ids.iter().fold(page.to_string(), |path, (name, id)| path.replace(name, &id.to_string()));
        SEEN.lock().unwrap().clear();
        let seen = lab.get_with(&path, Some(&token));
        assert!(matches!(seen.status, 200 | 303), "{path}: {} {}", seen.status, seen.text());
        let statements = SEEN.lock().unwrap().clone();
        assert!(statements.iter().any(|sql| sql.contains("from session")), "{path} was not watched");
        for sql in statements {
            walks.extend(
                walked(&plans, &sql).into_iter().map(|walk| format!("{page}: {walk}\n{}", short(&sql))),
            );
        }
    }
    walks.extend(walks_of_a_submit(&lab, &plans, &ids));
    walks.extend(walks_of_the_clock(&lab, &plans));
    assert!(walks.is_empty(), "{} walks over a growing table:\n\n{}", walks.len(), walks.join("\n\n"));
}

/// Forecasts sealed: the history of each test is found as for its verdict.
fn walks_of_the_clock(lab: &Lab, plans: &Connection) -> Vec<String> {
    lab.later_days(160);
    SEEN.lock().unwrap().clear();
    let sealed = acts::forecast::seal_due(&lab.app.db, &Actor::clock(lab.now())).unwrap();
    assert!(sealed > 0, "a window is open");
    let statements = SEEN.lock().unwrap().clone();
    assert!(
        statements
            .iter()
            .any(|sql| sql.contains("e.happened_on < :before") || sql.contains("e.happened_on < '"))
    );
    statements.iter().flat_map(|sql| walked(plans, sql)).map(|walk| format!("sealing: {walk}")).collect()
}

/// A form sent: its key, its act, the chain.
fn walks_of_a_submit(lab: &Lab, plans: &Connection, ids: &[(&str, i64)]) -> Vec<String> {
    let page = format!("/pulls/{}", ids.iter().find(|(name, _)| *name == "{planned}").unwrap().1);
    let analyst = lab.actor("rafe.tolland").account.to_string();
    SEEN.lock().unwrap().clear();
    lab.manager().does(&page, &format!("{page}/assign"), &[("account", &analyst)]);
    let statements = SEEN.lock().unwrap().clone();
    assert!(statements.iter().any(|sql| sql.contains("from submission_key")));
    let asked = statements.iter().flat_map(|sql| walked(plans, sql));
    let mut walks: Vec<String> = asked.map(|walk| format!("{page}/assign: {walk}")).collect();
    let written = WRITTEN.lock().unwrap();
    assert!(
        ["trail_act", "pull_assignment", "reading", "result", "signature"]
            .iter()
            .all(|table| { written.keys().any(|sql| sql.contains(&format!("insert into {table} "))) })
    );
    let walkers = written.iter().filter(|(_, steps)| **steps > 0);
    walks.extend(walkers.map(|(sql, steps)| format!("a write walked over {steps} rows\n{}", short(sql))));
    walks
}

/// A walk is found where there is one, under its alias too.
#[test]
fn a_walk_is_told_from_a_search() {
    let folder = fresh_folder();
    let plans = Connection::open(folder.0.join("supernate.sqlite")).unwrap();
    stand_in_functions(&plans);
    assert_eq!(walked(&plans, "select id from lot where number = :number"), Vec::<String>::new());
    assert_eq!(walked(&plans, "select l.id from lot as l where l.size = :size"), ["SCAN l"]);
    assert_eq!(walked(&plans, "select count(*) from reading r join lot on lot.id = r.act").len(), 1);
    assert_eq!(walked(&plans, "select id from material where name = :name"), Vec::<String>::new());
}

/// A laboratory with three lots of whole studies, its statements watched; the last lot is not signed yet.
fn filled() -> (Lab, Vec<(&'static str, i64)>) {
    let folder = fresh_folder();
    *WATCHED.lock().unwrap() = Some(folder.0.canonicalize().unwrap().join("supernate.sqlite"));
    // Sound: the function below is all it registers, and it neither opens nor closes a connection.
    unsafe { register_auto_extension(watch_connection).unwrap() };
    let lab = Lab::over(folder);
    let manager = lab.actor("maren.oddy");
    let db = &lab.app.db;
    let none = Reason::none();
    let ground = db.change(&manager, Act::MakeLot, &none, |change| bulk::ground(change)).unwrap();
    let today = lab.now().date();
    let reviewer = lab.actor("ada.whitlock");
    for number in 1..=3 {
        let started_on = plus_days(today, -400);
        let written = db
            .change(&manager, Act::MakeLot, &none, |change| {
                bulk::lot(change, &ground, number, started_on, today)
            })
            .unwrap();
        if number < 3 {
            let signer = (reviewer.account, "Ada Whitlock");
            db.change(&reviewer, Act::SignPulls, &none, |change| bulk::sign(change, written.lot, signer))
                .unwrap();
        }
    }
    let newest = Connection::open(lab.folder.0.join("supernate.sqlite")).unwrap();
    let ids = [
        ("{lot}", "select max(id) from lot"),
        ("{study}", "select max(id) from study"),
        ("{pull}", "select max(pull) from pull_event"),
        ("{planned}", "select max(id) from pull"),
        ("{sample}", "select max(s.id) from sample s join pull_event e on e.pull = s.pull"),
        ("{test}", "select max(sample_test) from reading"),
    ];
    let id = |sql: &str| newest.query_row(sql, [], |row| row.get::<_, i64>(0)).unwrap();
    (lab, ids.into_iter().map(|(name, sql)| (name, id(sql))).collect())
}

/// Called by SQLite for each connection that is opened: those of the watched folder tell their statements.
unsafe extern "C" fn watch_connection(
    db: *mut ffi::sqlite3,
    message: *mut *mut c_char,
    _: *const ffi::sqlite3_api_routines,
) -> c_int {
    unsafe { init_auto_extension(db, message, watch) }
}

fn watch(connection: Connection) -> rusqlite::Result<()> {
    let is_watched = connection.path().is_some_and(|path| {
        WATCHED.lock().unwrap().as_ref().is_some_and(|watched| std::path::Path::new(path) == watched)
    });
    if is_watched {
        let both = TraceEventCodes::SQLITE_TRACE_STMT | TraceEventCodes::SQLITE_TRACE_PROFILE;
        connection.trace_v2(both, Some(saw));
    }
    Ok(())
}

/// A question is kept to look at its plan. A write is kept where it walked a table in truth: its plan also shows the
/// walks that foreign keys would ask for and that do not happen.
fn saw(event: TraceEvent<'_>) {
    let first = |sql: &str| sql.split_whitespace().next().unwrap_or_default().to_string();
    match event {
        TraceEvent::Stmt(_, sql) if ["select", "with"].contains(&first(sql).as_str()) => {
            SEEN.lock().unwrap().insert(sql.to_string());
        }
        TraceEvent::Profile(statement, _) => {
            let sql = statement.sql();
            if ["insert", "update", "delete"].contains(&first(&sql).as_str()) {
                let steps = statement.get_status(StatementStatus::FullscanStep);
                WRITTEN.lock().unwrap().insert(sql.to_string(), steps);
            }
        }
        _ => {}
    }
}

/// The lines of a statement's plan that walk a growing table or one of its indexes from end to end.
fn walked(plans: &Connection, sql: &str) -> Vec<String> {
    let mut statement = plans.prepare(&format!("explain query plan {sql}")).unwrap();
    let details = statement.raw_query().mapped(|row| row.get::<_, String>(3));
    let details: Vec<String> = details.collect::<Result<_, _>>().unwrap();
    let aliases = aliases(sql);
    let is_walk = |detail: &String| {
        let mut words = detail.split_whitespace();
        words.next() == Some("SCAN")
            && words.next().is_some_and(|name| {
                GROWING.contains(&name)
                    || aliases.iter().any(|(table, alias)| alias == name && GROWING.contains(&table.as_str()))
            })
    };
    details.into_iter().filter(is_walk).collect()
}

/// Tables with the names a statement gives them.
fn aliases(sql: &str) -> Vec<(String, String)> {
    let words: Vec<&str> = sql
        .split(|c: char| !c.is_alphanumeric() && c != '_')
        .filter(|word| !word.is_empty() && *word != "as")
        .collect();
    words
        .windows(3)
        .filter(|three| matches!(three[0], "from" | "join"))
        .map(|three| (three[1].to_string(), three[2].to_string()))
        .collect()
}

fn short(sql: &str) -> String {
    sql.chars().take(1_500).collect()
}

/// The program's functions by name, so that its statements can be prepared here; nothing runs.
fn stand_in_functions(connection: &Connection) {
    for (name, arguments) in
        [("current_act", 0), ("next_line", 0), ("row_digest", -1), ("changed_fields", -1), ("folded", 1)]
    {
        connection
            .create_scalar_function(name, arguments, FunctionFlags::SQLITE_UTF8, |_| Ok(0_i64))
            .unwrap();
    }
}
