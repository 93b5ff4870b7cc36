//! The schema: a golden dump, triggers on every table, migrations that are never touched after they landed.

use std::path::{Path, PathBuf};

use supernate::domain::digest::sha256_hex;
use supernate::store::trail::TECHNICAL_TABLES;

use super::support::Lab;
use super::tree::{files, golden, text};

fn open(lab: &Lab) -> rusqlite::Connection {
    rusqlite::Connection::open(lab.folder.0.join("supernate.sqlite")).unwrap()
}

fn names(connection: &rusqlite::Connection, sql: &str) -> Vec<String> {
    let mut statement = connection.prepare(sql).unwrap();
    statement.query_map([], |row| row.get(0)).unwrap().map(Result::unwrap).collect()
}

#[test]
fn the_schema_is_the_agreed_one() {
    let lab = Lab::new();
    let sql = "select sql from sqlite_schema
        where sql is not null and name not like 'trail\\_insert%' escape '\\'
            and name not like 'trail\\_update%' escape '\\' and name not like 'trail\\_delete%' escape '\\'
        order by type, name";
    golden("schema.sql", &(names(&open(&lab), sql).join(";\n\n") + ";\n"));
}

/// Every table has its three triggers or stands on the list of technical tables (decision B3).
#[test]
fn every_table_leaves_a_trail_or_is_technical() {
    let lab = Lab::new();
    let connection = open(&lab);
    let tables =
        names(&connection, "select name from sqlite_schema where type = 'table' and name not like 'sqlite%'");
    let triggers = names(&connection, "select name from sqlite_schema where type = 'trigger'");
    for table in &tables {
        if TECHNICAL_TABLES.contains(&table.as_str()) {
            continue;
        }
        for kind in ["insert", "update", "delete"] {
            let wanted = format!("trail_{kind}_{table}");
            assert!(triggers.contains(&wanted), "{wanted} is missing");
        }
        let act: i64 = connection
            .query_row("select count(*) from pragma_table_info(?1) where name = 'act'", [table], |row| {
                row.get(0)
            })
            .unwrap();
        assert_eq!(act, 1, "{table} does not say by which act a row came");
    }
    golden("technical_tables.txt", &(TECHNICAL_TABLES.join("\n") + "\n"));
}

#[test]
fn every_table_is_strict() {
    let lab = Lab::new();
    let loose = names(
        &open(&lab),
        "select name from pragma_table_list
         where schema = 'main' and type = 'table' and strict = 0 and name not like 'sqlite%'
             and name <> 'refinery_schema_history'",
    );
    assert!(loose.is_empty(), "{loose:?}");
}

fn manifest() -> String {
    let line = |path: &PathBuf| {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        format!("{}  {name}\n", sha256_hex(text(path).as_bytes()))
    };
    files("migrations", &[".sql"]).iter().map(line).collect()
}

/// The manifest names each migration with its digest.
#[test]
fn migrations_have_the_digests_of_the_manifest() {
    golden("../../migrations/MANIFEST", &manifest());
}

/// Landed migrations are never touched, not even white space, and none lands behind them. No bless writes this
/// list: a line is added by hand when a migration has landed, and a dump of that schema comes into the stories.
#[test]
fn landed_migrations_are_never_touched() {
    let landed = text(Path::new("tests/house/lists/landed_migrations.txt"));
    assert!(landed.lines().count() >= 4, "the list only grows");
    let now = manifest();
    for (landed, now) in landed.lines().zip(now.lines()) {
        assert_eq!(landed, now, "a landed migration was changed; mend it in the next one");
    }
    assert!(now.lines().count() >= landed.lines().count(), "a landed migration is gone");
}

/// The program's own functions answer with `trusted_schema` off (decision B2).
#[test]
fn triggers_work_with_a_distrusted_schema() {
    let lab = Lab::new();
    let before = lab.app.db.read(supernate::store::trail::head).unwrap().unwrap().0;
    lab.administrator().get("/people");
    assert!(
        lab.app.db.read(supernate::store::trail::head).unwrap().unwrap().0 > before,
        "signing in is an act"
    );
}
