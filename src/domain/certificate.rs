//! Certificates of analysis: what was tested for release of a lot, with limits, results and who reviewed them.

use serde::{Deserialize, Serialize};

use super::refusal::NamedReason;

/// The whole certificate, as it is signed and printed.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct CertificateContent {
    pub lot: String,
    pub product: String,
    pub presentation: String,
    pub formulation: String,
    pub made_on: String,
    /// "30 Nov 2028", or that it is not decided yet.
    pub expiry: String,
    pub storage: String,
    /// The specification versions the results were judged by.
    pub specifications: Vec<String>,
    pub rows: Vec<CertificateRow>,
    pub samples: Vec<CertifiedSample>,
    /// "released on 3 Dec 2026", or that nobody has decided.
    pub decision: String,
}

/// One result with its limit.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct CertificateRow {
    pub test: String,
    pub method: String,
    pub limit: String,
    pub result: String,
    pub verdict: String,
    pub sample: String,
}

/// A sample whose results stand in the certificate.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct CertifiedSample {
    pub number: String,
    pub received_on: String,
    pub reviewed_by: String,
    pub reviewed_at: String,
}

impl CertificateContent {
    /// Whether every result conforms or has no limit.
    pub fn conforms(&self) -> bool {
        self.rows.iter().all(|row| ["conforms", "no limit"].contains(&row.verdict.as_str()))
    }
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum CertificateRefusal {
    #[error("{0} was imported, not tested here. It is certified where it was tested.")]
    CertificateOfImported(String),
    #[error("Say what is new in this version, in at least ten characters.")]
    NewsMissing,
    #[error("Version {0} states exactly this. There is nothing to certify anew.")]
    NothingNew(i64),
    #[error("Results or facts have changed since this page was shown. Look at them again, then sign.")]
    CertificateChanged,
}

impl NamedReason for CertificateRefusal {
    fn field(&self) -> Option<String> {
        matches!(self, CertificateRefusal::NewsMissing).then(|| "why".to_string())
    }
}

/// Whether a version may be signed. `newest` is the version that stands, with whether it states the same.
///
/// Refuses in this order: imported, changed since it was shown, nothing new, what is new is missing.
pub fn may_certify(
    lot: &str,
    is_imported: bool,
    is_as_shown: bool,
    newest: Option<(i64, bool)>,
    why: &str,
) -> Result<(), CertificateRefusal> {
    if is_imported {
        return Err(CertificateRefusal::CertificateOfImported(lot.to_string()));
    }
    if !is_as_shown {
        return Err(CertificateRefusal::CertificateChanged);
    }
    match newest {
        Some((version, true)) => Err(CertificateRefusal::NothingNew(version)),
        Some(_) if why.trim().chars().count() < 10 => Err(CertificateRefusal::NewsMissing),
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_certificate_is_refused_for_its_first_fault() {
        use CertificateRefusal::*;
        let table = [
            (false, true, None, "", Ok(())),
            (true, false, None, "", Err(CertificateOfImported("TW-104".to_string()))),
            (false, false, Some((1, true)), "", Err(CertificateChanged)),
            (false, true, Some((1, true)), "", Err(NothingNew(1))),
            (false, true, Some((1, false)), "expiry", Err(NewsMissing)),
            (false, true, Some((1, false)), "the expiry is decided now", Ok(())),
        ];
        for (is_imported, is_as_shown, newest, why, expected) in table {
            assert_eq!(
                may_certify("TW-104", is_imported, is_as_shown, newest, why),
                expected,
                "{newest:?} {why}"
            );
        }
    }

    #[test]
    fn one_result_outside_is_enough_not_to_conform() {
        let row = |verdict: &str| CertificateRow {
            test: "Assay".to_string(),
            method: "AS-01 version 1".to_string(),
            limit: "97.0 to 103.0 %".to_string(),
            result: "99.9 %".to_string(),
            verdict: verdict.to_string(),
            sample: "R1".to_string(),
        };
        let of = |rows: Vec<CertificateRow>| CertificateContent { rows, ..CertificateContent::default() };
        assert!(of(vec![row("conforms"), row("no limit")]).conforms());
        assert!(!of(vec![row("conforms"), row("out of specification")]).conforms());
    }
}
