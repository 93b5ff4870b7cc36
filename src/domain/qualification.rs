//! Qualifications: which person may do tests by which method version, from when to when.

use chrono::NaiveDate;

use super::moment::date_shown;
use super::refusal::NamedReason;

/// A qualification about to be recorded.
#[derive(Clone, Debug)]
pub struct NewQualification {
    pub account: i64,
    pub method_version: i64,
    pub starts_on: NaiveDate,
    pub ends_on: NaiveDate,
    /// Training record, comparison test.
    pub reference: String,
}

/// All that decides whether a person may do a test by a method version on a day.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct QualificationFacts {
    pub full_name: String,
    /// Code and version: `PH-01 version 2`.
    pub method: String,
    /// First and last day of each qualification on record.
    pub spans: Vec<(NaiveDate, NaiveDate)>,
    /// QA lifted the stop for the day the facts were asked for.
    pub is_lifted: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum QualificationRefusal {
    #[error("{name} is not qualified for {method}. The lab manager records qualifications.")]
    NotQualified { name: String, method: String },
    #[error("The qualification of {name} for {method} begins on {}.", date_shown(*on))]
    QualificationNotBegun { name: String, method: String, on: NaiveDate },
    #[error("The qualification of {name} for {method} ended on {}. The lab manager can renew it.", date_shown(*on))]
    QualificationEnded { name: String, method: String, on: NaiveDate },
    #[error("The last day comes before the first. Type the last day of the qualification.")]
    EndsBeforeStart,
    #[error("A qualification is recorded by somebody else than the person it is for.")]
    OwnQualification,
    #[error("Only people who hold the role analyst or lab manager do tests.")]
    PersonDoesNoTests,
}

impl NamedReason for QualificationRefusal {
    fn field(&self) -> Option<String> {
        match self {
            QualificationRefusal::EndsBeforeStart => Some("ends_on".to_string()),
            QualificationRefusal::OwnQualification | QualificationRefusal::PersonDoesNoTests => {
                Some("account".to_string())
            }
            _ => None,
        }
    }
}

/// Whether the person may test today. Both days of a span count. Refuses in this order: never qualified, ended,
/// not begun. A stop that QA lifted for the day is passed over.
pub fn may_test(facts: &QualificationFacts, today: NaiveDate) -> Result<(), QualificationRefusal> {
    if facts.is_lifted
        || facts.spans.iter().any(|(starts_on, ends_on)| (*starts_on..=*ends_on).contains(&today))
    {
        return Ok(());
    }
    let (name, method) = (facts.full_name.clone(), facts.method.clone());
    let ended = facts.spans.iter().map(|(_, ends_on)| *ends_on).filter(|ends_on| *ends_on < today).max();
    let begins = facts.spans.iter().map(|(starts_on, _)| *starts_on).filter(|on| *on > today).min();
    match (ended, begins) {
        (Some(on), _) => Err(QualificationRefusal::QualificationEnded { name, method, on }),
        (None, Some(on)) => Err(QualificationRefusal::QualificationNotBegun { name, method, on }),
        (None, None) => Err(QualificationRefusal::NotQualified { name, method }),
    }
}

/// Refuses in this order: the own qualification, a person who does no tests, the days.
pub fn may_qualify(new: &NewQualification, by: i64, does_tests: bool) -> Result<(), QualificationRefusal> {
    if new.account == by {
        return Err(QualificationRefusal::OwnQualification);
    }
    if !does_tests {
        return Err(QualificationRefusal::PersonDoesNoTests);
    }
    if new.ends_on < new.starts_on {
        return Err(QualificationRefusal::EndsBeforeStart);
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    /// Decision A10: unqualified or expired is a hard stop; an override of the day passes.
    #[test]
    fn a_person_tests_only_inside_a_qualification() {
        type Case<'a> = (&'a [(&'a str, &'a str)], bool, &'a str);
        let table: [Case<'_>; 8] = [
            (&[], false, "NotQualified"),
            (&[], true, "qualified"),
            (&[("2026-12-01", "2027-11-30")], false, "qualified"),
            (&[("2025-12-01", "2026-12-01")], false, "qualified"),
            (&[("2025-12-01", "2026-11-30")], false, "QualificationEnded"),
            (&[("2026-12-02", "2027-11-30")], false, "QualificationNotBegun"),
            (&[("2024-01-01", "2024-12-31"), ("2026-12-02", "2027-11-30")], false, "QualificationEnded"),
            (&[("2024-01-01", "2024-12-31"), ("2026-11-02", "2027-11-30")], false, "qualified"),
        ];
        for (spans, is_lifted, expected) in table {
            let facts = QualificationFacts {
                full_name: "Rafe Tolland".to_string(),
                method: "PH-01 version 2".to_string(),
                spans: spans.iter().map(|(from, to)| (day(from), day(to))).collect(),
                is_lifted,
            };
            let found = match may_test(&facts, day("2026-12-01")) {
                Ok(()) => "qualified".to_string(),
                Err(refusal) => super::super::refusal::Refusal::from(refusal).name,
            };
            assert_eq!(found, expected, "{spans:?}");
        }
    }

    #[test]
    fn nobody_qualifies_themselves_and_the_days_are_in_order() {
        let new = NewQualification {
            account: 5,
            method_version: 1,
            starts_on: day("2026-12-01"),
            ends_on: day("2026-11-30"),
            reference: "training 14".to_string(),
        };
        assert_eq!(may_qualify(&new, 5, true), Err(QualificationRefusal::OwnQualification));
        assert_eq!(may_qualify(&new, 6, false), Err(QualificationRefusal::PersonDoesNoTests));
        assert_eq!(may_qualify(&new, 6, true), Err(QualificationRefusal::EndsBeforeStart));
        let good = NewQualification { ends_on: day("2026-12-01"), ..new };
        assert_eq!(may_qualify(&good, 6, true), Ok(()));
    }
}
