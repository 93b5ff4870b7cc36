//! An archive that depends on its content alone: fixed order, no clock, no owner.

use std::io::{Cursor, Write};

use zip::write::SimpleFileOptions;
use zip::{CompressionMethod, DateTime, ZipWriter};

use crate::domain::digest::sha256_hex;
use crate::domain::failure::Failure;

/// The name of the list of digests inside an archive.
pub const MANIFEST: &str = "MANIFEST.sha256";

/// Packs files in the given order, with a list of their digests as the last one. The same files give the same bytes.
pub fn pack(files: &[(String, Vec<u8>)]) -> Result<Vec<u8>, Failure> {
    let mut archive = ZipWriter::new(Cursor::new(Vec::new()));
    let options = SimpleFileOptions::default()
        .compression_method(CompressionMethod::Deflated)
        .last_modified_time(DateTime::default())
        .unix_permissions(0o644);
    let manifest = (MANIFEST.to_string(), manifest(files).into_bytes());
    for (name, bytes) in files.iter().chain([&manifest]) {
        archive.start_file(name.as_str(), options).map_err(Failure::fault)?;
        archive.write_all(bytes)?;
    }
    Ok(archive.finish().map_err(Failure::fault)?.into_inner())
}

/// One line a file, as `sha256sum --check` reads it.
fn manifest(files: &[(String, Vec<u8>)]) -> String {
    files.iter().map(|(name, bytes)| format!("{}  {name}\n", sha256_hex(bytes))).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_same_files_give_the_same_bytes() {
        let files = vec![("a.txt".to_string(), b"one".to_vec()), ("b/c.txt".to_string(), b"two".to_vec())];
        let packed = pack(&files).unwrap();
        assert_eq!(packed, pack(&files).unwrap());
        assert_ne!(packed, pack(&files[..1]).unwrap());
    }
}
