//! Investigations of results out of specification: a working record from the first day.

use super::refusal::NamedReason;

/// The kinds of line a person writes; steering and conclusion have their own acts.
pub const WRITTEN: [&str; 3] = ["finding", "evidence", "other lot considered"];

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum InvestigationRefusal {
    #[error("The investigation is concluded. What comes up later opens a new one with its own result.")]
    InvestigationConcluded,
    #[error("Name the lot that was considered.")]
    OtherLotMissing,
    #[error("That is the lot under investigation. Name another one.")]
    OtherLotIsOwn,
    #[error("No finding is recorded yet. Write what was found; then conclude from it.")]
    NoFinding,
    #[error("Nobody steers the investigation yet. Name who does; then conclude.")]
    NobodySteers,
    #[error("{0} is neither lab manager nor QA reviewer and cannot steer an investigation.")]
    CannotSteer(String),
    #[error("You took part in the readings. Another QA reviewer concludes.")]
    OwnReadings(Vec<i64>),
}

impl NamedReason for InvestigationRefusal {
    fn field(&self) -> Option<String> {
        match self {
            InvestigationRefusal::OtherLotMissing | InvestigationRefusal::OtherLotIsOwn => {
                Some("other_lot".to_string())
            }
            InvestigationRefusal::CannotSteer(_) => Some("account".to_string()),
            _ => None,
        }
    }

    fn took_part(&self) -> Option<Vec<i64>> {
        match self {
            InvestigationRefusal::OwnReadings(readers) => Some(readers.clone()),
            _ => None,
        }
    }
}

/// Refuses in this order: concluded, the other lot missing, the other lot is its own.
pub fn may_write(
    is_concluded: bool,
    kind: &str,
    other_lot: Option<i64>,
    own_lot: i64,
) -> Result<(), InvestigationRefusal> {
    if is_concluded {
        return Err(InvestigationRefusal::InvestigationConcluded);
    }
    match other_lot {
        None if kind == "other lot considered" => Err(InvestigationRefusal::OtherLotMissing),
        Some(lot) if lot == own_lot => Err(InvestigationRefusal::OtherLotIsOwn),
        _ => Ok(()),
    }
}

/// What concluding asks.
#[derive(Clone, Debug)]
pub struct ConcludeFacts {
    pub is_concluded: bool,
    pub is_steered: bool,
    pub findings: usize,
    /// The accounts that took the readings, and the one that concludes.
    pub readers: Vec<i64>,
    pub concluder: i64,
}

/// Refuses in this order: concluded, nobody steers, no finding, own readings.
pub fn may_conclude(facts: ConcludeFacts) -> Result<(), InvestigationRefusal> {
    if facts.is_concluded {
        return Err(InvestigationRefusal::InvestigationConcluded);
    }
    if !facts.is_steered {
        return Err(InvestigationRefusal::NobodySteers);
    }
    if facts.findings == 0 {
        return Err(InvestigationRefusal::NoFinding);
    }
    if facts.readers.contains(&facts.concluder) {
        return Err(InvestigationRefusal::OwnReadings(facts.readers));
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn refusals_come_in_their_order() {
        use InvestigationRefusal::*;
        let good = || ConcludeFacts {
            is_concluded: false,
            is_steered: true,
            findings: 1,
            readers: vec![4],
            concluder: 7,
        };
        let table = [
            (good(), None),
            (ConcludeFacts { concluder: 4, ..good() }, Some(OwnReadings(vec![4]))),
            (ConcludeFacts { findings: 0, concluder: 4, ..good() }, Some(NoFinding)),
            (ConcludeFacts { is_steered: false, findings: 0, ..good() }, Some(NobodySteers)),
            (ConcludeFacts { is_concluded: true, is_steered: false, ..good() }, Some(InvestigationConcluded)),
        ];
        for (facts, expected) in table {
            assert_eq!(may_conclude(facts.clone()).err(), expected, "{facts:?}");
        }
        assert_eq!(may_write(true, "finding", None, 4), Err(InvestigationConcluded));
        assert_eq!(may_write(false, "other lot considered", None, 4), Err(OtherLotMissing));
        assert_eq!(may_write(false, "other lot considered", Some(4), 4), Err(OtherLotIsOwn));
        assert_eq!(may_write(false, "other lot considered", Some(5), 4), Ok(()));
    }
}
