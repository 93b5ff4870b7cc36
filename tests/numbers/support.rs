//! Reading committed data and comparing numbers.

use std::path::{Path, PathBuf};

/// The path of a committed data file.
pub fn data(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/numbers/data").join(name)
}

/// The rows of a comma-separated file with a header.
pub fn rows(name: &str) -> Vec<csv::StringRecord> {
    let mut reader = csv::Reader::from_path(data(name)).unwrap();
    reader.records().map(|row| row.unwrap()).collect()
}

/// |got − want| / |want|; the plain difference where the wanted value is zero.
pub fn relative(got: f64, want: f64) -> f64 {
    if want == 0.0 { got.abs() } else { ((got - want) / want).abs() }
}

/// Fails unless `got` agrees with `want` to the relative tolerance.
#[track_caller]
pub fn agree(got: f64, want: f64, tolerance: f64, what: &str) {
    let off = relative(got, want);
    assert!(off <= tolerance, "{what}: got {got:e}, wanted {want:e}, relative difference {off:e}");
}
