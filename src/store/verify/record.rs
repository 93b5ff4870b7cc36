//! Records against the trail, both ways: every row is what the newest line about it says, no row is missing, and no
//! row is there that no act made.

use rusqlite::Rows;

use super::Check;
use crate::store::{Answer, Reader, trail};

/// The newest line about one row.
#[derive(Debug)]
struct Newest {
    record: String,
    row: i64,
    act: i64,
    digest: Vec<u8>,
}

/// The newest lines in the order of table and row, one ahead.
struct Lines<'a> {
    rows: Rows<'a>,
    raw: Option<Newest>,
    next: Option<Newest>,
}

impl Lines<'_> {
    fn raw(&mut self) -> Answer<Option<Newest>> {
        Ok(match self.rows.next()? {
            Some(row) => {
                Some(Newest { record: row.get(0)?, row: row.get(1)?, act: row.get(2)?, digest: row.get(3)? })
            }
            None => None,
        })
    }

    /// Takes the newest line of the next row.
    fn step(&mut self) -> Answer<()> {
        let mut newest = self.raw.take();
        loop {
            self.raw = self.raw()?;
            match (&self.raw, &newest) {
                (Some(raw), Some(known)) if raw.record == known.record && raw.row == known.row => {
                    newest = self.raw.take();
                }
                _ => break,
            }
        }
        self.next = newest;
        Ok(())
    }

    fn is_of(&self, table: &str) -> bool {
        self.next.as_ref().is_some_and(|next| next.record == table)
    }
}

pub(super) fn verify(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    let mut statement = reader
        .connection()
        .prepare("select record, row, act, digest from trail_change order by record, row, act, line")?;
    let mut lines = Lines { rows: statement.query([])?, raw: None, next: None };
    lines.raw = lines.raw()?;
    lines.step()?;
    for (table, columns) in trail::trailed_tables(reader.connection())? {
        without_table(&mut lines, Some(&table), check)?;
        verify_table(reader, &table, &columns, &mut lines, check)?;
    }
    without_table(&mut lines, None, check)
}

/// Lines about a table that does not exist (any more).
fn without_table(lines: &mut Lines<'_>, before: Option<&str>, check: &mut Check<'_>) -> Answer<()> {
    while let Some(next) =
        lines.next.as_ref().filter(|next| before.is_none_or(|table| next.record.as_str() < table))
    {
        check.found(
            Some(next.act),
            Some((&next.record, next.row)),
            "the table of this record does not exist",
        );
        lines.step()?;
    }
    Ok(())
}

fn verify_table(
    reader: &Reader<'_>,
    table: &str,
    columns: &[String],
    lines: &mut Lines<'_>,
    check: &mut Check<'_>,
) -> Answer<()> {
    let pairs: Vec<String> = columns.iter().map(|name| format!("'{name}', {name}")).collect();
    let sql = format!("select id, row_digest({}) from {table} order by id", pairs.join(", "));
    reader.each(&sql, [], |row| {
        let (id, digest): (i64, Vec<u8>) = (row.get(0)?, row.get(1)?);
        missing_before(table, id, lines, check)?;
        check.report.rows += 1;
        check.tell("records", check.report.rows);
        match lines.next.as_ref().filter(|next| next.record == table && next.row == id) {
            None => check.found(None, Some((table, id)), "no act made this row: it was added from outside"),
            Some(next) => {
                if next.digest != digest {
                    let sentence = "the row is not what this entry left: it was changed from outside";
                    check.found(Some(next.act), Some((table, id)), sentence);
                }
                lines.step()?;
            }
        }
        Ok(())
    })?;
    missing_before(table, i64::MAX, lines, check)
}

fn missing_before(table: &str, id: i64, lines: &mut Lines<'_>, check: &mut Check<'_>) -> Answer<()> {
    while let Some(next) = lines.next.as_ref().filter(|next| next.record == table && next.row < id) {
        let sentence = "the row that this entry wrote is missing: it was removed from outside";
        check.found(Some(next.act), Some((table, next.row)), sentence);
        lines.step()?;
        if !lines.is_of(table) {
            break;
        }
    }
    Ok(())
}
