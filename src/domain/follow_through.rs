//! Follow-through containers: never opened; weight at loading, then weight, heights and a photo at each age
//! (decision A3).

use rust_decimal::Decimal;

use super::reason::SHORTEST_REASON;
use super::refusal::NamedReason;

/// What is recorded of a container at loading or at an age.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewObservation {
    /// The pull whose age it belongs to; `None` at loading.
    pub pull: Option<i64>,
    pub weight_g: Decimal,
    /// Height of the sediment above the base.
    pub bed_top_mm: Option<Decimal>,
    /// Height of the liquid above the base.
    pub fill_line_mm: Option<Decimal>,
    /// Why a recorded one is corrected; empty for a first one.
    pub why: String,
}

/// What is known of the container.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct FollowFacts {
    pub is_follow_through: bool,
    pub has_left: bool,
    pub has_loading: bool,
    /// This loading or age is recorded already.
    pub is_there: bool,
    pub is_pull_of_arm: bool,
}

#[derive(Debug, PartialEq, Eq, thiserror::Error)]
pub enum FollowRefusal {
    #[error(
        "Only a follow-through container is weighed and measured unopened. This one is kept for something else."
    )]
    NotFollowThrough,
    #[error("The container has left its chamber already. Nothing more is measured on it.")]
    FollowedHasLeft,
    #[error("That age is of another arm. Choose an age of this container's arm.")]
    AgeOfOtherArm,
    #[error("The weight at loading comes first: every later weight is compared with it.")]
    LoadingMissing,
    #[error("This is recorded already. Say in at least ten characters why it is corrected.")]
    CorrectionWithoutReason,
    #[error("The weight must be above zero. Weigh it again.")]
    WeightNotPositive,
    #[error("The top of the bed lies above the fill line, which cannot be. Read both again.")]
    BedAboveFill,
}

impl NamedReason for FollowRefusal {
    fn field(&self) -> Option<String> {
        let name = match self {
            FollowRefusal::AgeOfOtherArm | FollowRefusal::LoadingMissing => "age",
            FollowRefusal::CorrectionWithoutReason => "why",
            FollowRefusal::WeightNotPositive => "weight_g",
            FollowRefusal::BedAboveFill => "bed_top_mm",
            FollowRefusal::NotFollowThrough | FollowRefusal::FollowedHasLeft => return None,
        };
        Some(name.to_string())
    }
}

/// Refuses in this order: kept for something else, has left, age of another arm, no loading, a correction without
/// reason, weight, heights.
pub fn may_observe(new: &NewObservation, facts: FollowFacts) -> Result<(), FollowRefusal> {
    if !facts.is_follow_through {
        return Err(FollowRefusal::NotFollowThrough);
    }
    if facts.has_left {
        return Err(FollowRefusal::FollowedHasLeft);
    }
    if new.pull.is_some() && !facts.is_pull_of_arm {
        return Err(FollowRefusal::AgeOfOtherArm);
    }
    if new.pull.is_some() && !facts.has_loading {
        return Err(FollowRefusal::LoadingMissing);
    }
    if facts.is_there && new.why.trim().chars().count() < SHORTEST_REASON {
        return Err(FollowRefusal::CorrectionWithoutReason);
    }
    if new.weight_g <= Decimal::ZERO {
        return Err(FollowRefusal::WeightNotPositive);
    }
    match (new.bed_top_mm, new.fill_line_mm) {
        (Some(bed), Some(fill)) if bed > fill => Err(FollowRefusal::BedAboveFill),
        _ => Ok(()),
    }
}

/// Loss of weight since loading, % of the weight at loading: (loading − now) × 100 ÷ loading. Negative for a gain.
pub fn loss_percent(loading_g: Decimal, now_g: Decimal) -> Option<Decimal> {
    ((loading_g - now_g) * Decimal::ONE_HUNDRED).checked_div(loading_g)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(pull: Option<i64>, weight: &str, bed: Option<&str>, why: &str) -> NewObservation {
        let number = |text: &str| text.parse::<Decimal>().unwrap();
        NewObservation {
            pull,
            weight_g: number(weight),
            bed_top_mm: bed.map(number),
            fill_line_mm: Some(number("102")),
            why: why.to_string(),
        }
    }

    #[test]
    fn refusals_come_in_their_order() {
        let good = FollowFacts {
            is_follow_through: true,
            has_left: false,
            has_loading: true,
            is_there: false,
            is_pull_of_arm: true,
        };
        let first = at(Some(1), "251.32", Some("60"), "");
        let table = [
            (first.clone(), good, Ok(())),
            (
                first.clone(),
                FollowFacts { is_follow_through: false, has_left: true, ..good },
                Err(FollowRefusal::NotFollowThrough),
            ),
            (first.clone(), FollowFacts { has_left: true, ..good }, Err(FollowRefusal::FollowedHasLeft)),
            (first.clone(), FollowFacts { is_pull_of_arm: false, ..good }, Err(FollowRefusal::AgeOfOtherArm)),
            (first.clone(), FollowFacts { has_loading: false, ..good }, Err(FollowRefusal::LoadingMissing)),
            (
                at(None, "252.1", None, ""),
                FollowFacts { has_loading: false, is_pull_of_arm: false, ..good },
                Ok(()),
            ),
            (
                first.clone(),
                FollowFacts { is_there: true, ..good },
                Err(FollowRefusal::CorrectionWithoutReason),
            ),
            (at(Some(1), "0", None, ""), good, Err(FollowRefusal::WeightNotPositive)),
            (at(Some(1), "251", Some("103"), ""), good, Err(FollowRefusal::BedAboveFill)),
            (
                at(Some(1), "251", None, "read off the wrong balance"),
                FollowFacts { is_there: true, ..good },
                Ok(()),
            ),
        ];
        for (new, facts, expected) in table {
            assert_eq!(may_observe(&new, facts), expected, "{new:?} {facts:?}");
        }
    }

    #[test]
    fn the_loss_is_of_the_weight_at_loading() {
        let number = |text: &str| text.parse::<Decimal>().unwrap();
        assert_eq!(loss_percent(number("250"), number("245")), Some(number("2")));
        assert_eq!(loss_percent(number("250"), number("251")), Some(number("-0.4")));
        assert_eq!(loss_percent(Decimal::ZERO, number("251")), None);
    }
}
