//! Antimicrobial effectiveness (USP ⟨51⟩) and microbial limits (USP ⟨1111⟩).

/// A product category.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Category {
    /// 2: topical, aqueous.
    Topical,
    /// 3: oral, aqueous.
    Oral,
    /// 4: antacids.
    Antacid,
}

/// The kind of organism.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Organism {
    /// Bacteria.
    Bacteria,
    /// Yeast and mould.
    Fungi,
}

/// Counts in cfu/mL: initial (calculated), day 14, day 28.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Challenge {
    /// Initial calculated count.
    pub initial: f64,
    /// Day 14.
    pub day_14: f64,
    /// Day 28.
    pub day_28: f64,
}

/// Log reductions and the verdict.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Effect {
    /// log₁₀ reduction to day 14.
    pub reduction_14: f64,
    /// log₁₀ reduction to day 28.
    pub reduction_28: f64,
    /// Whether the criteria of the category are met.
    pub meets: bool,
}

/// "No increase" is at most 0.5 log₁₀ higher.
const NO_INCREASE: f64 = 0.5;

/// log₁₀ reduction; a count of 0 is taken as 1 (below one colony nothing was seen). `None` unless the first
/// count is positive and the second not negative.
pub fn log_reduction(from: f64, to: f64) -> Option<f64> {
    let reduction = from.log10() - to.max(1.0).log10();
    (from > 0.0 && to >= 0.0 && reduction.is_finite()).then_some(reduction)
}

/// Judges one organism (criteria text of USP 29): bacteria ≥ 2.0 (topical) or ≥ 1.0 (oral) log at day 14 and
/// no increase to day 28; fungi, and everything in antacids, no increase from the start at days 14 and 28.
pub fn judge(category: Category, organism: Organism, challenge: Challenge) -> Option<Effect> {
    let reduction_14 = log_reduction(challenge.initial, challenge.day_14)?;
    let reduction_28 = log_reduction(challenge.initial, challenge.day_28)?;
    let close = 1e-9;
    let no_increase = |reduction: f64| reduction >= -NO_INCREASE - close;
    let meets = match (category, organism) {
        (Category::Topical | Category::Oral, Organism::Bacteria) => {
            let wanted = if category == Category::Topical { 2.0 } else { 1.0 };
            reduction_14 >= wanted - close && reduction_28 >= reduction_14 - NO_INCREASE - close
        }
        _ => no_increase(reduction_14) && no_increase(reduction_28),
    };
    Some(Effect { reduction_14, reduction_28, meets })
}

/// The largest count that meets a limit of 10^k cfu: 10¹ allows 20, 10² 200, 10³ 2000.
pub fn largest_count(power: u32) -> Option<u64> {
    10u64.checked_pow(power)?.checked_mul(2)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn meets(category: Category, organism: Organism, counts: [f64; 3]) -> bool {
        let [initial, day_14, day_28] = counts;
        judge(category, organism, Challenge { initial, day_14, day_28 }).unwrap().meets
    }

    #[test]
    fn criteria_by_category() {
        use Category::*;
        use Organism::*;
        assert!(meets(Oral, Bacteria, [1e6, 1e5, 1e5]));
        assert!(!meets(Topical, Bacteria, [1e6, 1e5, 1e4]));
        assert!(meets(Topical, Bacteria, [1e6, 1e4, 3e4]));
        assert!(!meets(Oral, Bacteria, [1e6, 1e4, 5e4]), "0.7 log back up");
        assert!(meets(Oral, Fungi, [1e5, 3e5, 1e5]));
        assert!(!meets(Oral, Fungi, [1e5, 4e5, 1e5]));
        assert!(meets(Antacid, Bacteria, [1e5, 1e5, 3e5]));
        assert_eq!(log_reduction(1e5, 0.0), Some(5.0));
        assert_eq!(log_reduction(0.0, 1.0), None);
    }

    #[test]
    fn limits_as_counts() {
        assert_eq!((largest_count(1), largest_count(2), largest_count(3)), (Some(20), Some(200), Some(2000)));
    }
}
