//! Samples: every test hangs on one, with a purpose.

use chrono::NaiveDate;

use super::method::Stage;
use super::refusal::NamedReason;

/// Why a sample is tested (decision A2).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Purpose {
    StabilityPull,
    Release,
    InProcess,
    BulkHold,
    RetainCheck,
    Investigation,
    Complaint,
    Development,
}

impl Purpose {
    /// The purposes a sample can be received for; a stability pull makes its own sample.
    pub const RECEIVED: [Purpose; 7] = [
        Purpose::Release,
        Purpose::InProcess,
        Purpose::BulkHold,
        Purpose::RetainCheck,
        Purpose::Investigation,
        Purpose::Complaint,
        Purpose::Development,
    ];

    /// As stored in `sample.purpose`, and as shown.
    pub fn words(self) -> &'static str {
        match self {
            Purpose::StabilityPull => "stability pull",
            Purpose::Release => "release",
            Purpose::InProcess => "in-process",
            Purpose::BulkHold => "bulk hold",
            Purpose::RetainCheck => "retain check",
            Purpose::Investigation => "investigation",
            Purpose::Complaint => "complaint",
            Purpose::Development => "development",
        }
    }

    pub fn from_words(words: &str) -> Option<Purpose> {
        Purpose::RECEIVED.into_iter().chain([Purpose::StabilityPull]).find(|purpose| purpose.words() == words)
    }

    /// The letter in the sample's number: `TW-104-0640-R1`.
    pub fn letter(self) -> char {
        match self {
            Purpose::StabilityPull => 'P',
            Purpose::Release => 'R',
            Purpose::InProcess => 'I',
            Purpose::BulkHold => 'H',
            Purpose::RetainCheck => 'T',
            Purpose::Investigation => 'X',
            Purpose::Complaint => 'C',
            Purpose::Development => 'D',
        }
    }

    /// As stored in `sample.limit_set`: which limits the sample is judged by.
    pub fn limit_set(self) -> &'static str {
        match self {
            Purpose::Release | Purpose::InProcess | Purpose::BulkHold => "release",
            Purpose::StabilityPull | Purpose::RetainCheck | Purpose::Complaint | Purpose::Investigation => {
                "shelf-life"
            }
            Purpose::Development => "none",
        }
    }
}

/// A sample to be received.
#[derive(Clone, Debug)]
pub struct NewSample {
    pub lot: i64,
    pub purpose: Purpose,
    pub containers: i64,
    pub condition_on_receipt: String,
    pub handed_over_by: String,
    pub received_on: NaiveDate,
    /// Codes of the tests asked.
    pub tests: Vec<String>,
}

/// A test of a sample in bench order.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewSampleTest {
    pub test: String,
    pub title: String,
    pub method_version: i64,
    pub stage: Stage,
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum SampleRefusal {
    #[error("The lot was imported and not made here, so no sample of it can be tested here.")]
    LotImported,
    #[error("The presentation has no approved specification. QA approves one; then its tests can be asked.")]
    NoSpecification,
    #[error("Choose at least one test.")]
    NoTests,
    #[error("“{0}” has no approved method version. The lab manager approves one; then it can be asked.")]
    NoApprovedMethod(String),
    #[error("The sample is received on a day that has not come yet. Type today or an earlier day.")]
    ReceivedInFuture,
}

impl NamedReason for SampleRefusal {
    fn field(&self) -> Option<String> {
        match self {
            SampleRefusal::ReceivedInFuture => Some("received_on".to_string()),
            _ => None,
        }
    }
}

/// What receiving a sample asks.
#[derive(Clone, Copy, Debug)]
pub struct ReceiptFacts {
    pub is_lot_imported: bool,
    pub has_specification: bool,
    pub test_count: usize,
    pub is_in_future: bool,
}

/// Refuses in this order: the lot, the specification, no tests, the day.
pub fn may_receive(facts: ReceiptFacts) -> Result<(), SampleRefusal> {
    if facts.is_lot_imported {
        return Err(SampleRefusal::LotImported);
    }
    if !facts.has_specification {
        return Err(SampleRefusal::NoSpecification);
    }
    if facts.test_count == 0 {
        return Err(SampleRefusal::NoTests);
    }
    if facts.is_in_future {
        return Err(SampleRefusal::ReceivedInFuture);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn refusals_come_in_their_order() {
        let good = ReceiptFacts {
            is_lot_imported: false,
            has_specification: true,
            test_count: 3,
            is_in_future: false,
        };
        let table = [
            (good, None),
            (ReceiptFacts { is_in_future: true, ..good }, Some(SampleRefusal::ReceivedInFuture)),
            (ReceiptFacts { test_count: 0, is_in_future: true, ..good }, Some(SampleRefusal::NoTests)),
            (
                ReceiptFacts { has_specification: false, test_count: 0, ..good },
                Some(SampleRefusal::NoSpecification),
            ),
            (
                ReceiptFacts { is_lot_imported: true, has_specification: false, ..good },
                Some(SampleRefusal::LotImported),
            ),
        ];
        for (facts, expected) in table {
            assert_eq!(may_receive(facts).err(), expected);
        }
    }

    #[test]
    fn purposes_lead_back_from_their_words() {
        for purpose in Purpose::RECEIVED {
            assert_eq!(Purpose::from_words(purpose.words()), Some(purpose));
        }
    }
}
