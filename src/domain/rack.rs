//! The formulator's rack: development lots side by side from one time zero, ranked by how they stand.

use chrono::NaiveDate;
use rust_decimal::Decimal;
use rust_decimal::prelude::ToPrimitive;

use super::lot::Scale;
use super::refusal::NamedReason;
use crate::science::settling_curve::{self, Reading};

/// A rack to be put up.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewRack {
    pub code: String,
    pub title: String,
    pub started_on: NaiveDate,
}

/// So many lots a rack holds.
pub const PLACES: usize = 12;

/// What is known when a lot is about to be put on a rack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PutFacts {
    pub lot: String,
    pub lots_on_rack: usize,
    /// The rack it stands on already.
    pub stands_on: Option<String>,
    pub is_imported: bool,
    pub scale: String,
    pub made_on: Option<NaiveDate>,
    pub started_on: NaiveDate,
    /// It is on a study that is not a development study.
    pub is_on_official_study: bool,
}

#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum RackRefusal {
    #[error("There is a rack {0} already. Choose another code.")]
    RackCodeTaken(String),
    #[error("Time zero lies ahead. Put the rack up on its day.")]
    RackInFuture,
    #[error("The rack is full: it holds {PLACES} lots. Put up another.")]
    RackFull,
    #[error("{lot} stands on rack {rack} already. A lot stands on one rack.")]
    LotOnRack { lot: String, rack: String },
    #[error("{0} was imported, not observed here. It stands on no rack.")]
    LotImported(String),
    #[error(
        "{lot} is of {scale} scale. A rack holds laboratory lots only, so that none is taken for an official one."
    )]
    LotNotLaboratory { lot: String, scale: String },
    #[error("{0} is on a study for registration. It is no development lot.")]
    LotOnOfficialStudy(String),
    #[error("{0} was made after the rack's time zero. All lots of a rack begin together.")]
    LotMadeLater(String),
}

impl NamedReason for RackRefusal {
    fn field(&self) -> Option<String> {
        use RackRefusal::*;
        let name = match self {
            RackCodeTaken(_) => "code",
            RackInFuture => "started_on",
            _ => "lot",
        };
        Some(name.to_string())
    }
}

/// Refuses a code in use, then a day ahead.
pub fn may_start(new: &NewRack, is_code_taken: bool, today: NaiveDate) -> Result<(), RackRefusal> {
    if is_code_taken {
        return Err(RackRefusal::RackCodeTaken(new.code.clone()));
    }
    if new.started_on > today { Err(RackRefusal::RackInFuture) } else { Ok(()) }
}

/// Refuses in this order: rack full, on a rack already, imported, not of laboratory scale, on an official study, made
/// after time zero.
pub fn may_put(facts: &PutFacts) -> Result<(), RackRefusal> {
    let lot = facts.lot.clone();
    if facts.lots_on_rack >= PLACES {
        return Err(RackRefusal::RackFull);
    }
    if let Some(rack) = &facts.stands_on {
        return Err(RackRefusal::LotOnRack { lot, rack: rack.clone() });
    }
    if facts.is_imported {
        return Err(RackRefusal::LotImported(lot));
    }
    if facts.scale != Scale::Laboratory.words() {
        return Err(RackRefusal::LotNotLaboratory { lot, scale: facts.scale.clone() });
    }
    if facts.is_on_official_study {
        return Err(RackRefusal::LotOnOfficialStudy(lot));
    }
    match facts.made_on {
        Some(made_on) if made_on > facts.started_on => Err(RackRefusal::LotMadeLater(lot)),
        _ => Ok(()),
    }
}

/// One look at a lot on a rack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Look {
    pub lot: i64,
    pub sample: i64,
    /// Days since time zero.
    pub day: i64,
    pub ratio: Option<Decimal>,
    pub clarity: Option<u8>,
    pub inversions: Option<Decimal>,
    /// "more than 100": not uniform by then.
    pub is_beyond: bool,
    pub inversions_shown: String,
}

/// Where a lot stands among the others.
#[derive(Clone, Debug, PartialEq)]
pub struct Standing {
    pub lot: i64,
    /// Day by which its bed had fallen suddenly; none: it has not.
    pub collapsed_by_day: Option<i64>,
    pub last_ratio: Option<Decimal>,
    pub last_inversions: Option<Decimal>,
    pub looks: usize,
}

/// Ranks lots: those that have not collapsed first, then the latest collapse, then the highest newest F, then the
/// fewest inversions. Lots without a look come last.
pub fn rank(lots: &[i64], looks: &[Look]) -> Vec<Standing> {
    let mut standings: Vec<Standing> = lots.iter().map(|lot| standing(*lot, looks)).collect();
    standings.sort_by(|one, other| {
        let collapse = |standing: &Standing| standing.collapsed_by_day.unwrap_or(i64::MAX);
        let inversions = |standing: &Standing| standing.last_inversions.unwrap_or(Decimal::MAX);
        (one.looks == 0)
            .cmp(&(other.looks == 0))
            .then(collapse(other).cmp(&collapse(one)))
            .then(other.last_ratio.cmp(&one.last_ratio))
            .then(inversions(one).cmp(&inversions(other)))
            .then(one.lot.cmp(&other.lot))
    });
    standings
}

fn standing(lot: i64, looks: &[Look]) -> Standing {
    let mut own: Vec<&Look> = looks.iter().filter(|look| look.lot == lot).collect();
    own.sort_by_key(|look| (look.day, look.sample));
    own.dedup_by_key(|look| look.day);
    let ratios: Vec<Reading> = own
        .iter()
        .filter_map(|look| Some(Reading { time: look.day as f64, height: look.ratio?.to_f64()? }))
        .collect();
    let collapse = settling_curve::analyse(&ratios).ok().and_then(|curve| curve.collapse);
    Standing {
        lot,
        collapsed_by_day: collapse.map(|fall| fall.to.round() as i64),
        last_ratio: own.iter().rev().find_map(|look| look.ratio),
        last_inversions: own.iter().rev().find_map(|look| look.inversions),
        looks: own.len(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn day(text: &str) -> NaiveDate {
        text.parse().unwrap()
    }

    fn good() -> PutFacts {
        PutFacts {
            lot: "D-1".to_string(),
            lots_on_rack: 3,
            stands_on: None,
            is_imported: false,
            scale: "laboratory".to_string(),
            made_on: Some(day("2026-11-30")),
            started_on: day("2026-12-01"),
            is_on_official_study: false,
        }
    }

    #[test]
    fn a_rack_takes_laboratory_lots_of_its_day_and_refuses_in_order() {
        assert_eq!(may_put(&good()), Ok(()));
        let later = Some(day("2026-12-02"));
        let table = [
            ("RackFull", PutFacts { lots_on_rack: 12, stands_on: Some("R-1".to_string()), ..good() }),
            ("LotOnRack", PutFacts { stands_on: Some("R-1".to_string()), is_imported: true, ..good() }),
            ("LotImported", PutFacts { is_imported: true, scale: "pilot".to_string(), ..good() }),
            (
                "LotNotLaboratory",
                PutFacts { scale: "pilot".to_string(), is_on_official_study: true, ..good() },
            ),
            ("LotOnOfficialStudy", PutFacts { is_on_official_study: true, made_on: later, ..good() }),
            ("LotMadeLater", PutFacts { made_on: later, ..good() }),
        ];
        for (name, facts) in table {
            let refused = format!("{:?}", may_put(&facts).unwrap_err());
            assert!(refused.starts_with(name), "{name}: {refused}");
        }
        let new =
            NewRack { code: "R-1".to_string(), title: "Gums".to_string(), started_on: day("2026-12-02") };
        assert_eq!(
            may_start(&new, true, day("2026-12-01")),
            Err(RackRefusal::RackCodeTaken("R-1".to_string()))
        );
        assert_eq!(may_start(&new, false, day("2026-12-01")), Err(RackRefusal::RackInFuture));
    }

    /// The published acacia series that yields between day 14 and 21 (0.90 to 0.50) stands behind one that does not.
    #[test]
    fn a_late_collapse_ranks_last_then_f_and_inversions_decide() {
        let look = |lot: i64, day: i64, ratio: &str, inversions: i64| Look {
            lot,
            sample: lot * 100 + day,
            day,
            ratio: ratio.parse().ok(),
            clarity: None,
            inversions: Some(Decimal::from(inversions)),
            is_beyond: false,
            inversions_shown: inversions.to_string(),
        };
        let mut looks = Vec::new();
        for (lot, ratios) in [(1, ["1.00", "0.95", "0.90", "0.50"]), (2, ["1.00", "0.96", "0.93", "0.91"])] {
            looks.extend([1, 7, 14, 21].iter().zip(ratios).map(|(day, ratio)| look(lot, *day, ratio, 5)));
        }
        looks.push(look(3, 21, "0.91", 4));
        let ranked = rank(&[1, 2, 3, 4], &looks);
        let order: Vec<i64> = ranked.iter().map(|one| one.lot).collect();
        assert_eq!(order, [3, 2, 1, 4]);
        assert_eq!(ranked[2].collapsed_by_day, Some(21));
    }
}
