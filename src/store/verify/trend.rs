//! Trend: the digests over histories and sealed forecasts are computed again, and every result that a history names
//! still has the value it was used with.

use rusqlite::named_params;

use super::Check;
use crate::domain::digest::sha256_hex;
use crate::domain::trend::history::History;
use crate::store::{Answer, Exact, Reader};

pub(super) fn verify(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    for table in ["trend_history", "trend_forecast"] {
        let sql = match table {
            "trend_history" => "select id, content, digest, act from trend_history order by id",
            _ => "select id, content, digest, act from trend_forecast order by id",
        };
        reader.each(sql, [], |row| {
            let (id, content, digest): (i64, String, String) = (row.get(0)?, row.get(1)?, row.get(2)?);
            let act = row.get(3)?;
            if sha256_hex(content.as_bytes()) != digest {
                check.found(
                    act,
                    Some((table, id)),
                    "its text does not have the digest that stands beside it",
                );
            } else if table == "trend_history" {
                used(reader, check, act, id, &content)?;
            }
            Ok(())
        })?;
    }
    Ok(())
}

fn used(reader: &Reader<'_>, check: &mut Check<'_>, act: Option<i64>, id: i64, content: &str) -> Answer<()> {
    let Some(history) = History::read(content) else {
        check.found(act, Some(("trend_history", id)), "its text is no history");
        return Ok(());
    };
    for entry in history.entries() {
        let value: Option<Option<Exact>> = reader.maybe(
            "select value from result where id = :id",
            named_params! { ":id": entry.result },
            |row| row.get(0),
        )?;
        if value.flatten().map(|exact| exact.0) != Some(entry.value) {
            let sentence = format!("result row {} does not have the value it was used with", entry.result);
            check.found(act, Some(("trend_history", id)), sentence);
        }
    }
    Ok(())
}
