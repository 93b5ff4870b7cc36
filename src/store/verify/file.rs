//! Attachments: every file a record names is there, with the size and digest that were recorded.

use std::path::Path;

use super::Check;
use crate::domain::digest::sha256_hex;
use crate::store::{Answer, Reader};

pub(super) fn verify(reader: &Reader<'_>, files: &Path, check: &mut Check<'_>) -> Answer<()> {
    let named = reader.all(
        "select id, act, file_name, size_bytes, sha256 from attachment order by id",
        [],
        |row| {
            Ok((
                row.get::<_, i64>(0)?,
                row.get::<_, i64>(1)?,
                row.get::<_, String>(2)?,
                row.get::<_, i64>(3)?,
                row.get::<_, String>(4)?,
            ))
        },
    )?;
    for (id, act, name, size, digest) in named {
        check.report.attachments += 1;
        let found = std::fs::read(files.join(&digest)).ok();
        let sentence = match found {
            None => format!("the file “{name}” is missing"),
            Some(bytes) if bytes.len() as i64 != size || sha256_hex(&bytes) != digest => {
                format!("the file “{name}” is not the one that was attached")
            }
            Some(_) => continue,
        };
        check.found(Some(act), Some(("attachment", id)), sentence);
    }
    Ok(())
}
