//! Chambers: where containers stand, at one condition, qualified until a date.

use chrono::NaiveDate;

use super::moment::date_shown;
use super::refusal::NamedReason;

/// A chamber to be added.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewChamber {
    pub code: String,
    pub name: String,
    pub condition: i64,
    pub location: String,
    pub qualification_due_on: NaiveDate,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum ChamberRefusal {
    #[error("There is a chamber {0} already. A code is never used twice.")]
    ChamberCodeTaken(String),
}

impl NamedReason for ChamberRefusal {
    fn field(&self) -> Option<String> {
        Some("code".to_string())
    }
}

pub fn may_add(new: &NewChamber, is_code_taken: bool) -> Result<(), ChamberRefusal> {
    if is_code_taken { Err(ChamberRefusal::ChamberCodeTaken(new.code.clone())) } else { Ok(()) }
}

/// The warning for a chamber whose qualification is overdue on a date; a warning, not a stop (requirement A13).
pub fn qualification_warning(code: &str, due_on: NaiveDate, today: NaiveDate) -> Option<String> {
    (due_on < today).then(|| {
        format!(
            "The qualification of chamber {code} was due on {}. Have it done, or say why it may wait.",
            date_shown(due_on)
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_chamber_warns_from_the_day_after_its_qualification_was_due() {
        let due = NaiveDate::from_ymd_opt(2026, 12, 1).unwrap();
        assert_eq!(qualification_warning("CH-1", due, due), None);
        let late = qualification_warning("CH-1", due, due.succ_opt().unwrap()).unwrap();
        assert!(late.contains("CH-1 was due on 1 Dec 2026"), "{late}");
    }
}
