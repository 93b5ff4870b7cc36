//! Laboratory checks: who checked which version of a test, or sent it back.

use rusqlite::named_params;

use super::door::Change;
use super::{Answer, Reader};

/// Records that a version of a test was checked, or sent back with a reason.
pub fn insert(
    change: &Change<'_>,
    sample_test: i64,
    version: i64,
    is_checked: bool,
    why: Option<&str>,
) -> Answer<i64> {
    change.insert(
        "insert into result_check (sample_test, version, verdict, why, account)
         values (:test, :version, :verdict, :why, :account)",
        named_params! {
            ":test": sample_test,
            ":version": version,
            ":verdict": if is_checked { "checked" } else { "sent back" },
            ":why": why,
            ":account": change.actor().account,
        },
    )
}

/// The method version a test is done by.
pub fn method_version(reader: &Reader<'_>, sample_test: i64) -> Answer<i64> {
    reader.one(
        "test with this number",
        "select method_version from sample_test where id = :id",
        named_params! { ":id": sample_test },
        |row| row.get(0),
    )
}

/// How many tests wait for their check.
pub fn count_waiting(reader: &Reader<'_>) -> Answer<usize> {
    let count: i64 = reader.one("count", "select count(*) from open_check", [], |row| row.get(0))?;
    Ok(usize::try_from(count).unwrap_or_default())
}
